import type { DrawerStep } from "../../core/contract/drawer-schemas.ts";

/** What Ctrl+Z and Ctrl+Shift+Z mean in the drawer now. */
export interface Way {
  readonly undo: DrawerStep | null;
  readonly redo: DrawerStep | null;
}

/**
 * Which step is to be taken back, and which undoing. A step taken back is a step too, and so is that one taken back:
 * every second one puts the first in force again. @param steps the latest, newest first
 */
export function wayOf(steps: readonly DrawerStep[]): Way {
  const byId = new Map(steps.map((step) => [step.id, step]));
  const isTakingBack = (step: DrawerStep): boolean => {
    let depth = 0;
    for (let at: DrawerStep | undefined = step; at && at.undoes !== null; at = byId.get(at.undoes)) depth++;
    return depth % 2 === 1;
  };
  const undo = steps.find((step) => step.undoneBy === null && !isTakingBack(step)) ?? null;
  const redo = steps.find((step) => step.undoneBy === null && isTakingBack(step)) ?? null;
  // A new command ends what could have been done again.
  const lastCommand = steps.find((step) => step.undoes === null)?.id ?? -1;
  return { undo, redo: redo !== null && redo.id > lastCommand ? redo : null };
}

/** The command that a step is about in the end, in its own words. */
export function stepLabel(step: DrawerStep, steps: readonly DrawerStep[]): string {
  let at: DrawerStep | undefined = step;
  while (at && at.undoes !== null) {
    const before: DrawerStep | undefined = steps.find((s) => s.id === at!.undoes);
    if (!before) break;
    at = before;
  }
  return (at ?? step).label;
}

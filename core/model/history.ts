import { applyPatch, invertPatch, type Patch } from "./patch.ts";
import type { Project } from "./project.ts";

/** One thing that the user did, and can take back. */
export interface Step {
  /** As the Undo entry names it: “set series C of 1 kHz”. */
  readonly label: string;
  readonly patch: Patch;
}

/** What was done, oldest first, and what was taken back, last first. */
export interface History {
  readonly done: readonly Step[];
  readonly undone: readonly Step[];
}

export const EMPTY_HISTORY: History = { done: [], undone: [] };

/** Adds a step. What had been taken back cannot be redone after it. */
export function record(history: History, step: Step): History {
  return { done: [...history.done, step], undone: [] };
}

export interface Travelled {
  readonly project: Project;
  readonly history: History;
  readonly step: Step;
}

/** Takes the last step back; null where there is none. */
export function undo(project: Project, history: History): Travelled | null {
  const step = history.done.at(-1);
  if (!step) return null;
  return {
    project: applyPatch(project, invertPatch(step.patch)),
    history: { done: history.done.slice(0, -1), undone: [...history.undone, step] },
    step,
  };
}

/** Does the last undone step again; null where there is none. */
export function redo(project: Project, history: History): Travelled | null {
  const step = history.undone.at(-1);
  if (!step) return null;
  return {
    project: applyPatch(project, step.patch),
    history: { done: [...history.done, step], undone: history.undone.slice(0, -1) },
    step,
  };
}

import { chordsOf, isPossible, type Action, type ActionContext } from "./action.ts";
import { BAND_ACTIONS } from "./band-actions.ts";
import { isChord, isQuietChord, type KeyPress } from "./chords.ts";
import { DRAWER_ACTIONS } from "./drawer-actions.ts";
import { EDIT_ACTIONS } from "./edit-actions.ts";
import { EQUATION_ACTIONS } from "./equation-actions.ts";
import { FILE_ACTIONS } from "./file-actions.ts";
import { HELP_ACTIONS, VIEW_ACTIONS } from "./view-actions.ts";

/** Everything that the screen does, in menu order: the one table behind menus, keys, command list and help. */
export const ACTIONS: readonly Action[] = [...FILE_ACTIONS, ...EDIT_ACTIONS, ...EQUATION_ACTIONS, ...BAND_ACTIONS, ...DRAWER_ACTIONS, ...VIEW_ACTIONS, ...HELP_ACTIONS];

/** The action of an id. */
export function actionById(id: string): Action {
  const action = ACTIONS.find((a) => a.id === id);
  if (!action) throw new Error(`there is no action “${id}”`);
  return action;
}

/** Where the focus is when a key is pressed. */
export type Focus = "sheet" | "field" | "untouched-field" | "elsewhere";

/** The action that a key press asks for, possible or not; undefined where it asks for none here. */
export function actionForKey(press: KeyPress, focus: Focus, c: ActionContext): Action | undefined {
  return ACTIONS.find((action) =>
    chordsOf(action, c).some((chord) => {
      if (!isChord(press, chord, c.isMac)) return false;
      if (focus === "sheet") return true;
      if (focus === "field") return action.inFields === "always";
      if (focus === "untouched-field") return action.inFields !== undefined;
      return isQuietChord(chord) && !isPlainKey(chord);
    }),
  );
}

/** Keys such as Delete and Escape: a menu, a list or a button may want them for itself. */
function isPlainKey(chord: string): boolean {
  return !chord.includes("+");
}

/** Runs an action where it is possible; what goes wrong is told, never swallowed. */
export function run(action: Action, c: ActionContext): void {
  if (!isPossible(action, c)) return;
  const report = (error: unknown): void => c.ui.notify((error instanceof Error ? error.message : String(error)), true);
  try {
    const outcome = action.perform(c);
    if (outcome instanceof Promise) outcome.catch(report);
  } catch (error) {
    report(error);
  }
}

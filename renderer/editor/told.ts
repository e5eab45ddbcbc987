/** What the status line tells of every step that changes the document. */
import type { Editor } from "./store.ts";
import type { Ui } from "./ui.ts";

/** Labels of steps begin with what is done; this is what was done. */
const DONE: Readonly<Record<string, string>> = {
  add: "Added", arrange: "Arranged the board", centre: "Centred", change: "Changed", cut: "Cut", delete: "Deleted", duplicate: "Duplicated", fill: "Filled", lower: "Lowered",
  make: "Made", match: "Matched", move: "Moved", paste: "Pasted", raise: "Raised", remove: "Removed", rename: "Renamed", set: "Set", slide: "Slid", take: "Took",
};

/** `delete “1 kHz”` → `Deleted “1 kHz”.` */
export function doneText(label: string): string {
  const [verb, ...rest] = label.split(" ");
  const done = DONE[verb];
  return done === undefined ? `Done: ${label}.` : `${[done, ...rest].join(" ")}.`;
}

/** Tells every new step, so that who does not see the sheet knows of it; undo and redo tell of themselves. Returns what ends it. */
export function tellSteps(editor: Editor, ui: Ui): () => void {
  return editor.store.subscribe(({ history }, { history: before }) => {
    const step = history.done.at(-1);
    if (history === before || step === undefined || before.done.includes(step) || before.undone.includes(step)) return;
    ui.notify(doneText(step.label));
  });
}

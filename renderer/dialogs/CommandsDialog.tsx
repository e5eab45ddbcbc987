import { useId, useRef, useState } from "react";
import { flushSync } from "react-dom";
import { chordsOf, isPossible, labelOf, type Action, type ActionContext } from "../editor/actions/action.ts";
import { ACTIONS, run } from "../editor/actions/actions.ts";
import { chordText } from "../editor/actions/chords.ts";
import { useShell } from "../editor/hooks.ts";
import { DialogFrame } from "./DialogFrame.tsx";
import { showRow } from "./FolderList.tsx";
import type { DialogProps } from "./QuestionDialogs.tsx";
import { useListPlace, walkList } from "./use-list-keys.ts";

/** Actions that fit a search, best first: every word must be found; what can be done now comes before what cannot. */
function findActions(text: string, c: ActionContext): Action[] {
  const words = text.toLowerCase().split(/\s+/).filter((word) => word !== "");
  const rank = (action: Action): number => {
    const label = labelOf(action, c).toLowerCase();
    const all = `${label} ${action.keywords} ${action.menu ?? ""}`.toLowerCase();
    if (!words.every((word) => all.includes(word))) return -1;
    const isStart = words.length > 0 && label.startsWith(words[0]);
    const isInLabel = words.every((word) => label.includes(word));
    return (isPossible(action, c) ? 0 : 4) + (isStart ? 0 : isInLabel ? 1 : 2);
  };
  return ACTIONS.filter((action) => action.id !== "commands")
    .map((action) => ({ action, rank: rank(action) }))
    .filter((entry) => entry.rank >= 0)
    .sort((a, b) => a.rank - b.rank)
    .map((entry) => entry.action);
}

/** Everything that the screen does, found by typing. */
export function CommandsDialog({ close }: DialogProps<"commands">) {
  const { context } = useShell();
  const [text, setText] = useState("");
  const keys = useListPlace();
  const input = useRef<HTMLInputElement>(null);
  const id = useId();
  const found = findActions(text, context);
  const choose = (action: Action | undefined): void => {
    if (!action || !isPossible(action, context)) return;
    // The focus goes back to where it was first, so that what opens next can return it there; all before the next key.
    flushSync(() => close(null));
    queueMicrotask(() => run(action, context));
  };

  return (
    <DialogFrame title="All commands" isTitleHidden size="is-top" onDismiss={() => close(null)} focusRef={input}>
      <input
        ref={input}
        className="command-input"
        role="combobox"
        aria-label="Find a command"
        aria-expanded="true"
        aria-controls={`${id}-list`}
        aria-activedescendant={found.length > 0 ? `${id}-${keys.index}` : undefined}
        placeholder="What would you like to do?"
        value={text}
        autoComplete="off"
        spellCheck={false}
        onChange={(event) => {
          setText(event.target.value);
          keys.setIndex(0);
        }}
        onKeyDown={(event) => walkList(event, keys, found.length, (index) => choose(found[index]))}
      />
      {found.length === 0 && <p className="quiet">No command is called that. Try another word.</p>}
      <div className="command-list" role="listbox" id={`${id}-list`} aria-label="Commands">
        {found.map((action, index) => {
          const chord = chordsOf(action, context)[0];
          return (
            // The field keeps the focus and steers the list.
            // oxlint-disable-next-line jsx-a11y/click-events-have-key-events
            <div
              key={action.id}
              id={`${id}-${index}`}
              ref={index === keys.index ? showRow : undefined}
              className="command-row"
              role="option"
              aria-selected={index === keys.index}
              aria-disabled={!isPossible(action, context)}
              onPointerMove={() => keys.setIndex(index)}
              onClick={() => choose(action)}
            >
              <span>{labelOf(action, context)}</span>
              {chord !== undefined && <kbd>{chordText(chord, context.isMac)}</kbd>}
            </div>
          );
        })}
      </div>
    </DialogFrame>
  );
}

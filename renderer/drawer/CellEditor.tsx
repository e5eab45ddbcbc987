import { useId, useRef, useState } from "react";
import type { DrawerLine } from "../../core/contract/drawer-schemas.ts";
import { lineProblems } from "../../core/drawer/check-line.ts";
import { useShell } from "../editor/hooks.ts";
import { useDrawer } from "./hooks.ts";
import { reasonOf } from "./drawer-store.ts";
import type { Column } from "./columns.ts";

interface CellEditorProps {
  readonly line: DrawerLine;
  readonly column: Column;
  readonly onLeave: (move: "stay" | "down" | "next" | "back") => void;
}

/** A cell as a field: Enter takes it and goes down, Tab to the next cell that can be edited, Esc gives it up. */
export function CellEditor({ line, column, onLeave }: CellEditorProps) {
  const { context } = useShell();
  const drawer = useDrawer();
  const id = useId();
  const before = column.edit!.text(line);
  const [text, setText] = useState(before);
  const [error, setError] = useState<string | null>(null);
  const isDone = useRef(false);

  /** What can be wrong is looked at here, so that the hands need not wait: the next cell is open before this one is on disk. */
  const take = (move: "stay" | "down" | "next" | "back"): void => {
    if (isDone.current) return;
    const edit = column.edit!.read(text, line);
    const isChanged = text.trim() !== before.trim();
    const problem = !isChanged ? undefined : !edit.ok ? edit.message : "fields" in edit ? lineProblems({ ...line, ...edit.fields }, line)[0] : undefined;
    if (problem !== undefined) {
      setError(problem);
      return;
    }
    isDone.current = true;
    onLeave(move);
    if (!isChanged || !edit.ok) return;
    const work = "found" in edit ? drawer.move([{ line: line.id, kind: "counted", count: edit.found, reference: "", note: "" }]) : drawer.editLines([line.id], edit.fields);
    work.catch((failure: unknown) => context.ui.notify(`${line.id} stays as it was. ${reasonOf(failure)}`, true));
  };

  return (
    <div className="cell-editor">
      <input
        className="cell-input"
        aria-label={`${column.label} of ${line.id}`}
        aria-invalid={error !== null}
        aria-describedby={error === null ? undefined : id}
        // It came up because the user asked to edit this cell.
        // oxlint-disable-next-line jsx-a11y/no-autofocus
        autoFocus
        value={text}
        autoComplete="off"
        spellCheck={false}
        onFocus={(event) => event.currentTarget.select()}
        onChange={(event) => {
          setText(event.target.value);
          setError(null);
        }}
        onBlur={() => {
          // A text that is not understood is given up with the focus; the cell shows what it was.
          if (error !== null || !column.edit!.read(text, line).ok) onLeave("stay");
          else take("stay");
        }}
        onKeyDown={(event) => {
          event.stopPropagation();
          if (event.key === "Escape") {
            isDone.current = true;
            onLeave("stay");
          } else if (event.key === "Enter") take("down");
          else if (event.key === "Tab") take(event.shiftKey ? "back" : "next");
          else return;
          event.preventDefault();
        }}
      />
      {error !== null && (
        <p className="field-error cell-error" id={id} role="alert">
          {error}
        </p>
      )}
    </div>
  );
}

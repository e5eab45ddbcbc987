import { useEffect, useId, useRef, useState, type KeyboardEvent } from "react";
import { blockName, partOf } from "../../core/model/edit.ts";
import type { Block } from "../../core/model/project.ts";
import { editText, parseValue } from "../../core/units.ts";
import { partEditText, piecesNote, quantityOf, roleLabel, stepPreferred } from "../editor/part-text.ts";

interface ValueEditorProps {
  readonly block: Block;
  readonly role: string;
  readonly left: number;
  readonly top: number;
  /** Returns what is wrong with the text, or null when it was taken. */
  readonly onTake: (text: string) => string | null;
  readonly onLeave: () => void;
}

/** A value taken for editing where it stands. Enter takes it, Esc leaves it, up and down step through preferred values. */
export function ValueEditor({ block, role, left, top, onTake, onLeave }: ValueEditorProps) {
  const quantity = quantityOf(block, role) ?? "resistance";
  const part = partOf(block, role);
  const first = part ? partEditText(part, quantity) : "";
  const note = part ? piecesNote(part, quantity) : null;
  const [text, setText] = useState(first);
  const [fault, setFault] = useState<string | null>(null);
  const input = useRef<HTMLInputElement>(null);
  const aboutId = useId();
  /** Leaving takes the focus away, and that must not take the value again. */
  const isLeft = useRef(false);
  const leave = (): void => {
    if (isLeft.current) return;
    isLeft.current = true;
    onLeave();
  };

  useEffect(() => {
    input.current?.focus({ preventScroll: true });
    input.current?.select();
  }, []);

  const take = (): boolean => {
    const wrong = text === first ? null : onTake(text);
    setFault(wrong);
    if (wrong === null) leave();
    return wrong === null;
  };
  const step = (direction: 1 | -1): void => {
    const read = parseValue(text, quantity);
    if (!read.ok || read.value <= 0) return;
    setText(editText(stepPreferred(read.value, quantity, direction), quantity));
    setFault(null);
  };
  const onKeyDown = (event: KeyboardEvent): void => {
    // The sheet's own keys rest while a value is typed.
    event.stopPropagation();
    if (event.key === "Enter") take();
    else if (event.key === "Escape") leave();
    else if (event.key === "ArrowUp" || event.key === "ArrowDown") {
      event.preventDefault();
      step(event.key === "ArrowUp" ? 1 : -1);
    }
  };

  return (
    <div className="sheet-value" style={{ left, top }} onPointerDown={(event) => event.stopPropagation()} onDoubleClick={(event) => event.stopPropagation()}>
      <input
        ref={input}
        value={text}
        aria-label={`${blockName(block)}, ${roleLabel(block.kind, role)}`}
        aria-invalid={fault !== null}
        aria-describedby={fault === null && note === null ? undefined : aboutId}
        spellCheck={false}
        autoComplete="off"
        onChange={(event) => {
          setText(event.target.value);
          setFault(null);
        }}
        onKeyDown={onKeyDown}
        onBlur={() => {
          // Leaving the field takes what can be taken and drops the rest.
          if (!isLeft.current && (fault !== null || !take())) leave();
        }}
      />
      {fault !== null ? <p id={aboutId} role="alert">{fault}</p> : note !== null && <p id={aboutId} className="is-note">{note}</p>}
    </div>
  );
}

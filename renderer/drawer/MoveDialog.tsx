import { useId, useRef, useState } from "react";
import { DialogFrame } from "../dialogs/DialogFrame.tsx";
import type { DialogProps } from "../dialogs/QuestionDialogs.tsx";
import { readCount } from "./columns.ts";
import { reasonOf } from "./drawer-store.ts";
import { useDrawer } from "./hooks.ts";
import { counted } from "./line-text.ts";

const KINDS = [
  { kind: "bought", label: "bought", about: "adds to what is there" },
  { kind: "used", label: "used", about: "takes from what is free" },
  { kind: "counted", label: "counted", about: "this many are there, whatever the book says" },
  { kind: "scrapped", label: "scrapped", about: "broken or lost" },
] as const;

/** Books a movement on the chosen lines: each its own entry in the ledger, all of them one step. */
export function MoveDialog({ ask, close }: DialogProps<"drawerMove">) {
  const drawer = useDrawer();
  const id = useId();
  const [kind, setKind] = useState<(typeof KINDS)[number]["kind"]>("bought");
  const [count, setCount] = useState("");
  const [reference, setReference] = useState("");
  const [note, setNote] = useState("");
  const [problem, setProblem] = useState<string | null>(null);
  const first = useRef<HTMLInputElement>(null);
  const many = ask.ids.length > 1;

  const book = async (): Promise<void> => {
    const read = readCount(count);
    if (!read.ok || (read.count === 0 && kind !== "counted")) {
      setProblem(read.ok ? "how many pieces?" : read.message);
      first.current?.focus();
      return;
    }
    try {
      await drawer.move(ask.ids.map((line) => ({ line, kind, count: read.count, reference: reference.trim(), note: note.trim() })));
      close(null);
    } catch (error) {
      setProblem(reasonOf(error));
    }
  };

  return (
    <DialogFrame
      title={many ? `Book a movement on ${counted(ask.ids.length, "line")}` : `Book a movement on ${ask.ids[0]}`}
      onDismiss={() => close(null)}
      focusRef={first}
      foot={
        <>
          <button type="button" className="button" onClick={() => close(null)}>
            Cancel
          </button>
          <button type="button" className="button is-primary" onClick={() => void book()}>
            Book it
          </button>
        </>
      }
    >
      <div className="seg" role="radiogroup" aria-label="What happened">
        {KINDS.map((one) => (
          <label key={one.kind} title={one.about}>
            <input type="radio" name={`${id}-kind`} checked={one.kind === kind} onChange={() => setKind(one.kind)} />
            {one.label}
          </label>
        ))}
      </div>
      <p className="hint">{KINDS.find((one) => one.kind === kind)!.about}</p>
      <label className="field-block">
        <span>{many ? "Pieces of each line" : "Pieces"}</span>
        <input
          ref={first}
          className="text-input"
          inputMode="numeric"
          value={count}
          aria-invalid={problem !== null}
          autoComplete="off"
          onChange={(event) => {
            setCount(event.target.value);
            setProblem(null);
          }}
          onKeyDown={(event) => event.key === "Enter" && void book()}
        />
      </label>
      <label className="field-block">
        <span>Project or order, if any</span>
        <input className="text-input" value={reference} maxLength={200} onChange={(event) => setReference(event.target.value)} />
      </label>
      <label className="field-block">
        <span>Note</span>
        <input className="text-input" value={note} maxLength={1000} onChange={(event) => setNote(event.target.value)} />
      </label>
      {problem !== null && (
        <p className="field-error" role="alert">
          {problem}
        </p>
      )}
    </DialogFrame>
  );
}

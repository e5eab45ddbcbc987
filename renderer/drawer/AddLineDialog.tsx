import { useId, useRef, useState } from "react";
import { lineProblems } from "../../core/drawer/check-line.ts";
import { makeId } from "../../core/drawer/make-id.ts";
import { STOCK_KINDS, type StockKind } from "../../core/drawer/stock.ts";
import { DialogFrame } from "../dialogs/DialogFrame.tsx";
import type { DialogProps } from "../dialogs/QuestionDialogs.tsx";
import { readCount } from "./columns.ts";
import { reasonOf } from "./drawer-store.ts";
import { FIELDS, lineFrom } from "./fields.ts";
import { useDrawer } from "./hooks.ts";
import { KIND_NAMES } from "./line-text.ts";

/** A new line by hand: the id is made of what it is, and can be changed. */
export function AddLineDialog({ close }: DialogProps<"drawerAdd">) {
  const drawer = useDrawer();
  const id = useId();
  const [kind, setKind] = useState<StockKind>(() => drawer.lineInHand()?.kind ?? "resistor");
  const [ownId, setOwnId] = useState<string | null>(null);
  const [quantity, setQuantity] = useState("0");
  const [texts, setTexts] = useState<Readonly<Record<string, string>>>({});
  const [problems, setProblems] = useState<ReadonlyMap<string, string>>(new Map());
  const first = useRef<HTMLInputElement>(null);
  const read = lineFrom(kind, ownId ?? "", texts);
  const made = read.line.value === null && read.line.type === null ? "" : makeId(read.line);
  const lineId = ownId ?? made;

  const add = async (): Promise<void> => {
    const { line, problems: wrong } = lineFrom(kind, lineId, texts);
    const count = readCount(quantity);
    const all = new Map(wrong);
    if (!count.ok) all.set("quantity", count.message);
    if (all.size === 0) for (const problem of lineProblems(line)) all.set("", problem);
    setProblems(all);
    if (all.size > 0 || !count.ok) return;
    try {
      await drawer.addLine(line, count.count);
      close(null);
    } catch (error) {
      setProblems(new Map([["", reasonOf(error)]]));
    }
  };
  const field = (key: string, label: string, value: string, onChange: (text: string) => void, more: { readonly hint?: string | undefined; readonly isFirst?: boolean } = {}) => (
    <div key={key} className="field-line">
      <label htmlFor={`${id}-${key}`}>{label}</label>
      <input
        id={`${id}-${key}`}
        ref={more.isFirst ? first : undefined}
        className="text-input is-small"
        value={value}
        placeholder={more.hint}
        aria-invalid={problems.has(key)}
        aria-describedby={problems.has(key) ? `${id}-${key}-problem` : undefined}
        autoComplete="off"
        spellCheck={false}
        onChange={(event) => onChange(event.target.value)}
        onKeyDown={(event) => event.key === "Enter" && void add()}
      />
      {problems.has(key) && (
        <p id={`${id}-${key}-problem`} className="field-error">
          {problems.get(key)}
        </p>
      )}
    </div>
  );

  return (
    <DialogFrame
      title="Add a line"
      size="is-wide"
      onDismiss={() => close(null)}
      focusRef={first}
      foot={
        <>
          <button type="button" className="button" onClick={() => close(null)}>
            Cancel
          </button>
          <button type="button" className="button is-primary" onClick={() => void add()}>
            Add the line
          </button>
        </>
      }
    >
      <div className="seg" role="radiogroup" aria-label="Kind">
        {STOCK_KINDS.map((one) => (
          <label key={one}>
            <input type="radio" name={`${id}-kind`} checked={one === kind} onChange={() => setKind(one)} />
            {KIND_NAMES[one].one}
          </label>
        ))}
      </div>
      <div className="field-columns">
        {FIELDS.filter((f) => f.appliesTo(kind)).map((f, index) => field(f.key, f.label(kind), texts[f.key] ?? "", (text) => setTexts((old) => ({ ...old, [f.key]: text })), { hint: f.hint, isFirst: index === 0 }))}
        {field("quantity", "pieces there", quantity, setQuantity)}
        {field("id", "id", lineId, setOwnId, { hint: "made of what it is" })}
      </div>
      {problems.has("") && (
        <p className="field-error" role="alert">
          {problems.get("")}
        </p>
      )}
    </DialogFrame>
  );
}

import { useId, useState, type FormEvent } from "react";
import type { LineFields } from "../../core/contract/drawer-schemas.ts";
import { emptyLine, type StockKind, type StockLine } from "../../core/drawer/stock.ts";
import { reasonOf } from "./drawer-store.ts";
import { FIELDS } from "./fields.ts";

interface FieldFormProps {
  /** Null where lines of several kinds are meant: fields that depend on the kind are left out. */
  readonly kind: StockKind | null;
  /** The line as it is; without one, every field starts empty and an empty field is left alone. */
  readonly line?: StockLine;
  /** What the button says. */
  readonly action: string;
  readonly onTake: (fields: LineFields) => Promise<void>;
}

/** The fields of a line, or of many at once; taken together as one step. */
export function FieldForm({ kind, line, action, onTake }: FieldFormProps) {
  const id = useId();
  const [drafts, setDrafts] = useState<Readonly<Record<string, string>>>({});
  const [problems, setProblems] = useState<ReadonlyMap<string, string>>(new Map());
  const [isBusy, setBusy] = useState(false);
  const shown = FIELDS.filter((field) => field.appliesTo(kind));
  const isChanged = Object.keys(drafts).length > 0;

  const take = async (event: FormEvent): Promise<void> => {
    event.preventDefault();
    const wrong = new Map<string, string>();
    let fields: LineFields = {};
    for (const field of shown) {
      const text = drafts[field.key];
      if (text === undefined) continue;
      const edit = field.read(text, line ?? emptyLine("", kind ?? undefined));
      if (edit.ok) fields = { ...fields, ...edit.fields };
      else wrong.set(field.key, edit.message);
    }
    setProblems(wrong);
    if (wrong.size > 0 || Object.keys(fields).length === 0) return;
    setBusy(true);
    try {
      await onTake(fields);
      setDrafts({});
    } catch (error) {
      setProblems(new Map([["", reasonOf(error)]]));
    } finally {
      setBusy(false);
    }
  };

  return (
    <form className="field-form" onSubmit={(event) => void take(event)}>
      {shown.map((field) => {
        const problem = problems.get(field.key);
        const before = line ? field.text(line) : "";
        const props = {
          id: `${id}-${field.key}`,
          className: "text-input is-small",
          value: drafts[field.key] ?? before,
          placeholder: line ? (field.hint ?? "") : "leave as it is",
          "aria-invalid": problem !== undefined,
          "aria-describedby": problem === undefined ? undefined : `${id}-${field.key}-problem`,
          autoComplete: "off",
          spellCheck: false,
          onChange: (event: { readonly target: { readonly value: string } }) => {
            const text = event.target.value;
            setDrafts((old) => {
              const { [field.key]: _gone, ...rest } = old;
              return text === before ? rest : { ...rest, [field.key]: text };
            });
          },
        };
        return (
          <div key={field.key} className="field-line">
            <label htmlFor={props.id}>{field.label(kind)}</label>
            {field.isLong ? <textarea {...props} rows={2} /> : <input {...props} />}
            {problem !== undefined && (
              <p id={`${id}-${field.key}-problem`} className="field-error">
                {problem}
              </p>
            )}
          </div>
        );
      })}
      {problems.has("") && (
        <p className="field-error" role="alert">
          {problems.get("")}
        </p>
      )}
      <div className="button-row">
        <button type="submit" className="button is-small is-primary" disabled={!isChanged || isBusy}>
          {action}
        </button>
        {isChanged && (
          <button
            type="button"
            className="button is-small"
            onClick={() => {
              setDrafts({});
              setProblems(new Map());
            }}
          >
            Put back
          </button>
        )}
      </div>
    </form>
  );
}

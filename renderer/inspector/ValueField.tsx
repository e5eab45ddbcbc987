import { useId, useState } from "react";
import { flushSync } from "react-dom";
import type { Taken } from "../editor/part-text.ts";

interface ValueFieldProps {
  /** What a screen reader calls it. */
  readonly label: string;
  /** Undefined shows the placeholder. */
  readonly value: number | undefined;
  readonly placeholder?: string;
  /** How the value looks at rest. */
  readonly format: (value: number) => string;
  /** How it looks while it is edited; as at rest where not given. */
  readonly edit?: (value: number) => string;
  readonly read: (text: string) => Taken;
  /** An emptied field clears the value where this is given, else goes back to what it was. */
  readonly onClear?: () => void;
  readonly onTake: (value: number) => void;
  /** Shown where the pointer rests: the value in full, where its text is rounded. */
  readonly title?: string;
  /** What is to be known about the value, below it. */
  readonly note?: string | null;
  /** What is to be weighed about it, below that. */
  readonly caution?: string | null;
  /** The next value up or down, for the arrow keys. */
  readonly step?: (value: number, direction: 1 | -1) => number;
}

/** A field for one value: trade notation and arithmetic in, an explanation under it where that is not understood. */
export function ValueField({ label, value, placeholder = "", format, edit = format, read, onTake, onClear, title, note = null, caution = null, step }: ValueFieldProps) {
  const id = useId();
  const [draft, setDraft] = useState<string | null>(null);
  const [isFocused, setFocused] = useState(false);
  const [error, setError] = useState<string | null>(null);
  const rest = value === undefined ? "" : isFocused ? edit(value) : format(value);

  function take(text: string): void {
    // What stood there already is no change, however much of the value it rounds away.
    if (text === rest) {
      forget();
      return;
    }
    if (text.trim() === "") {
      onClear?.();
      forget();
      return;
    }
    const taken = read(text);
    if (!taken.ok) {
      setError(taken.message);
      return;
    }
    forget();
    if (taken.value !== value) onTake(taken.value);
  }

  function forget(): void {
    setDraft(null);
    setError(null);
  }

  const below = [...(note === null ? [] : [`${id}-note`]), ...(caution === null ? [] : [`${id}-caution`])];
  return (
    <div className="value-field">
      <input
        className="value-input"
        aria-label={label}
        aria-invalid={error !== null}
        aria-describedby={error !== null ? id : below.length > 0 ? below.join(" ") : undefined}
        title={title}
        value={draft ?? rest}
        placeholder={placeholder}
        data-untouched={draft === null || draft === rest}
        autoComplete="off"
        spellCheck={false}
        onFocus={(event) => {
          const input = event.currentTarget;
          // The text to be edited has to stand there before it is marked, and before the first key arrives.
          flushSync(() => setFocused(true));
          input.select();
          // A pointer sets its caret after this.
          requestAnimationFrame(() => document.activeElement === input && input.dataset.untouched === "true" && input.select());
        }}
        onChange={(event) => {
          setDraft(event.target.value);
          setError(null);
        }}
        onBlur={() => {
          setFocused(false);
          if (draft !== null) take(draft);
        }}
        onKeyDown={(event) => {
          if (event.key === "Enter" && draft !== null) take(draft);
          else if (event.key === "Escape" && (draft !== null || error !== null)) {
            forget();
            event.preventDefault();
          } else if ((event.key === "ArrowUp" || event.key === "ArrowDown") && step && !event.altKey && !event.ctrlKey && !event.metaKey) {
            event.preventDefault();
            const from = draft === null ? value : read(draft);
            const start = typeof from === "number" ? from : from?.ok ? from.value : undefined;
            if (start === undefined) return;
            forget();
            onTake(step(start, event.key === "ArrowUp" ? 1 : -1));
          }
        }}
      />
      {note !== null && (
        <p className="field-note" id={`${id}-note`}>
          {note}
        </p>
      )}
      {caution !== null && error === null && (
        <p className="field-note is-caution" id={`${id}-caution`} aria-live="polite">
          ⚠ {caution}
        </p>
      )}
      {error !== null && (
        <p className="field-error" id={id} role="alert">
          {error}
        </p>
      )}
    </div>
  );
}

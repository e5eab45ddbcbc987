import { useState } from "react";
import { formatDb, formatValue, parseValue } from "../../core/units.ts";
import { setField } from "../../core/model/edit.ts";
import type { Project } from "../../core/model/project.ts";
import { DIVIDER } from "../../core/drawer/roles.ts";
import { SwapSection } from "../drawer/SwapSection.tsx";
import { useEditorState, useShell } from "../editor/hooks.ts";
import { sizeText } from "../panels/TopLine.tsx";
import { useUnstableEnds } from "../worker/hooks.ts";
import { SupplySection } from "./SupplySection.tsx";
import { ValueField } from "./ValueField.tsx";

/** The project as a whole: what it is, what feeds it, what it comes to. */
export function ProjectPanel() {
  const { editor } = useShell().context;
  const notes = useEditorState((s) => s.project.notes ?? "");
  const supply = useEditorState((s) => s.project.supply);
  const temperature = useEditorState((s) => s.project.temperature ?? 25);
  const now = (): Project => editor.store.getState().project;
  return (
    <>
      <header className="panel-head">
        <h2>Board</h2>
        <p className="quiet">Select a block to see its values.</p>
      </header>
      <Summary />
      <Notes notes={notes} />
      <SupplySection supply={supply} />
      {supply.kind === "single" && <SwapSection block={DIVIDER} />}
      <section className="panel-section" aria-label="Surroundings">
        <div className="row">
          <span className="row-label">temperature</span>
          <ValueField
            label="Temperature"
            value={temperature}
            format={(value) => formatValue(value, "temperature", { significant: "exact" })}
            edit={String}
            read={(text) => {
              // Trade notation has no negative values, and an outdoor box has.
              const isBelow = /^\s*[-−]/.test(text);
              const read = parseValue(isBelow ? text.replace(/^\s*[-−]/, "") : text, "temperature");
              if (!read.ok) return read;
              const value = isBelow ? -read.value : read.value;
              return value > -273.15 ? { ok: true, value } : { ok: false, message: "must be above −273.15 °C" };
            }}
            step={(value, direction) => value + direction}
            onTake={(value) => editor.apply("set the temperature", setField(now(), "temperature", value))}
          />
        </div>
      </section>
    </>
  );
}

function range(values: readonly number[], text: (value: number) => string): string {
  if (values.length === 0) return "–";
  const [low, high] = [text(Math.min(...values)), text(Math.max(...values))];
  return low === high ? low : `${low} to ${high}`;
}

function Summary() {
  const size = useEditorState((s) => sizeText(s.project));
  const figures = useEditorState((s) => s.analysis.results?.figures);
  const ends = useUnstableEnds();
  const all = [...(figures?.values() ?? [])];
  // What is measured where the board oscillates is no figure: the rest of the board still has its own.
  const isVoid = (id: string): boolean => ends.some((end) => end.id === id && end.end === "boost");
  const peaks = all.filter((f) => !isVoid(f.id));
  const left = all.filter((f) => isVoid(f.id)).map((f) => `“${f.label}”`);
  return (
    <section className="panel-section" aria-label="Summary">
      <h3>Summary</h3>
      <div className="row">
        <span className="row-label">size</span>
        <span>{size}</span>
      </div>
      {all.length > 0 && (
        <>
          <div className="row">
            <span className="row-label">boost in circuit</span>
            <span className="is-circuit-figure">{range(peaks.map((f) => f.boost.peak), (v) => formatDb(v))}</span>
          </div>
          <div className="row">
            <span className="row-label">lost in circuit</span>
            <span className="is-circuit-figure">{range(peaks.map((f) => f.interactionLoss), (v) => `${v.toFixed(1)} dB`)}</span>
          </div>
          {left.length > 0 && <p className="hint">Without {left.join(", ")}: unstable at full boost.</p>}
        </>
      )}
    </section>
  );
}

function Notes({ notes }: { readonly notes: string }) {
  const { editor } = useShell().context;
  const [draft, setDraft] = useState<string | null>(null);
  return (
    <label className="panel-section">
      <h3>Notes</h3>
      <textarea
        className="notes"
        value={draft ?? notes}
        data-untouched={draft === null}
        placeholder="What this board is for, what it must do."
        onChange={(event) => setDraft(event.target.value)}
        onBlur={() => {
          if (draft !== null && draft !== notes) editor.apply("change the notes", setField(editor.store.getState().project, "notes", draft));
          setDraft(null);
        }}
      />
    </label>
  );
}

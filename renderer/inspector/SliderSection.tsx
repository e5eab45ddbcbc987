import { blockName, setPosition, setSlider } from "../../core/model/edit.ts";
import type { Block, Slider } from "../../core/model/project.ts";
import { editText, formatDb, formatValue, parseValue } from "../../core/units.ts";
import { useEditorState, useShell } from "../editor/hooks.ts";
import { readAtLeastZero, type Taken } from "../editor/part-text.ts";
import { Choice } from "./Choice.tsx";
import { ValueField } from "./ValueField.tsx";

const LAWS = [
  { value: "linear", label: "linear", about: "even along the track" },
  { value: "power", label: "power", about: "|u| to an exponent, the same on both sides of the centre" },
];

/** A position typed as 0 … 1 or as a percentage. */
function readPosition(text: string): Taken {
  const read = parseValue(text, text.includes("%") ? "ratio" : "plain");
  if (!read.ok) return { ok: false, message: "expected 0 (full cut) to 1 (full boost), or a percentage" };
  return read.value >= 0 && read.value <= 1 ? read : { ok: false, message: "must be from 0 (full cut) to 1 (full boost)" };
}

function percent(position: number): string {
  if (position === 0.5) return "50 % · centre";
  return `${Number((position * 100).toPrecision(3))} % · ${position > 0.5 ? "boost" : "cut"}`;
}

/** Position, law and end resistance of a block's slider. */
export function SliderSection({ block, slider }: { readonly block: Block; readonly slider: Slider }) {
  const { editor } = useShell().context;
  const live = useEditorState((s) => s.analysis.results?.liveGain.get(block.id));
  const apply = (what: string, change: Partial<Slider>): void => editor.apply(`set ${what} of “${blockName(block)}”`, setSlider(editor.store.getState().project, block.id, change));
  const law = slider.law ?? "linear";
  return (
    <section className="panel-section" aria-label="Slider">
      <h3>Slider</h3>
      <div className="slider-line">
        <input
          type="range"
          className="slider-range"
          aria-label="Slider position"
          aria-valuetext={percent(slider.position)}
          min={0}
          max={1}
          step={0.01}
          value={slider.position}
          onPointerDown={() => editor.begin(`slide “${blockName(block)}”`)}
          onChange={(event) => {
            const position = Number(event.target.value);
            if (!editor.store.getState().gesture) editor.begin(`slide “${blockName(block)}”`);
            editor.preview((base) => setPosition(base, block.id, position));
          }}
          onPointerUp={() => editor.commit()}
          onPointerCancel={() => editor.cancel()}
          onKeyUp={() => editor.commit()}
          onBlur={() => editor.commit()}
        />
        <ValueField
          label="Slider position as a number"
          value={slider.position}
          format={(value) => value.toFixed(3)}
          edit={(value) => String(value)}
          read={readPosition}
          step={(value, direction) => Math.min(1, Math.max(0, Math.round((value + direction * 0.05) * 1000) / 1000))}
          onTake={(value) => editor.apply(`slide “${blockName(block)}”`, setPosition(editor.store.getState().project, block.id, value))}
        />
      </div>
      <div className="row">
        <span className="row-label" data-testid="slider-percent">
          {percent(slider.position)}
        </span>
        {live !== undefined && <span className="is-circuit-figure" data-testid="live-gain">{formatDb(live, 2)} now</span>}
      </div>
      <div className="row">
        <span className="row-label">law</span>
        <Choice label="Slider law" value={law === "linear" ? "linear" : "power"} options={LAWS} onChoose={(value) => apply("slider law", { law: value === "linear" ? "linear" : { power: 2 } })} />
      </div>
      {law !== "linear" && (
        <div className="row">
          <span className="row-label">exponent</span>
          <ValueField
            label="Exponent of the slider law"
            value={law.power}
            format={(value) => formatValue(value, "plain")}
            read={(text) => {
              const read = parseValue(text, "plain");
              return read.ok && read.value <= 0 ? { ok: false, message: "must be above 0" } : read;
            }}
            onTake={(power) => apply("exponent", { law: { power } })}
          />
        </div>
      )}
      <div className="row">
        <span className="row-label">end R, each end</span>
        <ValueField label="End resistance" value={slider.endR ?? 0} format={(value) => formatValue(value, "resistance", { significant: "exact" })} edit={(value) => editText(value, "resistance")} read={(text) => readAtLeastZero(text, "resistance")} onTake={(endR) => apply("end R", { endR })} />
      </div>
    </section>
  );
}

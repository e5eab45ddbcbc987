import { bareOf, setField, without } from "../../core/model/edit.ts";
import { partsOf, type Part, type SingleSupply, type SplitSupply, type SupplyReference } from "../../core/model/project.ts";
import { formatFigure, formatValue } from "../../core/units.ts";
import { useEditorState, useShell } from "../editor/hooks.ts";
import { readPositive } from "../editor/part-text.ts";
import { isFromTable, opAmpOptions } from "./BlockPanel.tsx";
import { Choice } from "./Choice.tsx";
import { PartRows, type PartRole } from "./PartRows.tsx";
import { ValueField } from "./ValueField.tsx";

/** A divider for a new single supply: stiff enough for a few bands, quiet by its bypass. */
const NEW_REFERENCE: SupplyReference = { upperR: { value: 10e3, tolerance: 0.01 }, lowerR: { value: 10e3, tolerance: 0.01 }, bypassC: { value: 100e-6, tolerance: 0.2 } };
const REFERENCE_KEYS = ["upperR", "lowerR", "bypassC"] as const;
const DIRECT = "none: the divider itself";

/** What feeds the board, and what to look out for. */
export function SupplySection({ supply }: { readonly supply: SplitSupply | SingleSupply }) {
  const { editor } = useShell().context;
  const set = (what: string, next: SplitSupply | SingleSupply): void => editor.apply(what, setField(editor.store.getState().project, "supply", next));
  const isSplit = supply.kind === "split";
  return (
    <section className="panel-section" aria-label="Supply">
      <h3>Supply</h3>
      <div className="seg" role="radiogroup" aria-label="Kind of supply">
        <label>
          <input type="radio" name="supply" checked={isSplit} onChange={() => supply.kind === "single" && set("split the supply", { kind: "split", positive: supply.voltage / 2, negative: supply.voltage / 2 })} />
          split
        </label>
        <label>
          <input type="radio" name="supply" checked={!isSplit} onChange={() => supply.kind === "split" && set("make the supply a single one", { kind: "single", voltage: supply.positive + supply.negative, reference: NEW_REFERENCE })} />
          single
        </label>
      </div>
      {supply.kind === "split" ? (
        <>
          <Volts label="positive rail" value={supply.positive} onTake={(positive) => set("set the positive rail", { ...supply, positive })} />
          <Volts label="negative rail" value={supply.negative} onTake={(negative) => set("set the negative rail", { ...supply, negative })} sign="−" />
        </>
      ) : (
        <SingleRows supply={supply} set={set} />
      )}
      <p className="hint">If the rails come from the mains: transformer, fuse and protective earth follow the rules where you are. Have someone qualified check them.</p>
    </section>
  );
}

function Volts({ label, value, onTake, sign = "" }: { readonly label: string; readonly value: number; readonly onTake: (value: number) => void; readonly sign?: string }) {
  return (
    <div className="row">
      <span className="row-label">{label}</span>
      <ValueField label={label} value={value} format={(v) => `${sign}${formatValue(v, "voltage", { significant: "exact" })}`} edit={String} read={(text) => readPositive(text.replace(/^\s*[-−]/, ""), "voltage")} step={(v, direction) => Math.max(1, v + direction)} onTake={onTake} />
    </div>
  );
}

function SingleRows({ supply, set }: { readonly supply: SingleSupply; readonly set: (what: string, next: SingleSupply) => void }) {
  const project = useEditorState((state) => state.project);
  const open = project.blocks.filter((b) => (b.kind === "input" || b.kind === "output") && partsOf(b).couplingC === undefined).map((b) => b.kind);
  const opAmps = useEditorState((s) => s.project.opAmps);
  const { reference } = supply;
  const roles: PartRole[] = [
    { role: "upperR", label: "upper R", quantity: "resistance", isOptional: false, part: reference.upperR },
    { role: "lowerR", label: "lower R", quantity: "resistance", isOptional: false, part: reference.lowerR },
    { role: "bypassC", label: "bypass C", quantity: "capacitance", isOptional: false, part: reference.bypassC },
  ];
  const setPart = (role: string, change: (part: Part) => Part): void => {
    const key = REFERENCE_KEYS.find((k) => k === role);
    if (key) set(`set ${roles.find((r) => r.role === role)!.label} of the reference`, { ...supply, reference: { ...reference, [key]: change(reference[key]) } });
  };
  const middle = (supply.voltage * reference.lowerR.value) / (reference.upperR.value + reference.lowerR.value);
  return (
    <>
      <Volts label="voltage" value={supply.voltage} onTake={(voltage) => set("set the supply voltage", { ...supply, voltage })} />
      <PartRows
        roles={roles}
        edits={{
          onValue: (role, value) => setPart(role, (part) => ({ ...bareOf(part), value })),
          onDatum: (role, key, value) => setPart(role, (part) => (value === undefined ? (without(part, key) as Part) : { ...part, [key]: value })),
        }}
      />
      <div className="row">
        <span className="row-label">reference at</span>
        <span>{formatFigure(middle, "voltage")}</span>
      </div>
      <div className="row">
        <span className="row-label">reference buffer</span>
        <Choice
          label="Op amp that buffers the reference"
          value={reference.opAmp ?? DIRECT}
          options={[{ value: DIRECT, label: DIRECT }, ...opAmpOptions(opAmps)]}
          onChoose={(opAmp) => set("set the reference's op amp", { ...supply, reference: opAmp === DIRECT ? without(reference, "opAmp") : { ...reference, opAmp } })}
        />
      </div>
      {isFromTable(opAmps, reference.opAmp) && <p className="hint">Typical values from memory: check the maker's current sheet.</p>}
      {reference.opAmp === undefined && <p className="caution">Every band shares the divider's impedance, which couples them at low frequencies. A larger bypass C or a buffer parts them.</p>}
      {open.length < 2 && <p className="caution">Coupling capacitors stand off the reference voltage: mind the polarity and the voltage rating of electrolytics.</p>}
      {open.length > 0 && <p className="caution">The {open.join(" and the ")} has no coupling capacitor, so what is connected there takes the reference voltage down: fit one.</p>}
    </>
  );
}

import type { Part } from "../../core/model/project.ts";
import { editText, formatValue, type Quantity } from "../../core/units.ts";
import { partEditText, partText, piecesNote, readAtLeastZero, readPositive, readTolerance, stepPreferred, valueCaution } from "../editor/part-text.ts";
import { ValueField } from "./ValueField.tsx";

export type Datum = "tolerance" | "measured" | "windingR" | "selfC";

/** What a part can have done to it; the same rows serve blocks and the supply's reference. */
export interface PartEdits {
  readonly onValue: (role: string, value: number) => void;
  readonly onDatum: (role: string, key: Datum, value: number | undefined) => void;
  readonly onAdd?: (role: string) => void;
  readonly onRemove?: (role: string) => void;
}

export interface PartRole {
  readonly role: string;
  readonly label: string;
  readonly quantity: Quantity;
  readonly isOptional: boolean;
  readonly part: Part | undefined;
}

interface PartRowsProps {
  readonly roles: readonly PartRole[];
  readonly edits: PartEdits;
}

const TOLERANCES = [0.001, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2, 0.5];

function stepTolerance(value: number, direction: 1 | -1): number {
  const next = direction === 1 ? TOLERANCES.find((t) => t > value + 1e-9) : TOLERANCES.findLast((t) => t < value - 1e-9);
  return next ?? value;
}

/** Value, tolerance and measured value of parts, one row a role. */
export function PartRows({ roles, edits }: PartRowsProps) {
  return (
    <div className="part-grid">
      <h3>Parts</h3>
      <span className="part-head">value</span>
      <span className="part-head">tol.</span>
      <span className="part-head">measured</span>
      {roles.map((role) => (role.part ? <PartRow key={role.role} role={role} part={role.part} edits={edits} /> : <AbsentRow key={role.role} role={role} edits={edits} />))}
    </div>
  );
}

function AbsentRow({ role, edits }: { readonly role: PartRole; readonly edits: PartEdits }) {
  return (
    <div className="part-row">
      <span className="part-label">{role.label}</span>
      <button type="button" className="button is-small is-plain part-absent" aria-label={`Add ${role.label}`} onClick={() => edits.onAdd?.(role.role)}>
        not fitted · add
      </button>
    </div>
  );
}

function PartRow({ role: { role, label, quantity, isOptional }, part, edits }: { readonly role: PartRole; readonly part: Part; readonly edits: PartEdits }) {
  const show = (value: number): string => partText(value, quantity);
  const exact = (value: number | undefined): { title?: string } => {
    const full = value === undefined ? "" : formatValue(value, quantity, { significant: "exact" });
    return value === undefined || full === show(value) ? {} : { title: full };
  };
  return (
    <>
      <div className="part-row" data-role={role}>
        <span className="part-label">
          {label}
          {isOptional && (
            <button type="button" className="drop" aria-label={`Remove ${label}`} title={`Remove ${label}`} onClick={() => edits.onRemove?.(role)}>
              ×
            </button>
          )}
        </span>
        <ValueField
          label={label}
          value={part.value}
          {...exact(part.value)}
          note={piecesNote(part, quantity)}
          caution={valueCaution(part.value, role, quantity)}
          format={show}
          edit={() => partEditText(part, quantity)}
          read={(text) => readPositive(text, quantity)}
          step={(value, direction) => stepPreferred(value, quantity, direction)}
          onTake={(value) => edits.onValue(role, value)}
        />
        <ValueField
          label={`Tolerance of ${label}`}
          value={part.tolerance}
          placeholder="–"
          format={(value) => formatValue(value, "ratio")}
          read={readTolerance}
          step={stepTolerance}
          onTake={(value) => edits.onDatum(role, "tolerance", value)}
          onClear={() => edits.onDatum(role, "tolerance", undefined)}
        />
        <ValueField
          label={`Measured value of ${label}`}
          value={part.measured}
          {...exact(part.measured)}
          placeholder="–"
          format={show}
          edit={(value) => editText(value, quantity)}
          read={(text) => readPositive(text, quantity)}
          onTake={(value) => edits.onDatum(role, "measured", value)}
          onClear={() => edits.onDatum(role, "measured", undefined)}
        />
      </div>
      {quantity === "inductance" && (
        <>
          <CoilRow label="winding R" quantity="resistance" value={part.windingR} onTake={(value) => edits.onDatum(role, "windingR", value)} />
          <CoilRow label="self C" quantity="capacitance" value={part.selfC} onTake={(value) => edits.onDatum(role, "selfC", value)} />
        </>
      )}
    </>
  );
}

/** What a coil has beside its inductance; empty where nobody knows it. */
function CoilRow({ label, quantity, value, onTake }: { readonly label: string; readonly quantity: Quantity; readonly value: number | undefined; readonly onTake: (value: number | undefined) => void }) {
  return (
    <div className="part-row">
      <span className="part-label">{label}</span>
      <ValueField
        label={label}
        value={value}
        placeholder="–"
        format={(v) => formatValue(v, quantity, { significant: "exact" })}
        edit={(v) => editText(v, quantity)}
        read={(text) => readAtLeastZero(text, quantity)}
        onTake={onTake}
        onClear={() => onTake(undefined)}
      />
    </div>
  );
}

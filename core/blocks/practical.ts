/** What parts are made in. A value outside is kept and computed as it is: it is told of, for it is most likely a slip. */
import { TRACK } from "../model/edit.ts";
import { partsOf, type Block, type Project } from "../model/project.ts";
import { formatValue, type Quantity } from "../units.ts";
import { BLOCKS } from "./index.ts";

interface Bounds {
  readonly quantity: Quantity;
  readonly noun: string;
  /** SI. */
  readonly least: number;
  readonly most: number;
}

const PRACTICAL: Readonly<Record<"resistance" | "capacitance" | "inductance" | "track", Bounds>> = {
  resistance: { quantity: "resistance", noun: "resistors", least: 0.01, most: 100e6 },
  capacitance: { quantity: "capacitance", noun: "capacitors", least: 0.5e-12, most: 0.1 },
  inductance: { quantity: "inductance", noun: "inductors", least: 10e-9, most: 1e3 },
  track: { quantity: "resistance", noun: "slider tracks", least: 100, most: 10e6 },
};

/** What a value is called that no part of its kind has: `outside what capacitors are made in: 0.5 pF to 100000 µF`; null for one that some have. */
export function impracticalText(value: number, role: string, quantity: Quantity): string | null {
  const kind = role === TRACK ? "track" : quantity;
  if (kind !== "resistance" && kind !== "capacitance" && kind !== "inductance" && kind !== "track") return null;
  const bounds = PRACTICAL[kind];
  if (value >= bounds.least && value <= bounds.most) return null;
  return `outside what ${bounds.noun} are made in: ${formatValue(bounds.least, bounds.quantity)} to ${formatValue(bounds.most, bounds.quantity)}`;
}

/** Whether a block's part in a role has such a value. */
export function isImpractical(block: Block, role: string): boolean {
  const part = role === TRACK ? block.slider?.track : partsOf(block)[role];
  const quantity = role === TRACK ? "resistance" : BLOCKS[block.kind].roles.find((r) => r.role === role)?.quantity;
  return part !== undefined && quantity !== undefined && impracticalText(part.value, role, quantity) !== null;
}

/** Every part of a board's blocks with such a value: the block's id and the role. */
export function impracticalParts(project: Project): { readonly id: string; readonly role: string }[] {
  return project.blocks.flatMap((block) => [...BLOCKS[block.kind].roles.map((r) => r.role), TRACK].filter((role) => isImpractical(block, role)).map((role) => ({ id: block.id, role })));
}

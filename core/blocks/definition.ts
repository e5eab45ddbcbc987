import type { Dual } from "../num/dual.ts";
import type { NodeId } from "../net/netlist.ts";
import type { OpAmpModel } from "../model/project.ts";
import type { Quantity } from "../units.ts";
import type { Drawing } from "./drawing.ts";
import type { BlockKind } from "./kinds.ts";

/** One role of a block: the single source for validation, defaults, inspector fields, bills of materials and part names. */
export interface RoleDefinition {
  readonly role: string;
  readonly label: string;
  readonly quantity: Extract<Quantity, "resistance" | "capacitance" | "inductance">;
  readonly isOptional: boolean;
  /** What a new block gets, SI; for an optional role, what it gets when the user adds it. */
  readonly value: number;
  /** Fraction, for a part that states none. */
  readonly tolerance: number;
}

export type Port = "in" | "out" | "bus";

/** Where a block sits: it feeds the chain, stands in it, hangs on a bus, or ends it. */
export type Place = "source" | "chain" | "band" | "load";

/** Which band figures apply: a resonance, a shelf that works above or below a corner, or all frequencies alike. */
export type Shape = "resonance" | "high-shelf" | "low-shelf" | "level";

/** Values of the parts present, by role; absent optional roles are not there. */
export type PartValues = Readonly<Record<string, number>>;

/** What a block's expansion into elements may use. Elements are named after the role that they realise. */
export interface Expander {
  /** The block's node at a port (`in`, `out`). */
  port(name: "in" | "out"): NodeId;
  /** The two rails of the bus that the block carries or hangs on: `boost` is the − input's side (m), `cut` the + input's (p). */
  readonly bus: { readonly boost: NodeId; readonly cut: NodeId };
  /** The slider's wiper; its track is already there. */
  readonly wiper: NodeId;
  readonly ground: NodeId;
  /** Signal reference: ground on a split supply, the divider's node on a single one. */
  readonly reference: NodeId;
  node(name: string): NodeId;
  /** Adds the part of a role between two nodes, nothing where it is absent. */
  place(role: string, a: NodeId, b: NodeId): void;
  /** Adds the part of a role in series; a wire where it is absent. */
  placeOrWire(role: string, a: NodeId, b: NodeId): void;
  opAmp(plus: NodeId, minus: NodeId, out: NodeId): void;
  /** The 1 V source of the response. */
  emf(plus: NodeId): void;
}

/** A leg's admittances seen from wiper (w) and signal reference (r), as currents into the leg: i_w = ww·v_w + wr·v_r, i_r = rw·v_w + rr·v_r. */
export interface LegPort {
  readonly ww: Dual;
  readonly wr: Dual;
  readonly rw: Dual;
  readonly rr: Dual;
}

/** Registers that a leg's `port` may ask for. */
export const LEG_REGISTERS = 11;

/** The closed form of a band's leg, compiled from its values; equal to its expansion, without the nodes inside. */
export interface Leg {
  /** Fills the admittance at the wiper with the reference at ground, siemens. `omega` in rad/s, all above 0. */
  admittance(omega: Float64Array, re: Float64Array, im: Float64Array): void;
  /**
   * The same at one frequency, with the reference as a second port and every d/ds.
   * @param work registers that it may overwrite, `LEG_REGISTERS` of them
   */
  port(omega: number, out: LegPort, work: readonly Dual[]): void;
}

/** A design law of a block as a mathjs expression in its role names, `feedbackR` of its stage and earlier laws. SI units. */
export interface Law {
  readonly symbol: string;
  readonly label: string;
  readonly quantity: Quantity;
  readonly expression: string;
}

/** Known answers, held against the general node equations by the tests. */
export interface LegCase {
  readonly about: string;
  readonly source: string;
  readonly values: PartValues;
  /** `ideal`, or a model. */
  readonly opAmp?: OpAmpModel | "ideal";
  /** Hz. */
  readonly frequency: number;
  /** Impedance at the wiper, ohms. */
  readonly impedance: readonly [re: number, im: number];
  /** Relative tolerance. */
  readonly within: number;
}

export interface BlockDefinition {
  readonly kind: BlockKind;
  readonly label: string;
  readonly place: Place;
  readonly ports: readonly Port[];
  readonly roles: readonly RoleDefinition[];
  readonly hasSlider: boolean;
  readonly hasOpAmp: boolean;
  /** A band's leg from the wiper at (0, 0); any other block about its own pins. */
  readonly drawing: Drawing;
  expand(x: Expander): void;
  /** Bands only. */
  readonly leg?: (values: PartValues, opAmp: OpAmpModel | "ideal") => Leg;
  readonly shape?: Shape;
  readonly laws: readonly Law[];
}

/** A resistor role; 1 % unless said otherwise. */
export function resistorRole(role: string, label: string, value: number, opts: { readonly isOptional?: boolean } = {}): RoleDefinition {
  return { role, label, quantity: "resistance", value, tolerance: 0.01, isOptional: opts.isOptional ?? false };
}

/** A capacitor role; 5 % film unless said otherwise. */
export function capacitorRole(role: string, label: string, value: number, opts: { readonly isOptional?: boolean; readonly tolerance?: number } = {}): RoleDefinition {
  return { role, label, quantity: "capacitance", value, tolerance: opts.tolerance ?? 0.05, isOptional: opts.isOptional ?? false };
}

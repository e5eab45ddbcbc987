import type { BlockKind } from "../blocks/kinds.ts";

/** Two pieces joined to make one value: what the second one is, and what the first alone is worth. */
export interface SecondPart {
  /** Stock line of the second piece. */
  readonly stock?: string;
  readonly value: number;
  readonly joined: "series" | "parallel";
  readonly firstValue: number;
}

/** A part: SI value, with what is known of the piece that will be soldered in. */
export interface Part {
  readonly value: number;
  /** Fraction, 0.05 for 5 %. */
  readonly tolerance?: number;
  /** Stock line in the parts library. */
  readonly stock?: string;
  /** Value on the user's meter, SI. */
  readonly measured?: number;
  /** Which measured piece of the parts library. */
  readonly piece?: number;
  /** Where two pieces make the value: `value` is both together, `stock` the first one's line. Changes no number. */
  readonly second?: SecondPart;
  /** Inductors only: winding resistance in ohms, in series with the inductance. */
  readonly windingR?: number;
  /** Inductors only: self-capacitance in farads, across the winding. */
  readonly selfC?: number;
}

/** `"linear"`, or a power law: u = 2x − 1, k = (1 + sgn(u)·|u|^power) / 2. */
export type SliderLaw = "linear" | { readonly power: number };

export interface Slider {
  readonly track: Part;
  readonly law?: SliderLaw;
  /** 0 = full cut, 0.5 = centre, 1 = full boost. */
  readonly position: number;
  /** Resistance left at each end of the track, ohms. */
  readonly endR?: number;
}

/** A place on the sheet; changes no number. */
export interface SheetPoint {
  readonly x: number;
  readonly y: number;
  /** Put there by hand: the sheet keeps it there. Any other place gives way to the one that the frequency ruling gives. */
  readonly byHand?: boolean;
}

export interface Block {
  readonly id: string;
  readonly kind: BlockKind;
  readonly label?: string;
  readonly at?: SheetPoint;
  /** Name in the project's `opAmps`, then in the built-in table, or `"ideal"`. */
  readonly opAmp?: string;
  /** Stock line of the op amp. */
  readonly opAmpStock?: string;
  readonly slider?: Slider;
  /** Keyed by the roles of the block's definition; other keys are kept and ignored. May be absent where a kind has no roles. */
  readonly parts?: Readonly<Record<string, Part>>;
}

/** A block's parts by role; read them through this, since a buffer may come without. */
export function partsOf(block: Pick<Block, "parts">): Readonly<Record<string, Part>> {
  return block.parts ?? {};
}

export interface Wire {
  /** `block.port`: an `out` or a stage's `bus`. */
  readonly from: string;
  /** `block.port`: an `in` or a band's `bus`. */
  readonly to: string;
}

export interface SplitSupply {
  readonly kind: "split";
  /** Magnitudes, volts. */
  readonly positive: number;
  readonly negative: number;
}

/** The reference of a single supply: a divider with a bypass capacitor, optionally followed by an op amp. */
export interface SupplyReference {
  readonly upperR: Part;
  readonly lowerR: Part;
  readonly bypassC: Part;
  readonly opAmp?: string;
  readonly opAmpStock?: string;
}

export interface SingleSupply {
  readonly kind: "single";
  readonly voltage: number;
  readonly reference: SupplyReference;
}

/** SI units throughout; see core/net for how the model is stamped. Keys past `outputR` serve later analyses. */
export interface OpAmpModel {
  readonly openLoopGain: number;
  readonly gainBandwidth: number;
  readonly inputR: number;
  readonly outputR: number;
  readonly slewRate?: number;
  readonly noiseVoltage?: number;
  readonly noiseVoltageCorner?: number;
  readonly noiseCurrent?: number;
  readonly noiseCurrentCorner?: number;
  readonly swingLoss?: number;
  readonly outputCurrent?: number;
  readonly offsetVoltage?: number;
  readonly biasCurrent?: number;
  readonly supplyCurrent?: number;
}

export const PROJECT_FORMAT = "bandwright-project";
export const PROJECT_VERSION = 1;

/** A project document: plain read-only data, exactly what the file holds (unknown keys included). */
export interface Project {
  readonly format: typeof PROJECT_FORMAT;
  readonly version: typeof PROJECT_VERSION;
  readonly name: string;
  readonly notes?: string;
  readonly supply: SplitSupply | SingleSupply;
  /** Degrees Celsius; 25 where absent. */
  readonly temperature?: number;
  readonly blocks: readonly Block[];
  readonly wires: readonly Wire[];
  readonly opAmps?: Readonly<Record<string, OpAmpModel>>;
}

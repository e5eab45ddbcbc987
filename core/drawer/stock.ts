/** What the drawer holds. Plain data: the database fills it, the screens show it, the choosing works on it. */

export const STOCK_KINDS = ["resistor", "capacitor", "inductor", "potentiometer", "op-amp"] as const;
export type StockKind = (typeof STOCK_KINDS)[number];

/** A price that holds from a quantity on. */
export interface PriceBreak {
  readonly from: number;
  readonly unitCost: number;
}

/** An amount of money; different currencies are never added. */
export interface Money {
  readonly amount: number;
  /** ISO 4217; empty where a table does not say. */
  readonly currency: string;
}

/** A stock line: one sort of part, as bought. SI units. */
export interface StockLine {
  /** The user's own name for it, unique, such as `R-100K-MF25`; projects refer to it in a part's `stock`. */
  readonly id: string;
  readonly kind: StockKind;
  /** Ω, F or H; null for op amps. */
  readonly value: number | null;
  /** IC type of an op amp, such as `TL072`; null otherwise. */
  readonly type: string | null;
  /** Fraction, 0.05 for 5 %. */
  readonly tolerance: number | null;
  /** W for resistors and potentiometers, V for capacitors; null where unknown or without meaning. */
  readonly rating: number | null;
  /**
   * film, electrolytic, C0G, X7R, metal film, … as the user writes it; `electrolytic` and `tantalum` are polarised. A track's
   * taper stands here too: `carbon, linear`, `logarithmic`, `reverse log`, `power law 0.5` (see `taperOf`).
   */
  readonly technology: string;
  /** Relative per kelvin, 50e-6 for 50 ppm/K. */
  readonly temperatureCoefficient: number | null;
  /** Inductors: winding resistance, Ω; null where unknown, and for all other kinds. */
  readonly windingR: number | null;
  /** Package or lead pitch. */
  readonly package: string;
  readonly location: string;
  /** Cost of one, and from larger quantities on; empty where unknown. Ascending in `from`, the first from 1. */
  readonly prices: readonly PriceBreak[];
  /** ISO 4217 code, such as EUR. */
  readonly currency: string;
  readonly supplier: string;
  readonly orderCode: string;
  readonly notes: string;
}

/** A line with nothing else said about it. */
export function emptyLine(id: string, kind: StockKind = "resistor"): StockLine {
  return {
    id, kind, value: null, type: null, tolerance: null, rating: null, technology: "", temperatureCoefficient: null, windingR: null, package: "", location: "", prices: [], currency: "", supplier: "", orderCode: "", notes: "",
  };
}

/** A line with what the ledger makes of it. */
export interface StockedLine extends StockLine {
  /** Pieces there, reserved ones included: the sum of the ledger. */
  readonly quantity: number;
  /** Pieces spoken for. */
  readonly reserved: number;
}

/** One item of a line, measured on the user's meter. */
export interface StockPiece {
  readonly id: number;
  readonly line: string;
  /** What is written on it. */
  readonly mark: string;
  readonly value: number;
  /** Hz at which it was measured; null for DC. */
  readonly frequency: number | null;
}

export const MOVEMENT_KINDS = ["bought", "used", "counted", "scrapped", "reserved", "released"] as const;
export type MovementKind = (typeof MOVEMENT_KINDS)[number];

/** An entry of the ledger; never changed or deleted. */
export interface StockMovement {
  readonly id: number;
  /** ISO 8601, UTC. */
  readonly at: string;
  readonly line: string;
  readonly kind: MovementKind;
  /** Change of the quantity (bought +, used and scrapped −, counted the difference found), or of what is reserved (reserved +, released −). */
  readonly change: number;
  /** Project or build that it belongs to; empty where none. */
  readonly reference: string;
  readonly note: string;
}

/** Lines as a build sees them: the pieces that it holds itself, by line id, are there for it. */
export function freeForBuild<T extends StockedLine>(lines: readonly T[], held: ReadonlyMap<string, number>): T[] {
  return lines.map((line) => (held.has(line.id) ? { ...line, reserved: line.reserved - held.get(line.id)! } : line));
}

/** Pieces that nobody has spoken for. */
export function availableOf(line: StockedLine): number {
  return line.quantity - line.reserved;
}

/** Stock left after a build: the pieces that are free before it, less what all its units take; below 0 where some are missing. */
export function leftAfter(line: StockedLine, perUnit: number, units: number): number {
  return availableOf(line) - perUnit * units;
}

/** Unit cost when buying or taking a number of them; null where unknown. */
export function unitCost(line: Pick<StockLine, "prices">, count: number): number | null {
  return line.prices.findLast((p) => p.from <= Math.max(count, 1))?.unitCost ?? null;
}

/** Whether it matters which way round it goes. */
export function isPolarised(line: Pick<StockLine, "kind" | "technology">): boolean {
  return line.kind === "capacitor" && /electrolytic|tantalum/i.test(line.technology) && !/bipolar|non-?polar/i.test(line.technology);
}

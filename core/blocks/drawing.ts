/**
 * How a block is drawn: IEC 60617 symbols and the wires between them, as data in grid units (x to the right, y down).
 * The screen chooses how many pixels a grid unit has and draws; nothing here changes a number.
 */

/** Two-terminal symbols, drawn along y, or along x where `isFlat`; their length includes the leads. */
export const SYMBOL_LENGTH = { resistor: 8, capacitor: 6, inductor: 9 } as const;

export type Align = "left" | "right" | "center";

/** Where a part's value is written: the middle of its line, at the side it is aligned to. */
export interface ValuePlace {
  readonly x: number;
  readonly y: number;
  readonly align: Align;
}

export interface PartSymbol {
  readonly symbol: keyof typeof SYMBOL_LENGTH;
  readonly role: string;
  /** The middle of the symbol. */
  readonly x: number;
  readonly y: number;
  readonly isFlat?: boolean;
  readonly value: ValuePlace;
  /** What stands there while an optional part is absent: its leads joined, or nothing at all. */
  readonly absent?: "wire" | "nothing";
}

/** A triangle from its tip; the inputs are 2 units either side of the axis on its base. */
export interface AmplifierSymbol {
  readonly symbol: "amplifier";
  /** The tip: the output. */
  readonly x: number;
  readonly y: number;
  readonly points: "right" | "left" | "up";
  readonly length: number;
  readonly width: number;
  /** The input above the axis (to the left of one that points up). */
  readonly first: "+" | "-";
}

/** Ground and signal reference hang below their place; a source (EMF) and a terminal are circles about it. */
export interface MarkSymbol {
  readonly symbol: "ground" | "reference" | "source" | "terminal";
  readonly x: number;
  readonly y: number;
  /** Not drawn while this optional part is absent. */
  readonly needs?: string;
}

export interface WireLine {
  /** x, y, x, y … */
  readonly points: readonly number[];
  readonly needs?: string;
}

/** A dot: wires that cross here are joined. */
export interface Joint {
  readonly x: number;
  readonly y: number;
  readonly needs?: string;
}

export interface Drawing {
  readonly symbols: readonly (PartSymbol | AmplifierSymbol | MarkSymbol)[];
  readonly wires: readonly WireLine[];
  readonly joints: readonly Joint[];
  /** The area it takes, values included. */
  readonly left: number;
  readonly right: number;
  readonly top: number;
  readonly bottom: number;
}

/** A part with its value to the right of it, for drawings that run downwards. */
export function partDown(symbol: PartSymbol["symbol"], role: string, x: number, y: number, absent?: "wire" | "nothing"): PartSymbol {
  const aside = symbol === "resistor" ? 1.9 : 2.7;
  return { symbol, role, x, y, value: { x: x + aside, y, align: "left" }, ...(absent ? { absent } : {}) };
}

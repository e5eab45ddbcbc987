import { parseValue } from "../units.ts";
import type { StockKind } from "./stock.ts";

/** A range that a typed value fits: what a meter or a rounded number would call the same. */
export interface ValueRange {
  readonly column: "value" | "rating" | "tolerance" | "temperatureCoefficient";
  readonly kinds: readonly StockKind[];
  readonly from: number;
  readonly to: number;
}

/** One thing that a line has to have: the words, or one of the values. */
export interface SearchTerm {
  /** Beginnings of words, lower case; all of them in some text field. */
  readonly words: readonly string[];
  readonly ranges: readonly ValueRange[];
}

const SAME = 1e-6;
const EVERY_KIND: readonly StockKind[] = ["resistor", "capacitor", "inductor", "potentiometer", "op-amp"];
const RESISTIVE: readonly StockKind[] = ["resistor", "potentiometer"];

/** What a person types to find lines: words and values in trade notation, `4k7 film`, `100n 63V 5%`. Each has to fit. */
export function searchTerms(text: string): readonly SearchTerm[] {
  return joinUnits(text.normalize("NFC")).split(/\s+/).filter((token) => token !== "").map(readTerm).filter((term) => term.words.length > 0 || term.ranges.length > 0);
}

/** `4.7 kΩ` and `63 V` are one thing each. */
function joinUnits(text: string): string {
  return text.replaceAll(/(^|\s)([±]?\d+(?:[.,]\d+)?(?:\/\d+)?)\s+([pnuµμmkKMG]?(?:Ω|Ω|ohms?|F|H|V|W)|%|ppm(?:\/(?:K|°C))?)(?=\s|$)/gu, "$1$2$3");
}

function readTerm(token: string): SearchTerm {
  const words = token.toLowerCase().match(/[\p{L}\p{N}]+/gu) ?? [];
  const ranges = readRanges(token.replace(/^±/, ""));
  // A value may be part of a name too, as in R-4K7-MF25. Taken to pieces it would fit anything: 2.5 % has a 2 and a 5.
  const isWord = words.length === 1 && !/%|ppm/i.test(token);
  return { words: ranges.length === 0 || isWord ? words : [], ranges };
}

function readRanges(token: string): readonly ValueRange[] {
  const rating = /^(\d+(?:[.,]\d+)?)(?:\/(\d+))?([mk]?)(V|W)$/i.exec(token);
  if (rating !== null) {
    const [, number = "", divisor, prefix = "", unit = ""] = rating;
    const value = (Number(number.replace(",", ".")) / Number(divisor ?? 1)) * (prefix === "" ? 1 : prefix === "k" ? 1e3 : 1e-3);
    return value > 0 && Number.isFinite(value) ? [around("rating", unit.toUpperCase() === "V" ? ["capacitor"] : RESISTIVE, value)] : [];
  }
  const percent = /^(\d+(?:[.,]\d+)?)%$/.exec(token);
  if (percent !== null) return [around("tolerance", EVERY_KIND, Number(`${percent[1].replace(",", ".")}e-2`))];
  const ppm = /^(-?\d+(?:[.,]\d+)?)ppm(?:\/.+)?$/i.exec(token);
  if (ppm !== null) return [around("temperatureCoefficient", EVERY_KIND, Number(`${ppm[1].replace(",", ".")}e-6`))];
  // Arithmetic is for value fields: an order code such as 12-34 is no sum.
  if (!/^[\d.,]+(?:[eE][-+]?\d+)?[\p{L}Ω]*\d*$|^R\d+$/u.test(token)) return [];
  const ranges: ValueRange[] = [];
  const add = (quantity: "resistance" | "capacitance" | "inductance", kinds: readonly StockKind[]): void => {
    const parsed = parseValue(token, quantity);
    if (parsed.ok && parsed.value > 0) ranges.push(around("value", kinds, parsed.value));
  };
  add("resistance", RESISTIVE);
  // A bare number is ohms: nobody has whole farads.
  if (!/^[\d.,]+$/.test(token)) {
    add("capacitance", ["capacitor"]);
    add("inductance", ["inductor"]);
  }
  return ranges;
}

function around(column: ValueRange["column"], kinds: readonly StockKind[], value: number): ValueRange {
  const slack = Math.abs(value) * SAME;
  return { column, kinds, from: value - slack, to: value + slack };
}

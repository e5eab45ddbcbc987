import type { DrawerLine, LineFields, LineSort } from "../../core/contract/drawer-schemas.ts";
import { QUANTITY_OF, RATING_UNIT } from "../../core/drawer/check-line.ts";
import { availableOf, unitCost, type StockLine } from "../../core/drawer/stock.ts";
import { editText } from "../../core/units.ts";
import { readPositive, readTolerance } from "../editor/part-text.ts";
import { costText, KIND_NAMES, NONE, ratingText, toleranceText, valueCode } from "./line-text.ts";

/** What a typed cell asks for: fields to set, a number of pieces found there, or what is wrong with the text. */
export type CellEdit =
  | { readonly ok: true; readonly fields: LineFields }
  | { readonly ok: true; readonly found: number }
  | { readonly ok: false; readonly message: string };

export interface Column {
  readonly key: LineSort["by"];
  readonly label: string;
  /** Pixels. */
  readonly width: number;
  readonly isNumber: boolean;
  readonly text: (line: DrawerLine) => string;
  /** How a cell is edited; undefined where it cannot be in the table. */
  readonly edit?: { readonly text: (line: DrawerLine) => string; readonly read: (text: string, line: DrawerLine) => CellEdit };
}

const refused = (message: string): CellEdit => ({ ok: false, message });
const took = (fields: LineFields): CellEdit => ({ ok: true, fields });

function plainText(key: "technology" | "package" | "location" | "supplier"): NonNullable<Column["edit"]> {
  return {
    text: (line) => line[key],
    read: (text) => (text.length > 200 ? refused("at most 200 characters") : took({ [key]: text.trim() })),
  };
}

/** Reads a line's value in the unit of its kind, or an op amp's type. */
export function readValue(text: string, kind: StockLine["kind"]): CellEdit {
  const quantity = QUANTITY_OF[kind];
  if (quantity === null) return text.trim() === "" ? refused("an op amp needs its type, such as TL072") : took({ type: text.trim() });
  const read = readPositive(text, quantity);
  return read.ok ? took({ value: read.value }) : refused(read.message);
}

/** Reads a tolerance; empty where unknown. A bare number means percent. */
export function readToleranceField(text: string): CellEdit {
  if (text.trim() === "") return took({ tolerance: null });
  const read = readTolerance(text);
  return read.ok ? took({ tolerance: read.value }) : refused(read.message);
}

/** Reads a rating such as `63 V`, `1/4 W`, `250m`; empty where unknown. */
export function readRating(text: string, kind: StockLine["kind"]): CellEdit {
  const unit = RATING_UNIT[kind];
  if (unit === null) return refused(`a line of ${KIND_NAMES[kind].one}s has no rating`);
  if (text.trim() === "") return took({ rating: null });
  const match = /^(\d+(?:[.,]\d+)?)(?:\s*\/\s*(\d+))?\s*([mk]?)\s*([VW]?)$/i.exec(text.trim());
  const expected = unit === "V" ? "expected a voltage such as 63 V" : "expected a power such as 0.25 W or 1/4 W";
  if (match === null || (match[4] !== "" && match[4].toUpperCase() !== unit)) return refused(expected);
  const [, digits, divisor = "1", prefix] = match;
  const rating = (Number(digits.replace(",", ".")) / Number(divisor)) * ({ m: 1e-3, k: 1e3, "": 1 }[prefix.toLowerCase()] ?? 1);
  return rating > 0 && Number.isFinite(rating) ? took({ rating: Number(rating.toPrecision(12)) }) : refused("must be above 0");
}

/** Reads the cost of one, `0.12` or `0,12 EUR`, keeping the prices of larger quantities; empty where unknown. */
export function readCost(text: string, line: Pick<StockLine, "prices" | "currency">): CellEdit {
  if (text.trim() === "") return took({ prices: [] });
  const match = /^(\d+(?:[.,]\d+)?)\s*([A-Za-z]{3})?$/.exec(text.trim());
  if (match === null) return refused("expected a price such as 0.12 or 0.12 EUR");
  const unit = Number(match[1].replace(",", "."));
  const prices = [{ from: 1, unitCost: unit }, ...line.prices.slice(1)];
  return took(match[2] === undefined ? { prices } : { prices, currency: match[2].toUpperCase() });
}

/** Reads a number of pieces. */
export function readCount(text: string): { readonly ok: true; readonly count: number } | { readonly ok: false; readonly message: string } {
  const plain = text.trim().replaceAll(/[\s ]/g, "");
  if (!/^\d{1,9}$/.test(plain)) return { ok: false, message: "expected a whole number of pieces" };
  return { ok: true, count: Number(plain) };
}

/** The table's columns, in order. */
export const COLUMNS: readonly Column[] = [
  { key: "id", label: "id", width: 168, isNumber: false, text: (line) => line.id },
  { key: "kind", label: "kind", width: 100, isNumber: false, text: (line) => KIND_NAMES[line.kind].one },
  {
    key: "value", label: "value", width: 84, isNumber: true, text: valueCode,
    edit: {
      text: (line) => {
        const quantity = QUANTITY_OF[line.kind];
        return quantity === null ? (line.type ?? "") : line.value === null ? "" : editText(line.value, quantity);
      },
      read: (text, line) => readValue(text, line.kind),
    },
  },
  { key: "tolerance", label: "tol.", width: 60, isNumber: true, text: (line) => toleranceText(line.tolerance), edit: { text: (line) => (line.tolerance === null ? "" : toleranceText(line.tolerance)), read: readToleranceField } },
  { key: "rating", label: "rating", width: 74, isNumber: true, text: ratingText, edit: { text: (line) => (ratingText(line) === NONE ? "" : ratingText(line)), read: (text, line) => readRating(text, line.kind) } },
  { key: "technology", label: "technology", width: 128, isNumber: false, text: (line) => line.technology, edit: plainText("technology") },
  { key: "package", label: "package", width: 116, isNumber: false, text: (line) => line.package, edit: plainText("package") },
  {
    key: "quantity", label: "quantity", width: 82, isNumber: true, text: (line) => String(line.quantity),
    edit: {
      text: (line) => String(line.quantity),
      read: (text) => {
        const read = readCount(text);
        return read.ok ? { ok: true, found: read.count } : read;
      },
    },
  },
  { key: "reserved", label: "reserved", width: 82, isNumber: true, text: (line) => (line.reserved === 0 ? NONE : String(line.reserved)) },
  { key: "available", label: "free", width: 64, isNumber: true, text: (line) => String(availableOf(line)) },
  { key: "location", label: "location", width: 96, isNumber: false, text: (line) => line.location, edit: plainText("location") },
  {
    key: "unitCost", label: "unit cost", width: 100, isNumber: true, text: (line) => costText(unitCost(line, 1), line.currency),
    edit: { text: (line) => (line.prices.length === 0 ? "" : costText(unitCost(line, 1), line.currency)), read: readCost },
  },
  { key: "supplier", label: "supplier", width: 132, isNumber: false, text: (line) => line.supplier, edit: plainText("supplier") },
];

/** The column that editing goes on to from one, in a direction; −1 where there is none. */
export function nextEditable(from: number, direction: 1 | -1): number {
  for (let at = from + direction; at >= 0 && at < COLUMNS.length; at += direction) if (COLUMNS[at].edit) return at;
  return -1;
}

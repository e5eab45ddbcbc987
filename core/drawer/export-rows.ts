import { editText, parseValue } from "../units.ts";
import { QUANTITY_OF, RATING_UNIT } from "./check-line.ts";
import { guardFormula } from "./formula-guard.ts";
import { readCoefficient, readRating, readTolerance } from "./cells.ts";
import type { ImportField, ImportMapping } from "./mapping.ts";
import type { StockedLine } from "./stock.ts";

/** The columns of an export, in order, under the names that an import knows them by. */
const COLUMNS = [
  ["id", "id"], ["kind", "kind"], ["value", "value"], ["type", "type"], ["tolerance", "tolerance"], ["rating", "rating"], ["technology", "technology"], ["temperature coefficient", "temperatureCoefficient"], ["winding resistance", "windingR"],
  ["package", "package"], ["location", "location"], ["quantity", "quantity"], ["prices", "prices"], ["currency", "currency"], ["supplier", "supplier"], ["order code", "orderCode"], ["notes", "notes"], ["retired", "retired"],
] as const satisfies readonly (readonly [string, ImportField])[];

export const EXPORT_HEADERS: readonly string[] = COLUMNS.map(([header]) => header);

/** Columns that exports of earlier versions did not have. */
const LATER: ReadonlySet<string> = new Set(["winding resistance"]);

/** How an export, of an earlier version too, is read back: nothing about it is guessed. Null where the headers are not those of one. */
export function exportMapping(headers: readonly string[]): ImportMapping | null {
  const names = headers.map((header) => header.trim());
  const wanted = COLUMNS.filter(([header]) => !LATER.has(header) || names.includes(header));
  if (names.length !== wanted.length || wanted.some(([header], index) => header !== names[index])) return null;
  return { columns: wanted.map(([, field], column) => ({ column, field, unit: "", from: 1 })), defaults: { kind: null, currency: "" } };
}

/** A line as an export writes it: in trade notation where that says exactly the same number, else in plain SI. */
export function exportRow(line: StockedLine & { readonly retired: boolean }): readonly string[] {
  const quantity = QUANTITY_OF[line.kind];
  return [
    guardFormula(line.id),
    line.kind,
    line.value === null || quantity === null ? "" : exact(line.value, editText(line.value, quantity).replace("µ", "u"), (text) => parseValue(text, quantity)),
    guardFormula(line.type ?? ""),
    line.tolerance === null ? "" : exact(line.tolerance, `${trimmed(line.tolerance * 100)}%`, (text) => readTolerance(text, "")),
    line.rating === null ? "" : exact(line.rating, `${trimmed(line.rating)}${RATING_UNIT[line.kind] ?? ""}`, (text) => readRating(text, "")),
    guardFormula(line.technology),
    line.temperatureCoefficient === null ? "" : exact(line.temperatureCoefficient, `${trimmed(line.temperatureCoefficient * 1e6)}ppm`, (text) => readCoefficient(text, "")),
    line.windingR === null ? "" : exact(line.windingR, editText(line.windingR, "resistance"), (text) => parseValue(text, "resistance")),
    guardFormula(line.package),
    guardFormula(line.location),
    String(line.quantity),
    line.prices.map(({ from, unitCost }) => `${from}:${unitCost}`).join(";"),
    line.currency,
    guardFormula(line.supplier),
    guardFormula(line.orderCode),
    guardFormula(line.notes),
    line.retired ? "yes" : "",
  ];
}

function trimmed(value: number): string {
  return String(Number(value.toPrecision(12)));
}

function exact(value: number, text: string, read: (text: string) => { readonly ok: boolean; readonly value?: number }): string {
  return read(text).value === value ? text : String(value);
}

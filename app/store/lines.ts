import type { DrawerLine, Holder, LineFields } from "../../core/contract/drawer-schemas.ts";
import { HostFailure } from "../../core/contract/failures.ts";
import { lineProblems } from "../../core/drawer/check-line.ts";
import type { StockLine } from "../../core/drawer/stock.ts";
import type { Db } from "./db.ts";
import type { Step } from "./steps.ts";
import { TEXT_FIELDS } from "./words.ts";

/** A line's row with the names of its fields. */
const LINE_COLUMNS =
  "l.key, l.id, l.retired, l.kind, l.value, l.type, l.tolerance, l.rating, l.technology, l.temperature_coefficient AS temperatureCoefficient, l.winding_resistance AS windingR, l.package, l.location, l.quantity, l.reserved, l.supplier, l.order_code AS orderCode, l.currency, l.prices, l.notes";

/** Of a field that can be edited, its column. */
const COLUMN_OF = {
  kind: "kind", value: "value", type: "type", tolerance: "tolerance", rating: "rating", technology: "technology", temperatureCoefficient: "temperature_coefficient", windingR: "winding_resistance", package: "package",
  location: "location", prices: "prices", currency: "currency", supplier: "supplier", orderCode: "order_code", notes: "notes", retired: "retired",
} as const;

type Field = keyof typeof COLUMN_OF;
const FIELDS = Object.keys(COLUMN_OF) as Field[];

/** Fields to set; the retired mark is one of them. */
export type LineEdit = LineFields & { readonly retired?: boolean };

interface LineRow extends Omit<DrawerLine, "prices" | "retired"> {
  readonly key: number;
  readonly prices: string;
  readonly retired: number;
}

/** A line with its key in the file. */
export interface KeyedLine {
  readonly key: number;
  readonly line: DrawerLine;
}

const NO_PRICES: DrawerLine["prices"] = [];

function lineOfRow(row: LineRow): KeyedLine {
  const { key, prices, retired, ...fields } = row;
  return { key, line: { ...fields, prices: prices === "[]" ? NO_PRICES : (JSON.parse(prices) as DrawerLine["prices"]), retired: retired === 1 } };
}

/** All rows of a query over `lines l` as lines with their keys. */
export function selectKeyed(db: Db, rest: string, ...values: (string | number | null)[]): KeyedLine[] {
  return db.all<LineRow>(`SELECT ${LINE_COLUMNS} FROM lines l ${rest}`, ...values).map(lineOfRow);
}

/** The same, without the keys. */
export function selectLines(db: Db, rest: string, ...values: (string | number | null)[]): DrawerLine[] {
  return selectKeyed(db, rest, ...values).map(({ line }) => line);
}

/** Every line by id, retired ones too, without holding them all. */
export function* eachLine(db: Db): Generator<DrawerLine> {
  for (const row of db.each<LineRow>(`SELECT ${LINE_COLUMNS} FROM lines l ORDER BY l.id`)) yield lineOfRow(row).line;
}

export function findLine(db: Db, id: string): KeyedLine | null {
  const row = db.get<LineRow>(`SELECT ${LINE_COLUMNS} FROM lines l WHERE l.id = ?`, id);
  return row === undefined ? null : lineOfRow(row);
}

/** @throws HostFailure drawer-missing */
export function requireLine(db: Db, id: string): KeyedLine {
  const found = findLine(db, id);
  if (found === null) throw new HostFailure("drawer-missing", { what: "line", id });
  return found;
}

export function lineByKey(db: Db, key: number): DrawerLine {
  const row = db.get<LineRow>(`SELECT ${LINE_COLUMNS} FROM lines l WHERE l.key = ?`, key);
  if (row === undefined) throw new Error(`the history names line ${key}, which is not there`);
  return lineOfRow(row).line;
}

/** `before`: the line before an edit. @throws HostFailure drawer-refused with everything that is wrong, each with the line's id */
export function requireSoundLine(line: StockLine, before?: StockLine): void {
  const problems = lineProblems(line, before);
  if (problems.length > 0) throw new HostFailure("drawer-refused", { problems: problems.map((problem) => (line.id === "" ? problem : `${line.id}: ${problem}`)) });
}

/** Makes a line; it has no pieces yet. */
export function insertLine(db: Db, step: Step, line: StockLine, isRetired = false): number {
  const key = db.run(
    `INSERT INTO lines (id, retired, kind, value, type, tolerance, rating, technology, temperature_coefficient, winding_resistance, package, location, supplier, order_code, currency, prices, notes)
     VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`,
    line.id, isRetired ? 1 : 0, line.kind, line.value, line.type, line.tolerance, line.rating, line.technology, line.temperatureCoefficient, line.windingR, line.package, line.location, line.supplier, line.orderCode, line.currency,
    JSON.stringify(line.prices), line.notes,
  );
  step.reword(key, null);
  step.change("line", key, null, {});
  return key;
}

/** Who holds pieces of a line, the largest share first. */
export function holdersOf(db: Db, key: number): Holder[] {
  return db.all<Holder>("SELECT reference, count FROM holdings WHERE line = ? ORDER BY count DESC, reference", key);
}

/** Sets what differs, with its trace; says whether anything did. */
export function updateLine(db: Db, step: Step, { key, line }: KeyedLine, edit: LineEdit): boolean {
  const changed = FIELDS.filter((field) => edit[field] !== undefined && !isSame(edit[field], line[field]));
  if (changed.length === 0) return false;
  const after: LineEdit = Object.fromEntries(changed.map((field) => [field, edit[field]]));
  requireSoundLine(withEdit(line, after), line);
  if (edit.retired === true && line.reserved > 0) {
    const holders = holdersOf(db, key).map((holder) => `${holder.reference} (${holder.count})`).join(", ");
    throw new HostFailure("drawer-refused", { problems: [`${line.id}: ${line.reserved} pieces are spoken for, by ${holders}. Release them before retiring it.`] });
  }
  const before = Object.fromEntries(changed.map((field) => [field, line[field]]));
  writeFields(db, step, { key, line }, { ...after });
  step.change("line", key, before, after);
  return true;
}

/** Writes fields as the history names them, without any check or trace of its own. */
export function writeFields(db: Db, step: Step, { key, line }: KeyedLine, fields: Readonly<Record<string, unknown>>): void {
  if (TEXT_FIELDS.some((field) => Object.hasOwn(fields, field))) step.reword(key, line);
  const names = FIELDS.filter((field) => Object.hasOwn(fields, field));
  db.run(`UPDATE lines SET ${names.map((field) => `${COLUMN_OF[field]} = ?`).join(", ")} WHERE key = ?`, ...names.map((field) => toColumn(fields[field])), key);
}

function toColumn(value: unknown): string | number | null {
  if (typeof value === "boolean") return value ? 1 : 0;
  if (value === null || typeof value === "string" || typeof value === "number") return value;
  return JSON.stringify(value);
}

function withEdit(line: DrawerLine, edit: LineEdit): StockLine {
  return { ...line, ...(Object.fromEntries(Object.entries(edit).filter(([, value]) => value !== undefined)) as Partial<DrawerLine>) };
}

/** Whether two values of a field are the same; prices are compared as they are written. */
export function isSame(a: unknown, b: unknown): boolean {
  return a === b || (typeof a === "object" && typeof b === "object" && JSON.stringify(a) === JSON.stringify(b));
}

/** A line's name in a step's label: one by its id, several by their number. */
export function namesOf(ids: readonly string[]): string {
  return ids.length === 1 ? ids[0] : `${ids.length} lines`;
}


import { isBareNumber, kindOfValue, readCoefficient, readCurrency, readKind, readMoney, readPrices, readQuantity, readRating, readTick, readTolerance, readValue, readWinding, type Cell } from "./cells.ts";
import { lineProblems, QUANTITY_OF } from "./check-line.ts";
import { unguardFormula } from "./formula-guard.ts";
import { makeId } from "./make-id.ts";
import type { ColumnUse, ImportField, ImportMapping } from "./mapping.ts";
import { emptyLine, type PriceBreak, type StockKind, type StockLine } from "./stock.ts";

/** Fields that the table says something about; a known line keeps the others. */
export type RowFields = { -readonly [F in keyof Omit<StockLine, "id">]?: StockLine[F] } & { retired?: boolean };

/** One row of a table, read. */
export interface ReadRow {
  /** Empty where the table has no names: then `madeId` is one made of what the part is. */
  readonly id: string;
  readonly madeId: string;
  readonly fields: RowFields;
  /** Pieces there; null where the table does not say. */
  readonly quantity: number | null;
  /** The row as a whole line, as it would be taken into an empty drawer. */
  readonly line: StockLine;
  /** Why it cannot be taken; nothing where it can. */
  readonly problems: readonly string[];
}

const TEXTS = ["technology", "package", "location", "supplier", "orderCode", "notes"] as const;

/** Reads a row by a mapping. */
export function readRow(cells: readonly string[], mapping: ImportMapping): ReadRow {
  const problems: string[] = [];
  const used = new Map<ImportField, ColumnUse>();
  for (const use of mapping.columns) if (use.field !== "price") used.set(use.field, use);
  const text = (field: ImportField): string => {
    const use = used.get(field);
    return use === undefined ? "" : (cells[use.column] ?? "").trim();
  };
  const unit = (field: ImportField): string => used.get(field)?.unit ?? "";
  /** Null where the cell is empty, or cannot be read: that is then a problem. */
  const read = <T>(cell: string, reader: (cell: string) => Cell<T>): T | null => {
    if (cell === "") return null;
    const result = reader(cell);
    if (result.ok) return result.value;
    problems.push(result.message);
    return null;
  };

  const fields: RowFields = {};
  const kind = readKindOf();
  if (kind !== null) {
    fields.kind = kind;
    readValueOf(kind);
  }
  if (used.has("tolerance")) fields.tolerance = read(text("tolerance"), (cell) => readTolerance(cell, unit("tolerance")));
  if (used.has("rating")) fields.rating = read(text("rating"), (cell) => readRating(cell, unit("rating")));
  if (used.has("temperatureCoefficient")) fields.temperatureCoefficient = read(text("temperatureCoefficient"), (cell) => readCoefficient(cell, unit("temperatureCoefficient")));
  if (used.has("windingR")) fields.windingR = read(text("windingR"), (cell) => readWinding(cell, unit("windingR")));
  for (const field of TEXTS) if (used.has(field)) fields[field] = unguardFormula(text(field));
  readPricesOf();
  if (used.has("retired")) fields.retired = read(text("retired"), readTick) ?? false;
  const quantity = used.has("quantity") ? read(text("quantity"), readQuantity) : null;

  const id = unguardFormula(text("id"));
  const whole: StockLine = { ...emptyLine(id, kind ?? undefined), ...withoutMark(fields) };
  const madeId = id === "" && problems.length === 0 ? makeId(whole) : "";
  const line = { ...whole, id: id === "" ? madeId : id };
  if (problems.length === 0) problems.push(...lineProblems(line));
  return { id, madeId, fields, quantity, line, problems };

  function readKindOf(): StockKind | null {
    const said = read(text("kind"), readKind);
    if (said !== null || text("kind") !== "") return said;
    const guess = mapping.defaults.kind ?? (text("type") !== "" && text("value") === "" ? "op-amp" : kindOfValue(text("value"), unit("value")));
    if (guess === null) problems.push("it is not said what kind of part it is: a column of kinds, or values with their unit, would say it");
    return guess;
  }

  function readValueOf(wanted: StockKind): void {
    const quantityName = QUANTITY_OF[wanted];
    if (quantityName === null) {
      fields.value = null;
      // Many a table has no column for it but the one for values.
      const type = text("type") || text("value");
      fields.type = type === "" ? null : unguardFormula(type);
      return;
    }
    if (used.has("value")) fields.value = read(text("value"), (cell) => readValue(cell, unitFor(cell, wanted), quantityName));
    fields.type = text("type") === "" ? null : text("type");
  }

  /** A column's unit is for the parts that it measures: nF says nothing about the resistors in the same table. */
  function unitFor(cell: string, wanted: StockKind): string {
    const own = unit("value");
    if (own === "" || !isBareNumber(cell)) return own;
    const meant = kindOfValue("1", own);
    return meant === null || QUANTITY_OF[meant] === QUANTITY_OF[wanted] || !/[ΩΩFH]$/.test(own) ? own : "";
  }

  function readPricesOf(): void {
    const breaks = mapping.columns.filter((use) => use.field === "price");
    let currency = "";
    if (used.has("prices") || breaks.length > 0) {
      const listed = read(text("prices"), readPrices);
      currency = listed?.currency ?? "";
      const found: PriceBreak[] = [...(listed?.prices ?? [])];
      for (const use of breaks) {
        const cell = (cells[use.column] ?? "").trim();
        // A column of prices may hold all breaks in one cell.
        if (use.from === 1 && /[:;|]/.test(cell)) {
          const all = read(cell, readPrices);
          found.push(...(all?.prices ?? []));
          if (all !== null && all.currency !== "") currency = all.currency;
          continue;
        }
        const money = read(cell, readMoney);
        if (money === null) continue;
        found.push({ from: use.from, unitCost: money.amount });
        if (money.currency !== "") currency = money.currency;
      }
      const ascending = found.sort((a, b) => a.from - b.from);
      // Bought by the ten, one costs what one of ten costs.
      fields.prices = ascending.map((one, index) => (index === 0 && one.from > 1 ? { ...one, from: 1 } : one));
    }
    const said = used.has("currency") ? read(text("currency"), readCurrency) : null;
    if (said !== null) fields.currency = said;
    else if (currency !== "") fields.currency = currency;
    else if (fields.prices !== undefined && fields.prices.length > 0 && mapping.defaults.currency !== "") fields.currency = mapping.defaults.currency;
    else if (used.has("currency")) fields.currency = "";
  }
}

function withoutMark({ retired: _retired, ...fields }: RowFields): Partial<StockLine> {
  return fields;
}

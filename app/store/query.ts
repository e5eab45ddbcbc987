import { FACETS, type CandidateQuery, type DrawerLine, type Facet, type Facets, type LineFilter, type LineSort, type OwnedValue } from "../../core/contract/drawer-schemas.ts";
import { searchTerms, type SearchTerm, type ValueRange } from "../../core/drawer/search-terms.ts";
import type { StockKind } from "../../core/drawer/stock.ts";
import type { Db } from "./db.ts";
import { selectLines } from "./lines.ts";

type Value = string | number | null;

/** Conditions on `lines l`, joined by AND, with their values in order. */
interface Where {
  readonly sql: string;
  readonly values: readonly Value[];
}

/** By what a column of the screen is sorted; lines that have no value there come last either way. */
const SORT: Record<LineSort["by"], readonly string[]> = {
  id: ["id COLLATE NOCASE"],
  kind: ["kind", "value"],
  value: ["kind", "value"],
  type: ["type"],
  tolerance: ["tolerance"],
  rating: ["rating"],
  technology: ["technology"],
  temperatureCoefficient: ["temperature_coefficient"],
  package: ["package"],
  location: ["location"],
  quantity: ["quantity"],
  reserved: ["reserved"],
  available: ["available"],
  unitCost: ["unit_cost"],
  supplier: ["supplier"],
  orderCode: ["order_code"],
  notes: ["notes"],
};
const MAY_BE_NULL = new Set(["value", "type", "tolerance", "rating", "temperature_coefficient", "unit_cost"]);

const RANGE_COLUMN: Record<ValueRange["column"], string> = { value: "value", rating: "rating", tolerance: "tolerance", temperatureCoefficient: "temperature_coefficient" };

/** A window on the lines that fit a filter. */
export function windowOf(db: Db, filter: LineFilter, sort: LineSort, offset: number, limit: number): DrawerLine[] {
  const { sql, values } = whereOf(filter);
  const direction = sort.descending ? "DESC" : "ASC";
  const order = [...SORT[sort.by].map((column) => `l.${column} ${direction}${MAY_BE_NULL.has(column) ? " NULLS LAST" : ""}`), `l.key ${direction}`].join(", ");
  // The keys first, from an index where there is one: rows are fetched for the window alone.
  const keys = db.all<{ key: number }>(`SELECT l.key FROM lines l WHERE ${sql} ORDER BY ${order} LIMIT ? OFFSET ?`, ...values, limit, offset).map((row) => row.key);
  const lines = new Map(selectLines(db, "WHERE l.key IN (SELECT value FROM json_each(?))", JSON.stringify(keys)).map((line) => [line.id, line]));
  const ids = new Map(db.all<{ key: number; id: string }>("SELECT l.key, l.id FROM lines l WHERE l.key IN (SELECT value FROM json_each(?))", JSON.stringify(keys)).map((row) => [row.key, row.id]));
  return keys.map((key) => lines.get(ids.get(key) ?? "")).filter((line) => line !== undefined);
}

/** How many lines fit a filter. */
export function countOf(db: Db, filter: LineFilter): number {
  const { sql, values } = whereOf(filter);
  return db.value<number>(`SELECT count(*) FROM lines l WHERE ${sql}`, ...values) ?? 0;
}

/** Counts each facet's values among the lines that fit the filter; a facet's own choices do not count against it. */
export function facetsOf(db: Db, filter: LineFilter): Facets {
  const counts = Object.fromEntries(FACETS.map((facet) => [facet, new Map<Value, number>()])) as Record<Facet, Map<Value, number>>;
  const isUnfiltered = whereOf({ ...filter, withRetired: false }).values.length === 0 && !filter.onlyAvailable && !filter.withRetired;
  if (isUnfiltered) {
    for (const facet of FACETS) {
      for (const row of db.all<{ value: Value; count: number }>(`SELECT ${facet} AS value, count(*) AS count FROM lines l WHERE l.retired = 0 GROUP BY ${facet}`)) counts[facet].set(row.value, row.count);
    }
  } else {
    countInOnePass(db, filter, counts);
  }
  const sorted = <T extends Value>(facet: Facet): { value: T; count: number }[] =>
    [...counts[facet]].map(([value, count]) => ({ value: value as T, count })).sort((a, b) => b.count - a.count || String(a.value).localeCompare(String(b.value), "en", { numeric: true }));
  return { kind: sorted<StockKind>("kind"), technology: sorted<string>("technology"), package: sorted<string>("package"), supplier: sorted<string>("supplier"), location: sorted<string>("location"), tolerance: sorted<number | null>("tolerance") };
}

/** One pass over the rows that fit all but the choices, which are looked at here: a row that fails one facet alone counts for that facet. */
function countInOnePass(db: Db, filter: LineFilter, counts: Record<Facet, Map<Value, number>>): void {
  const { sql, values } = whereOf({ ...filter, kind: [], technology: [], package: [], supplier: [], location: [], tolerance: [] });
  const chosen = FACETS.map((facet) => ({ facet, values: new Set<Value>(filter[facet].map(folded)), counts: counts[facet], names: new Map<Value, Value>() }));
  // Groups first: there are far fewer of them than lines.
  for (const row of db.all<Record<Facet, Value> & { count: number }>(`SELECT ${FACETS.join(", ")}, count(*) AS count FROM lines l WHERE ${sql} GROUP BY ${FACETS.join(", ")}`, ...values)) {
    const failing = chosen.filter((one) => one.values.size > 0 && !one.values.has(folded(row[one.facet])));
    if (failing.length > 1) continue;
    for (const one of failing.length === 1 ? failing : chosen) {
      const key = folded(row[one.facet]);
      const name = one.names.get(key) ?? row[one.facet];
      one.names.set(key, name);
      one.counts.set(name, (one.counts.get(name) ?? 0) + row.count);
    }
  }
}

/** As the file's columns compare: without regard to the case of plain letters. */
function folded(value: Value): Value {
  return typeof value === "string" ? value.replaceAll(/[A-Z]/g, (letter) => letter.toLowerCase()) : value;
}

/** The values among the lines that fit, ascending, with what there is of each. */
export function valuesOf(db: Db, filter: LineFilter): OwnedValue[] {
  const { sql, values } = whereOf(filter);
  return db.all<OwnedValue>(`SELECT l.value, count(*) AS lines, sum(l.quantity) AS quantity FROM lines l WHERE ${sql} AND l.value IS NOT NULL GROUP BY l.value ORDER BY l.value`, ...values);
}

/** Lines in use of about a value, the nearest by ratio first. */
export function candidatesOf(db: Db, query: CandidateQuery): DrawerLine[] {
  const where = ["l.retired = 0", "l.kind = ?"];
  const values: Value[] = [query.kind];
  const add = (condition: string, ...more: Value[]): void => {
    where.push(condition);
    values.push(...more);
  };
  // The slack lets a value in that is off by exactly what is allowed.
  if (query.value !== null) add("l.value BETWEEN ? AND ?", query.value * (1 - query.within) * (1 - 1e-12), query.value * (1 + query.within) * (1 + 1e-12));
  if (query.type !== null) add("l.type = ?", query.type);
  if (query.technology.length > 0) add("l.technology IN (SELECT value FROM json_each(?))", JSON.stringify(query.technology));
  if (query.ratingFrom !== null) add("l.rating >= ?", query.ratingFrom);
  if (query.toleranceTo !== null) add("l.tolerance <= ?", query.toleranceTo * (1 + 1e-12));
  if (query.availableFrom > 0) add("l.available >= ?", query.availableFrom);
  const order = query.value === null ? "l.id" : `max(l.value / ?, ? / l.value), l.id`;
  const nearness = query.value === null ? [] : [query.value, query.value];
  return selectLines(db, `WHERE ${where.join(" AND ")} ORDER BY ${order} LIMIT ?`, ...values, ...nearness, query.limit);
}

function whereOf(filter: LineFilter): Where {
  const where: string[] = [];
  const values: Value[] = [];
  const add = (condition: string, ...more: Value[]): void => {
    where.push(condition);
    values.push(...more);
  };
  // In both cases the leading column of the indexes.
  where.push(filter.withRetired ? "l.retired IN (0, 1)" : "l.retired = 0");
  for (const column of ["kind", "technology", "package", "supplier", "location"] as const) {
    // Spelt out, not joined to a list: the column's own way of comparing has to hold.
    if (filter[column].length > 0) add(`l.${column} IN (${filter[column].map(() => "?").join(", ")})`, ...filter[column]);
  }
  if (filter.tolerance.length > 0) {
    const known = filter.tolerance.filter((tolerance) => tolerance !== null);
    const parts = [...known.map(() => "l.tolerance = ?"), ...(known.length < filter.tolerance.length ? ["l.tolerance IS NULL"] : [])];
    add(`(${parts.join(" OR ")})`, ...known);
  }
  if (filter.valueFrom !== null) add("l.value >= ?", filter.valueFrom);
  if (filter.valueTo !== null) add("l.value <= ?", filter.valueTo);
  if (filter.onlyAvailable) where.push("l.available > 0");
  if (filter.heldBy !== null) add("l.key IN (SELECT line FROM holdings WHERE reference = ?)", filter.heldBy);
  addTerms(searchTerms(filter.text), add);
  return { sql: where.join(" AND "), values };
}

/** Words are looked up together where no value is in play; otherwise each term is a set of its own. */
function addTerms(terms: readonly SearchTerm[], add: (condition: string, ...values: Value[]) => void): void {
  const plain = terms.filter((term) => term.ranges.length === 0).flatMap((term) => term.words);
  if (plain.length > 0) add("l.key IN (SELECT rowid FROM line_words WHERE line_words MATCH ?)", matchOf(plain));
  for (const term of terms.filter((one) => one.ranges.length > 0)) {
    const sets = term.ranges.map(({ column, kinds }) => `SELECT key FROM lines WHERE retired IN (0, 1) AND kind IN (${kinds.map(() => "?").join(", ")}) AND ${RANGE_COLUMN[column]} BETWEEN ? AND ?`);
    const values: Value[] = term.ranges.flatMap(({ kinds, from, to }) => [...kinds, from, to]);
    if (term.words.length > 0) {
      sets.push("SELECT rowid FROM line_words WHERE line_words MATCH ?");
      values.push(matchOf(term.words));
    }
    add(`l.key IN (${sets.join(" UNION ALL ")})`, ...values);
  }
}

/** Beginnings of words, all of them; quoted, so that none is taken for an operator. */
function matchOf(words: readonly string[]): string {
  return words.map((word) => `"${word}"*`).join(" AND ");
}

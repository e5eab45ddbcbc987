import { FACETS, type CandidateQuery, type DrawerLine, type Facet, type Facets, type LineFilter, type LineSort, type OwnedValue } from "../../core/contract/drawer-schemas.ts";
import type { StockKind } from "../../core/drawer/stock.ts";
import type { Db } from "./db.ts";
import { selectKeyed, selectLines } from "./lines.ts";
import type { TextHits } from "./text-hits.ts";

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

/** Fewer hits than this are fetched and sorted; more are met on the way through an index. */
const FEW = 2000;

/** The lines to look at, and their conditions. */
interface Source {
  readonly from: string;
  readonly where: string;
  readonly values: readonly Value[];
}

function sourceOf(hits: TextHits, filter: LineFilter, few = FEW): Source {
  const { sql, values } = whereOf(filter);
  const count = hits.fill(filter.text);
  if (count === null) return { from: "lines l", where: sql, values };
  if (count <= few) return { from: "temp.hits h CROSS JOIN lines l ON l.key = h.key", where: sql, values };
  return { from: "lines l", where: `${sql} AND +l.key IN (SELECT key FROM temp.hits)`, values };
}

/** A window on the lines that fit a filter. */
export function windowOf(db: Db, hits: TextHits, filter: LineFilter, sort: LineSort, offset: number, limit: number): DrawerLine[] {
  const { from, where, values } = sourceOf(hits, filter);
  const direction = sort.descending ? "DESC" : "ASC";
  const order = [...SORT[sort.by].map((column) => `l.${column} ${direction}${MAY_BE_NULL.has(column) ? " NULLS LAST" : ""}`), `l.key ${direction}`].join(", ");
  // The keys first, from an index where there is one: rows are fetched for the window alone.
  const keys = db.all<{ key: number }>(`SELECT l.key FROM ${from} WHERE ${where} ORDER BY ${order} LIMIT ? OFFSET ?`, ...values, limit, offset).map((row) => row.key);
  const rows = new Map(selectKeyed(db, "WHERE l.key IN (SELECT value FROM json_each(?))", JSON.stringify(keys)).map(({ key, line }) => [key, line]));
  return keys.map((key) => rows.get(key)).filter((line) => line !== undefined);
}

/** How many lines fit a filter. */
export function countOf(db: Db, hits: TextHits, filter: LineFilter): number {
  const found = hits.fill(filter.text);
  if (found !== null && isEveryLine({ ...filter, text: "" })) {
    const retired = db.value<number>("SELECT count(*) FROM lines l WHERE l.retired = 1 AND +l.key IN (SELECT key FROM temp.hits)") ?? 0;
    return found - retired;
  }
  const { from, where, values } = sourceOf(hits, filter);
  return db.value<number>(`SELECT count(*) FROM ${from} WHERE ${where}`, ...values) ?? 0;
}

/** Counts each facet's values among the lines that fit the filter; a facet's own choices do not count against it. */
export function facetsOf(db: Db, hits: TextHits, filter: LineFilter): Facets {
  const counts = Object.fromEntries(FACETS.map((facet) => [facet, new Map<Value, number>()])) as Record<Facet, Map<Value, number>>;
  if (isEveryLine(filter)) {
    for (const facet of FACETS) {
      for (const row of db.all<{ value: Value; count: number }>(`SELECT ${facet} AS value, count(*) AS count FROM lines l WHERE l.retired = 0 GROUP BY ${facet}`)) counts[facet].set(row.value, row.count);
    }
  } else {
    countInOnePass(db, hits, filter, counts);
  }
  const sorted = <T extends Value>(facet: Facet): { value: T; count: number }[] =>
    [...counts[facet]].map(([value, count]) => ({ value: value as T, count })).sort((a, b) => b.count - a.count || String(a.value).localeCompare(String(b.value), "en", { numeric: true }));
  return { kind: sorted<StockKind>("kind"), technology: sorted<string>("technology"), package: sorted<string>("package"), supplier: sorted<string>("supplier"), location: sorted<string>("location"), tolerance: sorted<number | null>("tolerance") };
}

/** One pass over the rows that fit all but the choices, which are looked at here: a row that fails one facet alone counts for that facet. */
function countInOnePass(db: Db, hits: TextHits, filter: LineFilter, counts: Record<Facet, Map<Value, number>>): void {
  const { from, where, values } = sourceOf(hits, { ...filter, kind: [], technology: [], package: [], supplier: [], location: [], tolerance: [] }, Infinity);
  const chosen = FACETS.map((facet) => ({ facet, values: new Set<Value>(filter[facet].map(folded)), counts: counts[facet], names: new Map<Value, Value>() }));
  // Groups first: there are far fewer of them than lines.
  for (const row of db.all<Record<Facet, Value> & { count: number }>(`SELECT ${FACETS.join(", ")}, count(*) AS count FROM ${from} WHERE ${where} GROUP BY ${FACETS.join(", ")}`, ...values)) {
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
export function valuesOf(db: Db, hits: TextHits, filter: LineFilter): OwnedValue[] {
  const { from, where, values } = sourceOf(hits, filter);
  return db.all<OwnedValue>(`SELECT l.value, count(*) AS lines, sum(l.quantity) AS quantity FROM ${from} WHERE ${where} AND l.value IS NOT NULL GROUP BY l.value ORDER BY l.value`, ...values);
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

/** Whether a filter lets every line through that is not retired. */
function isEveryLine(filter: LineFilter): boolean {
  return !filter.withRetired && !filter.onlyAvailable && filter.text.trim() === "" && whereOf(filter).values.length === 0 && !filter.tolerance.includes(null);
}

/** All conditions but those of the text. */
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
  return { sql: where.join(" AND "), values };
}

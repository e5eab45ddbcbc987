import { searchTerms, type SearchTerm, type ValueRange } from "../../core/drawer/search-terms.ts";
import { STOCK_KINDS } from "../../core/drawer/stock.ts";
import type { Db } from "./db.ts";

type Value = string | number | null;

const RANGE_COLUMN: Record<ValueRange["column"], string> = { value: "value", rating: "rating", tolerance: "tolerance", temperatureCoefficient: "temperature_coefficient" };

/**
 * The lines that fit a typed text, as keys in a temporary table: `temp.hits`. Looked up once, however often the window
 * is moved, sorted or counted, until the text or the drawer changes.
 */
export class TextHits {
  private readonly db: Db;
  private isMade = false;
  private key = "";
  private count = 0;

  constructor(db: Db) {
    this.db = db;
  }

  /** Fills the table for a text; gives how many lines there are, retired ones too, or null where the text asks for nothing. */
  fill(text: string): number | null {
    const terms = searchTerms(text);
    if (terms.length === 0) return null;
    const key = `${this.db.stamp()} ${JSON.stringify(terms)}`;
    if (key === this.key) return this.count;
    if (!this.isMade) this.db.run("CREATE TEMP TABLE IF NOT EXISTS hits (key INTEGER PRIMARY KEY) STRICT");
    this.isMade = true;
    this.key = "";
    this.db.run("DELETE FROM temp.hits");
    conditionsOf(terms).forEach(({ set, holds, values }, index) => {
      if (index === 0) this.db.run(`INSERT OR IGNORE INTO temp.hits (key) ${set}`, ...values);
      else this.db.run(`DELETE FROM temp.hits WHERE NOT (${holds})`, ...values);
    });
    this.count = this.db.value<number>("SELECT count(*) FROM temp.hits") ?? 0;
    this.key = key;
    return this.count;
  }
}

/** One thing that a line has to have. */
interface Condition {
  /** A query of the keys of all lines that have it. */
  readonly set: string;
  /** Whether the line of `temp.hits.key` has it; with the same values in the same order. */
  readonly holds: string;
  readonly values: readonly Value[];
}

const MATCHING = "SELECT rowid FROM line_words WHERE line_words MATCH ?";

/** Component values first, since fewest lines have them; then words, looked up all together; then ratings and the like. */
function conditionsOf(terms: readonly SearchTerm[]): readonly Condition[] {
  const withRanges = terms.filter((term) => term.ranges.length > 0);
  const words = terms.filter((term) => term.ranges.length === 0).flatMap((term) => term.words);
  const isOfValue = (term: SearchTerm): boolean => term.ranges.some((range) => range.column === "value");
  return [
    ...withRanges.filter(isOfValue).map(ofRanges),
    ...(words.length === 0 ? [] : [{ set: MATCHING, holds: `key IN (${MATCHING})`, values: [matchOf(words)] }]),
    ...withRanges.filter((term) => !isOfValue(term)).map(ofRanges),
  ];
}

function ofRanges({ ranges, words }: SearchTerm): Condition {
  const tests = ranges.map(({ column, kinds }) => `${kinds.length === STOCK_KINDS.length ? "" : `kind IN (${kinds.map(() => "?").join(", ")}) AND `}${RANGE_COLUMN[column]} BETWEEN ? AND ?`);
  const sets = tests.map((test) => `SELECT key FROM lines WHERE retired IN (0, 1) AND ${test}`);
  const holds = [`EXISTS (SELECT 1 FROM lines l WHERE l.key = hits.key AND (${tests.map((test) => `(${test})`).join(" OR ")}))`];
  const values: Value[] = ranges.flatMap(({ kinds, from, to }) => [...(kinds.length === STOCK_KINDS.length ? [] : kinds), from, to]);
  if (words.length > 0) {
    sets.push(MATCHING);
    holds.push(`key IN (${MATCHING})`);
    values.push(matchOf(words));
  }
  return { set: sets.join(" UNION ALL "), holds: holds.join(" OR "), values };
}

/** Beginnings of words, all of them; quoted, so that none is taken for an operator. */
function matchOf(words: readonly string[]): string {
  return words.map((word) => `"${word}"*`).join(" AND ");
}

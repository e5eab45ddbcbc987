import type { StockLine } from "../../core/drawer/stock.ts";
import type { Db } from "./db.ts";

/** The fields that free text is looked for in. */
export const TEXT_FIELDS = ["id", "kind", "type", "technology", "package", "location", "supplier", "orderCode", "notes"] as const;
export type LineTexts = Pick<StockLine, (typeof TEXT_FIELDS)[number]>;

const COLUMNS = "id, kind, type, technology, package, location, supplier, order_code, notes";

/** Puts the words of lines into the index, as they are now. */
export function addWords(db: Db, keys: readonly number[]): void {
  db.run(`INSERT INTO line_words (rowid, ${COLUMNS}) SELECT key, ${COLUMNS} FROM lines WHERE key IN (SELECT value FROM json_each(?))`, JSON.stringify(keys));
}

/** Takes the words of a line out, which has to be told what they are. */
export function dropWords(db: Db, key: number, texts: LineTexts): void {
  db.run(`INSERT INTO line_words (line_words, rowid, ${COLUMNS}) VALUES ('delete', ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`, key, ...TEXT_FIELDS.map((field) => texts[field]));
}

/** Complaints about an index that does not fit the lines. */
export function wordProblems(db: Db): readonly string[] {
  try {
    db.run("INSERT INTO line_words (line_words, rank) VALUES ('integrity-check', 1)");
    return [];
  } catch (error) {
    return [`the index of words does not fit the lines: ${error instanceof Error ? error.message : String(error)}`];
  }
}

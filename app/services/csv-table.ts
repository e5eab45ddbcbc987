import { Readable } from "node:stream";
import { CsvError, parse } from "csv-parse";
import { HostFailure } from "../../core/contract/failures.ts";
import { exportMapping } from "../../core/drawer/export-rows.ts";
import { guessDelimiter, guessHeader, guessMapping } from "../../core/drawer/guess-mapping.ts";
import type { Encoding, ImportMapping, TableReading } from "../../core/drawer/mapping.ts";
import { readWhole } from "./read-whole.ts";

const MAX_TABLE_BYTES = 256 * 1024 * 1024;
const CHUNK = 65_536;
const SAMPLE_ROWS = 50;

/** One row of a table, with the line of the file where it begins, counted from 1. */
export interface TableRow {
  readonly row: number;
  readonly cells: readonly string[];
}

/** A table's text, and how to read it. */
export interface Table {
  readonly text: string;
  readonly reading: TableReading;
  readonly mapping: ImportMapping;
  readonly headers: readonly string[];
  /** The first rows under the header. */
  readonly sample: readonly TableRow[];
}

/** A table's text from a file. @throws HostFailure */
export async function readTable(path: string, encoding: Encoding | null): Promise<{ readonly text: string; readonly encoding: Encoding }> {
  return decodeTable(await readWhole(path, MAX_TABLE_BYTES), encoding);
}

/** Decodes a table's bytes: as told, else by their mark, else UTF-8, else what spreadsheets wrote before it. */
export function decodeTable(bytes: Uint8Array, encoding: Encoding | null): { readonly text: string; readonly encoding: Encoding } {
  const wanted = encoding ?? (bytes[0] === 0xff && bytes[1] === 0xfe ? "utf-16le" : null);
  if (wanted !== null) return { text: new TextDecoder(wanted).decode(bytes), encoding: wanted };
  try {
    return { text: new TextDecoder("utf-8", { fatal: true }).decode(bytes), encoding: "utf-8" };
  } catch {
    return { text: new TextDecoder("windows-1252").decode(bytes), encoding: "windows-1252" };
  }
}

/** Works out how a text is to be read as a table, where the caller does not say. @throws HostFailure import-refused where it is none */
export async function openTable(text: string, encoding: Encoding, reading: TableReading | null, mapping: ImportMapping | null): Promise<Table> {
  // No table has one; pictures, archives and databases do.
  if (text.slice(0, CHUNK).includes("\0")) throw new HostFailure("import-refused", { rows: 1, refused: 1, faults: [{ row: 1, message: "this is no text, so it is no table" }] });
  const delimiter = reading?.delimiter ?? guessDelimiter(text);
  const first: TableRow[] = [];
  for await (const row of tableRows(text, delimiter)) {
    first.push(row);
    if (first.length > SAMPLE_ROWS) break;
  }
  const hasHeader = reading?.hasHeader ?? guessHeader(first[0]?.cells ?? []);
  const width = first.reduce((most, row) => Math.max(most, row.cells.length), 0);
  const headers = Array.from({ length: width }, (_, column) => (hasHeader ? (first[0]?.cells[column] ?? "").trim() : "") || `Column ${column + 1}`);
  const sample = hasHeader ? first.slice(1) : first.slice(0, SAMPLE_ROWS);
  const guessed = (): ImportMapping => exportMapping(headers) ?? guessMapping(headers, sample.map((row) => row.cells));
  return { text, reading: { delimiter, encoding, hasHeader }, mapping: mapping ?? guessed(), headers, sample };
}

/** The rows of a table, its header among them. @throws HostFailure import-refused where quotes do not close */
export async function* tableRows(text: string, delimiter: string, onProgress?: (characters: number) => void): AsyncGenerator<TableRow> {
  let passed = 0;
  function* chunks(): Generator<string> {
    for (; passed < text.length; passed += CHUNK) {
      onProgress?.(passed);
      yield text.slice(passed, passed + CHUNK);
    }
  }
  const parser = Readable.from(chunks()).pipe(parse({ delimiter, bom: true, info: true, relax_column_count: true, relax_quotes: true, skip_empty_lines: true, skip_records_with_empty_values: true, max_record_size: 1_000_000 }));
  try {
    for await (const { record, info } of parser as AsyncIterable<{ record: string[]; info: { lines: number } }>) {
      const breaks = record.reduce((sum, cell) => sum + (cell.match(/\r\n|\r|\n/g)?.length ?? 0), 0);
      yield { row: Math.max(1, info.lines - breaks), cells: record };
    }
  } catch (error) {
    if (!(error instanceof CsvError)) throw error;
    const lines: unknown = error["lines"];
    const row = typeof lines === "number" ? Math.max(1, lines) : 1;
    const message = error.code === "CSV_QUOTE_NOT_CLOSED" ? "a quote is opened here and never closed" : `the row cannot be taken apart (${error.message})`;
    throw new HostFailure("import-refused", { rows: row, refused: 1, faults: [{ row, message }] });
  }
}

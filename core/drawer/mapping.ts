import type { StockKind } from "./stock.ts";

/** What a column of a table can stand for. `price` is one price break a column, `prices` all breaks in one cell. */
export const IMPORT_FIELDS = [
  "id", "kind", "value", "type", "tolerance", "rating", "technology", "temperatureCoefficient", "windingR", "package", "location",
  "quantity", "prices", "price", "currency", "supplier", "orderCode", "notes", "retired",
] as const;
export type ImportField = (typeof IMPORT_FIELDS)[number];

/** One column of the table put to use. */
export interface ColumnUse {
  /** Counted from 0. */
  readonly column: number;
  readonly field: ImportField;
  /** What a bare number in it means: `nF`, `k`, `%`, `ppm`, `mW`; empty for the SI unit (and for tolerances a fraction). */
  readonly unit: string;
  /** The number of pieces from which a `price` holds; 1 for every other field. */
  readonly from: number;
}

/** How a table is read into stock lines. */
export interface ImportMapping {
  readonly columns: readonly ColumnUse[];
  /** For rows that do not say it themselves. */
  readonly defaults: { readonly kind: StockKind | null; readonly currency: string };
}

export const DELIMITERS = [",", ";", "\t", "|"] as const;
export type Delimiter = (typeof DELIMITERS)[number];

export const ENCODINGS = ["utf-8", "windows-1252", "utf-16le"] as const;
export type Encoding = (typeof ENCODINGS)[number];

/** How a file's bytes become a table. */
export interface TableReading {
  readonly delimiter: Delimiter;
  readonly encoding: Encoding;
  /** Whether the first row names the columns. */
  readonly hasHeader: boolean;
}

import { emptyLine, type StockLine } from "../../core/drawer/stock.ts";
import type { Db } from "./db.ts";
import { findLine, insertLine, requireSoundLine, updateLine, type LineEdit } from "./lines.ts";
import { bookMove, requireCountable, requireKeepable } from "./ledger.ts";
import { beginStep } from "./steps.ts";
import { HostFailure } from "../../core/contract/failures.ts";

/** One row of a table as it is taken in. */
export interface ImportRow {
  /** Line of the file, counted from 1. */
  readonly row: number;
  readonly id: string;
  /** Fields that the table has; the rest of a known line stays, of a new line is empty. */
  readonly fields: LineEdit;
  /** Pieces that are there; null where the table does not say. */
  readonly quantity: number | null;
}

export interface ImportCounts {
  readonly step: number | null;
  readonly added: number;
  readonly updated: number;
  readonly unchanged: number;
  readonly counted: number;
  readonly faults: readonly { readonly row: number; readonly message: string }[];
  readonly refused: number;
}

const PAUSE_EVERY = 500;
const MOST_FAULTS = 1000;

/**
 * Takes rows in as one step: makes lines, updates known ones, books differences of quantity as counted. To be run inside a
 * transaction that is rolled back where rows were refused and that is not wanted; yields now and then with the rows done.
 */
export function* importRows(db: Db, now: Date, label: string, reference: string, rows: readonly ImportRow[]): Generator<number, ImportCounts> {
  const step = beginStep(db, now, label);
  const counts = { added: 0, updated: 0, unchanged: 0, counted: 0, refused: 0 };
  const faults: { row: number; message: string }[] = [];
  for (let index = 0; index < rows.length; index += 1) {
    const { row, id, fields, quantity } = rows[index];
    try {
      const old = findLine(db, id);
      // Before anything is written: a refused row leaves nothing behind.
      if (quantity !== null) requireKeepable(id, quantity);
      if (old !== null && quantity !== null) requireCountable(db, old, quantity);
      const isUpdated = old !== null && updateLine(db, step, old, { retired: false, ...fields });
      const made = old === null ? addNew(id, fields) : null;
      const isCounted = quantity !== null && quantity !== (old?.line.quantity ?? 0);
      // A new line has no pieces that anybody could hold.
      if (isCounted && made !== null) step.book(made, "counted", quantity, "", reference);
      else if (isCounted) bookMove(db, step, { line: id, kind: "counted", count: quantity, reference: "", note: reference });
      if (old === null) counts.added += 1;
      else if (isUpdated) counts.updated += 1;
      else if (!isCounted) counts.unchanged += 1;
      if (isCounted) counts.counted += 1;
    } catch (error) {
      if (!(error instanceof HostFailure) || error.code === "drawer-unusable") throw error;
      counts.refused += 1;
      if (faults.length < MOST_FAULTS) faults.push({ row, message: error.message });
    }
    if ((index + 1) % PAUSE_EVERY === 0) yield index + 1;
  }
  step.finish();
  return { step: step.isEmpty ? null : step.id, ...counts, faults };

  function addNew(id: string, { retired, ...fields }: LineEdit): number {
    const line: StockLine = { ...emptyLine(id), ...(fields as Partial<StockLine>) };
    requireSoundLine(line);
    return insertLine(db, step, line, retired === true);
  }
}

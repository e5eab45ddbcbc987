import { stringify } from "csv-stringify/sync";
import type { ImportReport, RowFault } from "../../core/contract/drawer-schemas.ts";
import { HostFailure } from "../../core/contract/failures.ts";
import { EXPORT_HEADERS, exportRow } from "../../core/drawer/export-rows.ts";
import { freeId } from "../../core/drawer/make-id.ts";
import { readRow } from "../../core/drawer/read-row.ts";
import type { DrawerStore } from "../store/drawer-store.ts";
import type { ImportRow } from "../store/import-lines.ts";
import { tableRows, type Table } from "./csv-table.ts";

/** How far an import is. */
export interface ImportProgress {
  readonly phase: "reading" | "writing";
  readonly done: number;
  readonly total: number;
}

export interface ImportOpts {
  readonly job: string;
  /** What the step is called. */
  readonly label: string;
  /** Written beside each booked quantity. */
  readonly note: string;
  readonly skipBadRows: boolean;
  /** Does everything but keep it. */
  readonly dryRun: boolean;
  readonly onProgress?: (progress: ImportProgress) => void;
  readonly isCancelled?: () => boolean;
}

const MOST_FAULTS = 1000;
const PAUSE_EVERY = 500;

/** Takes a table into the drawer, as one step. @throws HostFailure import-refused, import-cancelled */
export async function importTable(store: DrawerStore, table: Table, opts: ImportOpts): Promise<ImportReport> {
  const { rows, count, faults, refused } = await readRows(table, opts);
  const isStrict = !opts.skipBadRows && !opts.dryRun;
  if (isStrict && refused > 0) throw new HostFailure("import-refused", { rows: count, refused, faults: [...faults] });
  const counts = await store.importRows({
    job: opts.job, label: opts.label, note: opts.note, rows,
    keep: (done) => !opts.dryRun && (opts.skipBadRows || done.refused === 0),
    onProgress: (done) => opts.onProgress?.({ phase: "writing", done, total: rows.length }),
    isCancelled: () => opts.isCancelled?.() === true,
  });
  const all = { refused: refused + counts.refused, faults: [...faults, ...counts.faults].sort((a, b) => a.row - b.row).slice(0, MOST_FAULTS) };
  if (isStrict && all.refused > 0) throw new HostFailure("import-refused", { rows: count, ...all });
  const { added, updated, unchanged, counted } = counts;
  return { step: opts.dryRun ? null : counts.step, rows: count, added, updated, unchanged, counted, ...all };
}

async function readRows(table: Table, opts: ImportOpts): Promise<{ rows: readonly ImportRow[]; count: number; faults: readonly RowFault[]; refused: number }> {
  const rows: ImportRow[] = [];
  const faults: RowFault[] = [];
  /** Row by the id that it has. */
  const ids = new Map<string, number>();
  let count = 0;
  let refused = 0;
  let isHeader = table.reading.hasHeader;
  const progress = (done: number): void => opts.onProgress?.({ phase: "reading", done, total: table.text.length });
  for await (const { row, cells } of tableRows(table.text, table.reading.delimiter, progress)) {
    if (isHeader) {
      isHeader = false;
      continue;
    }
    count += 1;
    const read = readRow(cells, table.mapping);
    const id = read.id === "" && read.madeId !== "" ? freeId(read.madeId, (one) => ids.has(one)) : read.id;
    const twin = ids.get(id);
    const problems = twin === undefined || read.problems.length > 0 ? read.problems : [`${id} has been in row ${twin} already`];
    if (problems.length > 0) {
      refused += 1;
      if (faults.length < MOST_FAULTS) faults.push({ row, message: problems.join("; ") });
    } else {
      ids.set(id, row);
      rows.push({ row, id, fields: read.fields, quantity: read.quantity });
    }
    if (count % PAUSE_EVERY === 0) {
      await new Promise((resolve) => setImmediate(resolve));
      if (opts.isCancelled?.() === true) throw new HostFailure("import-cancelled", { job: opts.job });
    }
  }
  return { rows, count, faults, refused };
}

/** All lines as a table that an import takes back as it was. */
export function exportTable(store: DrawerStore): { readonly text: string; readonly lines: number } {
  const chunks = [stringify([[...EXPORT_HEADERS]])];
  let pending: (readonly string[])[] = [];
  let lines = 0;
  for (const line of store.eachLine()) {
    pending.push(exportRow(line));
    lines += 1;
    if (pending.length === 1000) {
      chunks.push(stringify(pending.map((row) => [...row])));
      pending = [];
    }
  }
  if (pending.length > 0) chunks.push(stringify(pending.map((row) => [...row])));
  return { text: chunks.join(""), lines };
}

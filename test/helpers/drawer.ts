import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import fc from "fast-check";
import { afterEach } from "vitest";
import { openDrawer, type DrawerStore } from "../../app/store/drawer-store.ts";
import { decodeTable, openTable } from "../../app/services/csv-table.ts";
import { importTable, type ImportOpts } from "../../app/services/drawer-tables.ts";
import type { ImportReport } from "../../core/contract/drawer-schemas.ts";
import { emptyLine, type StockKind, type StockLine } from "../../core/drawer/stock.ts";

const open: DrawerStore[] = [];
const folders: string[] = [];
afterEach(() => {
  for (const store of open.splice(0)) store.close();
  for (const folder of folders.splice(0)) rmSync(folder, { recursive: true, force: true });
});

/** A folder of the test's own. */
export function scratchFolder(): string {
  const folder = mkdtempSync(join(tmpdir(), "bandwright-drawer-"));
  folders.push(folder);
  return folder;
}

/** A drawer in a real file, empty unless it is there already; its clock goes on by a second a look. */
export async function openScratch(path = join(scratchFolder(), "drawer.sqlite")): Promise<DrawerStore> {
  let seconds = 0;
  const store = await openDrawer({ path, now: () => new Date(Date.UTC(2030, 0, 1) + 1000 * seconds++) });
  open.push(store);
  return store;
}

/** Shuts a drawer that a property has opened, so that hundreds of runs do not pile up. */
export async function withScratch<T>(work: (store: DrawerStore) => Promise<T> | T): Promise<T> {
  const store = await openScratch();
  try {
    return await work(store);
  } finally {
    store.close();
  }
}

export function resistor(id: string, own: Partial<StockLine> = {}): StockLine {
  return { ...emptyLine(id), kind: "resistor", value: 4700, tolerance: 0.01, rating: 0.25, technology: "metal film", ...own };
}

export function capacitor(id: string, own: Partial<StockLine> = {}): StockLine {
  return { ...emptyLine(id), kind: "capacitor", value: 1e-7, tolerance: 0.05, rating: 63, technology: "film", ...own };
}

/** Takes a text or bytes in as `stock import` does. */
export async function importText(store: DrawerStore, source: string | Uint8Array, opts: Partial<ImportOpts> = {}): Promise<ImportReport> {
  const { text, encoding } = decodeTable(typeof source === "string" ? new TextEncoder().encode(source) : source, null);
  return importTable(store, await openTable(text, encoding, null, null), { job: "test", label: "Import", note: "", skipBadRows: false, dryRun: false, ...opts });
}

/** Any text that a field may hold: no spaces around it, which an import would take off. */
const TEXT = fc.string({ unit: "grapheme", maxLength: 20 }).map((text) => text.normalize("NFC").replaceAll(/(?![\n\r\t])\p{Cc}/gu, "").trim());
const POSITIVE = fc.oneof(fc.double({ min: 1e-15, max: 1e12, noNaN: true }), fc.tuple(fc.integer({ min: 1, max: 999 }), fc.integer({ min: -12, max: 6 })).map(([digits, power]) => Number(`${digits}e${power}`)));
const FRACTION = fc.oneof(fc.double({ min: 0, max: 1, noNaN: true }).map((x) => x + 0), fc.constantFrom(0.001, 0.01, 0.025, 0.05, 0.1, 0.2));
const ID = fc.string({ unit: "grapheme", minLength: 1, maxLength: 30 }).map((text) => text.replaceAll(/\p{Cc}/gu, "").trim()).filter((text) => text.length > 0);

/** Any line that the drawer keeps. */
export function anyLine(): fc.Arbitrary<StockLine> {
  return fc
    .record({
      id: ID,
      kind: fc.constantFrom<StockKind>("resistor", "capacitor", "inductor", "potentiometer", "op-amp"),
      value: POSITIVE,
      type: TEXT.map((text) => text.replaceAll(/\p{Cc}/gu, "") || "X1"),
      tolerance: fc.option(FRACTION),
      rating: fc.option(POSITIVE),
      technology: TEXT,
      temperatureCoefficient: fc.option(fc.double({ min: -0.1, max: 0.1, noNaN: true }).map((x) => x + 0)),
      windingR: fc.option(POSITIVE),
      package: TEXT,
      location: TEXT,
      prices: fc.uniqueArray(fc.integer({ min: 2, max: 10_000 }), { maxLength: 3 }).chain((froms) =>
        fc.array(fc.double({ min: 0, max: 1e6, noNaN: true }).map((x) => x + 0), { minLength: froms.length + 1, maxLength: froms.length + 1 }).map((costs) => [1, ...froms.sort((a, b) => a - b)].map((from, index) => ({ from, unitCost: costs[index] }))),
      ),
      currency: fc.constantFrom("", "EUR", "USD"),
      supplier: TEXT,
      orderCode: TEXT,
      notes: fc.oneof(TEXT, fc.constantFrom('a "quoted" word', "two\nlines", "semi;colon, comma\ttab", "=1+1", "'=1+1")),
    })
    .map((line) => (line.kind === "inductor" ? line : { ...line, windingR: null }))
    .map((line) => (line.kind === "op-amp" ? { ...line, value: null, type: line.type.trim() || "X1" } : { ...line, type: null }));
}


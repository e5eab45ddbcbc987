import { readFileSync } from "node:fs";
import { join } from "node:path";
import Database from "better-sqlite3";
import { expect, test } from "vitest";
import { openDrawer } from "../../app/store/drawer-store.ts";
import { migrate, readMigrations } from "../../app/store/migrate.ts";
import { canLoadSqlite, loadSqlite } from "../../app/store/sqlite.ts";
import { emptyLine } from "../../core/drawer/stock.ts";
import { openScratch, scratchFolder } from "../helpers/drawer.ts";

const NEWEST = readMigrations().length;

function schemaOf(path: string): string {
  const db = new Database(path, { readonly: true });
  const rows = db.prepare<[], { sql: string }>("SELECT sql FROM sqlite_schema WHERE sql IS NOT NULL AND name NOT LIKE 'line_words_%' AND name NOT LIKE 'sqlite_%' ORDER BY type, name").all();
  db.close();
  return `${rows.map((row) => `${row.sql};`).join("\n\n")}\n`;
}

test("the schema is the one that was agreed on", async () => {
  const store = await openScratch();
  store.close();
  await expect(schemaOf(store.path)).toMatchFileSnapshot("schema.snap.sql");
});

test("a new drawer has the newest version, a write-ahead log and its own mark in the header", async () => {
  const store = await openScratch();
  expect(store.info()).toEqual({ path: store.path, lines: 0, retired: 0, pieces: 0, version: NEWEST });
  store.close();
  const header = readFileSync(store.path);
  expect(header.toString("latin1", 68, 72)).toBe("BwDr");
  // Bytes 18 and 19 of the format: 2 is the write-ahead log.
  expect([header[18], header[19]]).toEqual([2, 2]);
});

/** A drawer as an older version wrote it, with something in everything that the version knew. */
function olderDrawer(path: string, version: number): void {
  const db = new Database(path);
  db.pragma("journal_mode = WAL");
  migrate(db, readMigrations(), version);
  db.exec(`
    INSERT INTO steps (at, label) VALUES ('2029-05-01T10:00:00.000Z', 'Add R-1'), ('2029-05-02T10:00:00.000Z', 'Reserve');
    INSERT INTO lines (id, kind, value, technology, package, location, supplier, order_code, currency, prices, notes) VALUES
      ('R-1', 'resistor', 4700, 'metal film', '', 'box Ω', '', '', '', '[{"from":1,"unitCost":0.06}]', ''), ('R-2', 'resistor', 10, '', '', '', '', '', '', '[]', '');
  `);
  db.exec(`
    INSERT INTO line_words (rowid, id, kind, type, technology, package, location, supplier, order_code, notes) SELECT key, id, kind, type, technology, package, location, supplier, order_code, notes FROM lines;
    INSERT INTO ledger (step, line, kind, change, reference, note) VALUES
      (1, 1, 'counted', 20, '', ''), (2, 1, 'reserved', 6, 'Channel', ''), (2, 1, 'reserved', 3, 'Repair', ''), (2, 1, 'released', -3, 'Repair', ''), (2, 1, 'released', -2, 'Channel', '');
  `);
  if (version >= 2) {
    db.exec(`
      INSERT INTO pieces (line, mark, value, frequency) VALUES (1, '7', 4712, 1000);
      INSERT INTO builds (key, reference, units, units_used, state, at, bill) VALUES (1, 'Channel', 2, 1, 'reserved', '2029-05-02T10:00:00.000Z', '[{"line":1,"count":2}]');
    `);
  }
  db.close();
}

test.each(readMigrations().slice(0, -1).map(({ version }) => version))("a drawer of version %i opens with everything in it, and takes what is new", async (version) => {
  const path = join(scratchFolder(), "old.sqlite");
  olderDrawer(path, version);
  const store = await openScratch(path);
  expect(store.info()).toMatchObject({ lines: 2, version: NEWEST, pieces: version >= 2 ? 1 : 0 });
  expect(store.line("R-1")).toMatchObject({ line: { value: 4700, quantity: 20, reserved: 4, windingR: null, prices: [{ from: 1, unitCost: 0.06 }] }, holders: [{ reference: "Channel", count: 4 }] });
  if (version >= 2) expect(store.builds()).toMatchObject([{ reference: "Channel", units: 2, unitsUsed: 1, bill: [{ line: "R-1", count: 2, held: 4 }] }]);
  store.addLine({ ...emptyLine("L-1", "inductor"), value: 0.1, windingR: 38 }, 2);
  expect(store.find("L-1")).toMatchObject({ windingR: 38, quantity: 2 });
  expect(store.integrityProblems()).toEqual([]);
  store.close();
  expect(schemaOf(path)).toBe(readFileSync(join(import.meta.dirname, "schema.snap.sql"), "utf8"));
});

test("a drawer of the first version works out from its ledger who holds what", async () => {
  const path = join(scratchFolder(), "old.sqlite");
  olderDrawer(path, 1);
  const store = await openScratch(path);
  expect(store.line("R-1")).toMatchObject({ line: { quantity: 20, reserved: 4, location: "box Ω" }, holders: [{ reference: "Channel", count: 4 }] });
  // What it holds counts: all of it can be released, and no more.
  expect(() => store.move([{ line: "R-1", kind: "released", count: 5, reference: "Channel", note: "" }])).toThrow("holds 4 pieces");
  store.move([{ line: "R-1", kind: "released", count: 4, reference: "Channel", note: "" }]);
  expect(store.ledger({ line: "R-1", reference: null, before: null, limit: 10 }).movements).toHaveLength(6);
  expect(store.integrityProblems()).toEqual([]);
});

test("a migration that fails leaves the drawer at the version before", () => {
  const path = join(scratchFolder(), "drawer.sqlite");
  olderDrawer(path, 1);
  const db = new Database(path);
  const broken = [readMigrations()[0], { version: 2, sql: "CREATE TABLE pieces (id INTEGER) STRICT; CREATE TABLE nonsense (" }];
  expect(() => migrate(db, broken)).toThrow("incomplete input");
  expect(db.pragma("user_version", { simple: true })).toBe(1);
  expect(db.prepare("SELECT count(*) FROM sqlite_schema WHERE name = 'pieces'").pluck().get()).toBe(0);
  db.close();
});

test("a drawer of a newer version is refused, both versions named, and not touched", async () => {
  const path = join(scratchFolder(), "drawer.sqlite");
  const store = await openScratch(path);
  store.close();
  const db = new Database(path);
  db.pragma(`user_version = ${NEWEST + 3}`);
  db.close();
  const before = readFileSync(path);
  await expect(openDrawer({ path, now: () => new Date() })).rejects.toMatchObject({ code: "drawer-unusable", data: { reason: "newer", fileVersion: NEWEST + 3, programVersion: NEWEST, backup: null } });
  await expect(openDrawer({ path, now: () => new Date() })).rejects.toThrow(`has version ${NEWEST + 3}, this program knows versions up to ${NEWEST}`);
  expect(readFileSync(path).equals(before)).toBe(true);
});

test("a Node that would end without a word is told apart beforehand", async () => {
  expect(["20.20.2", "22.12.0", "22.13.1", "23.5.0"].map(canLoadSqlite)).toEqual([false, false, false, false]);
  expect(["22.14.0", "22.18.0", "23.6.0", "24.0.0", "26.12.1"].map(canLoadSqlite)).toEqual([true, true, true, true, true]);
  await expect(loadSqlite("/d.sqlite", "20.20.2")).rejects.toThrow("The drawer needs Node 22.14 or newer; this is 20.20.2.");
});

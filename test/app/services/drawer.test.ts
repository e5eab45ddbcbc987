import { mkdir, mkdtemp, readFile, rm, stat, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterEach, beforeEach, describe, expect, test, vi } from "vitest";
import { createHost, type Host } from "../../../app/host.ts";
import { createDrawer, type Drawer } from "../../../app/services/drawer.ts";
import { createPathGuard } from "../../../app/services/path-guard.ts";
import { openDrawer } from "../../../app/store/drawer-store.ts";
import { readMigrations } from "../../../app/store/migrate.ts";
import { isHostFailure } from "../../../core/contract/failures.ts";
import { EVERY_LINE } from "../../../core/contract/drawer-schemas.ts";
import { createHostClient, type HostClient } from "../../../renderer/host/client.ts";
import { createFakeChannel } from "../../helpers/fake-channel.ts";
import { fakeHandlers } from "../../helpers/fake-handlers.ts";
import { capacitor, resistor } from "../../helpers/drawer.ts";

// Real files, flushed: a busy disk takes its time.
vi.setConfig({ testTimeout: 30_000 });

const STARTER = fileURLToPath(new URL("../../../assets/drawer/starter.csv", import.meta.url));
const BY_ID = { by: "id", descending: false } as const;

let base = "";
let drawer: Drawer;
let host: Host;
let client: HostClient;
const events: { readonly name: string; readonly data: unknown }[] = [];

beforeEach(async () => {
  base = await mkdtemp(join(tmpdir(), "bandwright-drawer-service-"));
  await mkdir(join(base, "mine"));
  const guard = createPathGuard([{ name: "Mine", path: join(base, "mine") }]);
  drawer = createDrawer({ guard, drawerPath: join(base, "data", "bandwright", "drawer.sqlite"), starterPath: STARTER, now: () => new Date(Date.UTC(2030, 0, 1)), emit: (name, data) => host.emit(name, data) });
  host = createHost(fakeHandlers(drawer.handlers), (error) => {
    throw error;
  });
  client = createHostClient(createFakeChannel(host));
  events.length = 0;
  host.onEvent(({ name, data }) => events.push({ name, data }));
});
afterEach(async () => {
  await host.close();
  await drawer.close();
  await rm(base, { recursive: true, force: true });
});

test("the first call makes the drawer in the user's data folder; an empty one can be begun with the starter, and that undone", async () => {
  const info = await client.call("drawer.info");
  expect(info).toEqual({ path: join(base, "data", "bandwright", "drawer.sqlite"), lines: 0, retired: 0, pieces: 0, version: readMigrations().length });
  const report = await client.call("drawer.starter", { job: "first" });
  expect(report).toMatchObject({ refused: 0, faults: [] });
  expect(report.added).toBeGreaterThanOrEqual(400);
  const { total, lines } = await client.call("drawer.lines", { filter: { ...EVERY_LINE, text: "100n film" }, sort: BY_ID, offset: 0, limit: 10 });
  expect([total, lines.map((line) => line.id)]).toEqual([2, ["C-100N-PET", "C-100N-PP"]]);
  expect((await client.call("drawer.facets", { filter: EVERY_LINE })).kind[0]).toMatchObject({ value: "resistor" });
  expect(events.map((event) => event.name)).toContain("drawer.importProgress");
  expect(events.at(-1)).toEqual({ name: "drawer.changed", data: { step: report.step } });
  await client.call("drawer.undo", { step: report.step ?? 0 });
  expect(await client.call("drawer.info")).toMatchObject({ lines: 0, retired: report.added });
});

test("every change tells the screens, and gives the step that undoes it", async () => {
  await client.call("drawer.addLine", { line: resistor("R-1"), quantity: 10 });
  const { step } = await client.call("drawer.move", { moves: [{ line: "R-1", kind: "used", count: 3, reference: "Channel", note: "" }] });
  expect(events.map((event) => event.data)).toEqual([{ step: 1 }, { step: 2 }]);
  expect(await client.call("drawer.undo", { step })).toEqual({ step: 3, label: "Undo: Used: R-1" });
  expect(await client.call("drawer.steps", { limit: 2 })).toMatchObject({ steps: [{ id: 3, undoes: 2 }, { id: 2, undoneBy: 3 }] });
  expect(await client.call("drawer.editLines", { ids: ["R-1"], fields: { location: "" } })).toEqual({ step: null, changed: 0 });
  expect(events).toHaveLength(3);
  await expect(client.call("drawer.editLines", { ids: ["R-1"], fields: { colour: "red" } as object })).rejects.toMatchObject({ code: "bad-call" });
  await expect(client.call("drawer.move", { moves: [{ line: "R-1", kind: "used", count: -1, reference: "", note: "" }] })).rejects.toMatchObject({ code: "bad-call" });
});

test("calls that change something do so one after the other, however they come", async () => {
  await client.call("drawer.addLine", { line: resistor("R-1"), quantity: 5 });
  const results = await Promise.all(Array.from({ length: 8 }, (_, n) => client.call("drawer.reserve", { reference: `Build ${n}`, units: 1, bill: [{ line: "R-1", count: 1 }] }).catch((error: unknown) => error)));
  const refused = results.filter((result) => isHostFailure(result, "drawer-short"));
  expect(refused).toHaveLength(3);
  expect((await client.call("drawer.line", { id: "R-1" })).holders).toHaveLength(5);
});

describe("tables", () => {
  const table = "Part,Nennwert,Bestand\nR-1,4k7,10\nR-2,10k,x\n";

  test("are shown as they would be taken, and read as the user says instead", async () => {
    const path = join(base, "mine", "shelf.csv");
    await writeFile(path, table);
    const first = await client.call("drawer.importPreview", { source: { path }, reading: null, mapping: null });
    expect(first).toMatchObject({ headers: ["Part", "Nennwert", "Bestand"], reading: { delimiter: ",", encoding: "utf-8", hasHeader: true } });
    expect(first.mapping.columns).toEqual([{ column: 0, field: "id", unit: "", from: 1 }]);
    const mapping = { ...first.mapping, columns: [...first.mapping.columns, { column: 1, field: "value" as const, unit: "", from: 1 }, { column: 2, field: "quantity" as const, unit: "", from: 1 }] };
    const second = await client.call("drawer.importPreview", { source: { path }, reading: first.reading, mapping });
    expect(second.rows).toMatchObject([
      { row: 2, line: { id: "R-1", kind: "resistor", value: 4700 }, quantity: 10, problems: [] },
      { row: 3, cells: ["R-2", "10k", "x"], line: null, problems: ["“x” is no number of pieces"] },
    ]);
    const ask = { job: "shelf", source: { path }, reading: first.reading, mapping, dryRun: false };
    const error: unknown = await client.call("drawer.import", { ...ask, skipBadRows: false }).catch((caught: unknown) => caught);
    if (!isHostFailure(error, "import-refused")) throw new Error(`not refused: ${String(error)}`);
    expect(error.data).toEqual({ rows: 2, refused: 1, faults: [{ row: 3, message: "“x” is no number of pieces" }] });
    expect(await client.call("drawer.import", { ...ask, skipBadRows: true })).toMatchObject({ added: 1, refused: 1 });
    expect((await client.call("drawer.line", { id: "R-1" })).history[0].label).toBe("Import shelf.csv");
  });

  test("come from the page too, as text", async () => {
    expect(await client.call("drawer.import", { job: "a", source: { text: "id,value\nR-1,4k7\n" }, reading: null, mapping: null, skipBadRows: false, dryRun: false })).toMatchObject({ added: 1 });
  });

  test("outside the session's folders are neither read nor written", async () => {
    const path = join(base, "elsewhere.csv");
    await writeFile(path, table);
    await expect(client.call("drawer.importPreview", { source: { path }, reading: null, mapping: null })).rejects.toMatchObject({ code: "not-allowed" });
    await expect(client.call("drawer.export", { path, replace: true })).rejects.toMatchObject({ code: "not-allowed" });
    await expect(client.call("drawer.open", { path })).rejects.toMatchObject({ code: "not-allowed" });
    expect(await readFile(path, "utf8")).toBe(table);
  });

  test("are written where the user says, and over nothing that he did not mean", async () => {
    await client.call("drawer.addLine", { line: capacitor("C-1", { notes: "größe, Ω" }), quantity: 2 });
    const saved = await client.call("drawer.export", { path: join(base, "mine", "parts"), replace: false });
    expect(saved).toEqual({ path: join(base, "mine", "parts.csv"), text: null, lines: 1 });
    const { text } = await client.call("drawer.export", { path: null, replace: false });
    expect(await readFile(join(base, "mine", "parts.csv"), "utf8")).toBe(text);
    await expect(client.call("drawer.export", { path: join(base, "mine", "parts.csv"), replace: false })).rejects.toMatchObject({ code: "file-exists" });
    await client.call("drawer.export", { path: join(base, "mine", "parts.csv"), replace: true });
  });

  test("in the taking can be stopped; nothing of them stays", async () => {
    const text = `id,value,qty\n${Array.from({ length: 5000 }, (_, n) => `R-${n},${n + 1}R,5`).join("\n")}\n`;
    const taken = client.call("drawer.import", { job: "long", source: { text }, reading: null, mapping: null, skipBadRows: false, dryRun: false }).catch((error: unknown) => error);
    await expect.poll(() => events.some(({ name, data }) => name === "drawer.importProgress" && JSON.stringify(data).includes("writing")), { interval: 1 }).toBe(true);
    expect(await client.call("drawer.cancelImport", { job: "long" })).toEqual({ cancelled: true });
    expect(await taken).toMatchObject({ code: "import-cancelled", data: { job: "long" } });
    expect(await client.call("drawer.info")).toMatchObject({ lines: 0, retired: 0 });
    expect(await client.call("drawer.cancelImport", { job: "long" })).toEqual({ cancelled: false });
  });
});

test("another drawer can be opened, and one that cannot leaves the old one in use", async () => {
  await client.call("drawer.addLine", { line: resistor("R-1"), quantity: 1 });
  const other = await client.call("drawer.open", { path: join(base, "mine", "club.sqlite") });
  expect(other).toMatchObject({ path: join(base, "mine", "club.sqlite"), lines: 0 });
  const damaged = join(base, "mine", "damaged.sqlite");
  await writeFile(damaged, "no database at all".repeat(50));
  await expect(client.call("drawer.open", { path: damaged })).rejects.toMatchObject({ code: "drawer-unusable", data: { reason: "not-a-drawer" } });
  expect((await client.call("drawer.info")).path).toBe(join(base, "mine", "club.sqlite"));
  expect((await client.call("drawer.open", { path: null })).lines).toBe(1);
});

test("a drawer that is damaged says so, and is tried again once it has been mended", async () => {
  const path = join(base, "data", "bandwright", "drawer.sqlite");
  await mkdir(join(base, "data", "bandwright"), { recursive: true });
  await writeFile(path, "no database at all".repeat(50));
  await expect(client.call("drawer.info")).rejects.toMatchObject({ code: "drawer-unusable" });
  await rm(path);
  expect((await client.call("drawer.info")).lines).toBe(0);
});

test("closing puts everything into the one file", async () => {
  await client.call("drawer.addLine", { line: resistor("R-1"), quantity: 1 });
  await drawer.close();
  await expect(stat(join(base, "data", "bandwright", "drawer.sqlite-wal"))).rejects.toMatchObject({ code: "ENOENT" });
});

test("what another program books is told of as well, once; one's own work is not told of twice", async () => {
  const { path } = await client.call("drawer.info");
  await client.call("drawer.addLine", { line: resistor("R-4K7"), quantity: 10 });
  const own = events.length;
  const other = await openDrawer({ path, now: () => new Date(Date.UTC(2030, 0, 2)) });
  try {
    other.move([{ line: "R-4K7", kind: "used", count: 3, reference: "", note: "" }]);
    await vi.waitFor(() => expect(events.length).toBeGreaterThan(own), 10_000);
    expect((await client.call("drawer.line", { id: "R-4K7" })).line.quantity).toBe(7);
    // Two more looks find nothing new.
    await new Promise((resolve) => setTimeout(resolve, 2500));
    expect(events.slice(own)).toEqual([{ name: "drawer.changed", data: { step: null } }]);
  } finally {
    other.close();
  }
});

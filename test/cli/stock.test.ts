/** `stock …` as a program of its own, on drawers in real files. */
import { mkdtempSync, readdirSync, readFileSync, rmSync, symlinkSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, test, vi } from "vitest";
import { bandwright, type Ended } from "../fixtures/command-line.ts";

vi.setConfig({ testTimeout: 30_000 });

let folder = "";
let drawer = "";
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), "bandwright-stock-"));
  drawer = join(folder, "drawer.sqlite");
});
afterEach(() => rmSync(folder, { recursive: true, force: true }));

function stock(command: string, ...args: readonly string[]): Promise<Ended> {
  return bandwright("stock", command, ...args, "--drawer", drawer);
}

function write(name: string, text: string): string {
  const path = join(folder, name);
  writeFileSync(path, text);
  return path;
}

test("from an empty drawer to the starter, a movement, a count, and back", async () => {
  const empty = await stock("list");
  expect(empty).toMatchObject({ code: 0, stdout: "" });
  expect(empty.stderr).toContain("`stock import --starter`");

  expect(await stock("import", "--starter")).toEqual({ code: 0, stdout: "429 rows: 429 lines added, 0 updated, 0 unchanged, 429 counted, 0 refused\n", stderr: "" });
  const listed = await stock("list", "4k7", "metal", "film");
  expect(listed.stdout.split("\n").map((row) => row.split(/\s{2,}/)[0])).toEqual(["line", "R-4K7-MF25", "R-4K7-MF60", ""]);
  const { total, lines } = JSON.parse((await stock("list", "--kind", "op-amp", "--sort", "unitCost", "--descending", "--limit", "2", "--json")).stdout) as { total: number; lines: { id: string; type: string }[] };
  expect([total, ...lines.map((line) => line.type)]).toEqual([12, "LME49720", "OPA2134"]);

  const moved = await stock("move", "R-4K7-MF25", "reserved", "30", "--for", "Voice channel", "--json");
  const { step, lines: [line] } = JSON.parse(moved.stdout) as { step: number; lines: { quantity: number; reserved: number }[] };
  expect(line.reserved).toBe(30);
  const refused = await stock("move", "R-4K7-MF25", "used", String(line.quantity));
  expect(refused).toMatchObject({ code: 2, stdout: "" });
  expect(refused.stderr).toBe(`R-4K7-MF25: ${line.quantity} wanted, but only ${line.quantity - 30} of ${line.quantity} are free; held by Voice channel (30).\n`);
  expect((await stock("count", "R-4K7-MF25", "90", "--note", "two were bent")).stdout).toMatch(/R-4K7-MF25\s.*\s90\s+30\s/);
  expect(await stock("undo")).toMatchObject({ code: 0, stdout: "Undo: Counted: R-4K7-MF25\n" });
  expect(await stock("undo", String(step))).toMatchObject({ code: 0, stdout: "Undo: Reserved: R-4K7-MF25\n" });
  expect(readdirSync(folder)).toEqual(["drawer.sqlite"]);
});

test("a line is added in trade notation", async () => {
  const added = await stock("add", "C-100N", "--kind", "capacitor", "--value", "100n", "--tolerance", "5", "--rating", "63", "--technology", "film", "--quantity", "40", "--prices", "1:0,10;100:€0,06", "--json");
  expect(JSON.parse(added.stdout)).toMatchObject({
    step: 1,
    line: { id: "C-100N", kind: "capacitor", value: 1e-7, tolerance: 0.05, rating: 63, technology: "film", quantity: 40, prices: [{ from: 1, unitCost: 0.1 }, { from: 100, unitCost: 0.06 }], currency: "EUR" },
  });
  expect(JSON.parse((await stock("add", "L-100M", "--kind", "inductor", "--value", "100m", "--winding", "38", "--json")).stdout)).toMatchObject({ line: { value: 0.1, windingR: 38 } });
  expect(await stock("add", "C-1", "--kind", "capacitor", "--value", "1u", "--winding", "38")).toMatchObject({ code: 2, stderr: "C-1: only inductors have a winding resistance, a capacitor has none\n" });
  expect(await stock("add", "L-2", "--kind", "inductor", "--value", "1", "--winding", "0")).toMatchObject({ code: 2, stderr: expect.stringContaining("--winding: winding resistance: the value must be above 0") });
  expect((await stock("add", "C-100N", "--kind", "capacitor", "--value", "100n")).stderr).toBe("C-100N: there is a line of that name already.\n");
  expect(await stock("add", "X", "--kind", "capacitor", "--value", "many")).toMatchObject({ code: 2, stderr: expect.stringContaining("--value: “many” is not understood") });
  expect(await stock("add", "U", "--kind", "op-amp", "--value", "4k7")).toMatchObject({ code: 2, stderr: "--value: an op amp has a --type, and no value\n" });
});

test("a table is taken in by its headers and by what one says of them, and given back", async () => {
  const table = write("shelf.csv", "Bauteil;Wert (nF);Fach;Bestand;Preis\nC-1;100;A 3;12;0,14\nC-2;4,7;A 4;zwei;0,10\n");
  const map = ["--map", "Bauteil=id", "Wert (nF)=value:nF", "Fach=location", "Bestand=quantity", "Preis=price"];
  const refused = await stock("import", table, ...map);
  expect(refused).toMatchObject({ code: 2, stdout: "" });
  expect(refused.stderr).toContain("1 of 2 rows cannot be taken, so nothing was imported:\nrow 3: “zwei” is no number of pieces");
  const told = await stock("import", table, "--json", ...map);
  expect(told.code).toBe(2);
  expect(JSON.parse(told.stdout)).toMatchObject({ rows: 2, refused: 1, faults: [{ row: 3 }] });
  expect(JSON.parse((await stock("import", table, "--dry-run", "--json", ...map)).stdout)).toMatchObject({ step: null, added: 1, refused: 1 });
  const taken = await stock("import", table, "--skip-bad-rows", ...map);
  expect(taken).toEqual({ code: 0, stdout: "2 rows: 1 lines added, 0 updated, 0 unchanged, 1 counted, 1 refused\n", stderr: "row 3: “zwei” is no number of pieces\n" });

  const { stdout: text } = await stock("export");
  expect(text.split("\n")[1]).toBe("C-1,capacitor,100n,,,,,,,,A 3,12,1:0.14,,,,,");
  const file = join(folder, "out.csv");
  expect(await stock("export", file)).toMatchObject({ code: 0, stdout: "" });
  expect(readFileSync(file, "utf8")).toBe(text);
  expect(await stock("export", file)).toMatchObject({ code: 2, stderr: `There is already a file ${file}.\n` });
  expect((await stock("export", file, "--replace")).code).toBe(0);
  // Never over the drawer itself, under whatever name.
  symlinkSync(drawer, join(folder, "link.csv"));
  for (const own of [drawer, join(folder, "link.csv")]) expect(await stock("export", own, "--replace")).toMatchObject({ code: 2, stderr: `${own} is the drawer itself: give the table another name.\n` });
  expect((await stock("list", "C-1")).stdout).toContain("C-1");
  expect(JSON.parse((await stock("export", "--json")).stdout)).toMatchObject({ lines: [{ id: "C-1", value: 1e-7 }] });
});

test("single pieces are measured, shown, measured again and forgotten", async () => {
  await stock("add", "C-1", "--kind", "capacitor", "--value", "100n", "--quantity", "4");
  expect(await stock("measure", "C-1")).toMatchObject({ code: 0, stdout: "", stderr: "C-1: no piece has been measured\n" });
  const { stdout } = await stock("measure", "C-1", "99.1n", "0,1017u", "--json");
  expect(JSON.parse(stdout)).toMatchObject({ step: 2, pieces: [{ mark: "1", value: 9.91e-8, frequency: 1000 }, { mark: "2", value: 1.017e-7, frequency: 1000 }] });
  expect((await stock("measure", "C-1", "98n", "--mark", "red", "--at", "10k")).stdout).toMatch(/^piece +measured +off +at\n1 +99\.1 nF +−0\.90 % +1 kHz\n2 +101\.7 nF +\+1\.70 % +1 kHz\nred +98 nF +−2\.00 % +10 kHz\n$/);
  expect((await stock("measure", "C-1", "97n", "--mark", "2", "--at", "DC")).stdout).toMatch(/^2 +97 nF +−3\.00 % +dc$/m);
  expect((await stock("measure", "C-1", "--remove", "1", "red", "--json")).stdout).toContain('"mark": "2"');
  expect((await stock("undo")).stdout).toBe("Undo: Remove 2 measured pieces\n");
  for (const [args, complaint] of [
    [["C-9", "1n"], "There is no line “C-9”"],
    [["C-1", "much"], "VALUES: “much” is not understood"],
    [["C-1", "1n", "2n", "--mark", "x"], "--mark: goes with one value"],
    [["C-1", "1n", "--at", "0"], "--at: must be a frequency above 0"],
    [["C-1", "--remove", "7"], "--remove: C-1 has no piece marked 7: it has 1, 2, red"],
    [["C-1", "1n", "--remove", "7"], "--remove: goes without values"],
  ] as const) expect(await stock("measure", ...args)).toMatchObject({ code: 2, stdout: "", stderr: expect.stringContaining(complaint) });
});

describe("what cannot be done", () => {
  test.each([
    [["import"], 2, "give a FILE or --starter"],
    [["import", "/no/such/file.csv"], 2, "There is no file /no/such/file.csv."],
    [["move", "R-1", "burnt", "1"], 2, "there is no movement “burnt”"],
    [["move", "R-1", "counted", "1"], 2, "or stock count"],
    [["count", "R-1", "few"], 2, "COUNT: “few” is no number of pieces"],
    [["count", "R-1", "3"], 2, "There is no line “R-1” in the drawer."],
    [["undo"], 2, "there is nothing to undo"],
    [["undo", "last"], 2, "STEP: “last” is no number of a step"],
    [["add", "", "--kind", "resistor", "--value", "1k"], 2, "it needs an id"],
    [["add", "R-1", "--kind", "resistor", "--value", "1k", "--location", "x".repeat(201)], 2, "R-1: its location has more than 200 characters"],
    [["import", "assets/icons"], 2, "it is a folder"],
    [["import", "assets/screenshots/board.png"], 2, "this is no text, so it is no table"],
    [["list", "--sort", "colour"], 2, "Allowed choices are"],
    [["list", "--limit", "0"], 2, "whole number above 0"],
    [["add", "R-1"], 2, "required option '--kind <KIND>'"],
  ] as const)("%j", async ([command, ...args], code, complaint) => {
    const ended = await stock(command, ...args);
    expect(ended.code).toBe(code);
    expect(ended.stderr).toContain(complaint);
    expect(ended.stdout).toBe("");
  });

  test("with a file that is no drawer: a sentence, and the file stays alone and as it was", async () => {
    drawer = write("letter.txt", "Dear all, ".repeat(50));
    for (const command of ["list", "export"]) expect(await stock(command)).toEqual({ code: 2, stdout: "", stderr: `${drawer} is not a drawer (its first bytes are not those of a database). It was left as it is.\n` });
    expect(readFileSync(drawer, "utf8")).toBe("Dear all, ".repeat(50));
    expect(readdirSync(folder)).toEqual(["letter.txt"]);
  });

  test("with a damaged drawer: exit 1, and the copy is named", async () => {
    drawer = write("drawer.sqlite", "SQLite format 3\0 cut short");
    const ended = await stock("list");
    expect(ended.code).toBe(1);
    expect(ended.stderr).toMatch(/drawer\.sqlite is damaged \(it is cut short\)\. It was left as it is, and a copy was made at .*drawer\.damaged-[0-9a-f]{8}\.sqlite\.\n$/);
  });
});

test.concurrent.each(["import", "export", "list", "add", "move", "count", "measure", "undo"])("%s --help shows an example", async (command) => {
  const { code, stdout } = await bandwright("stock", command, "--help");
  expect(code).toBe(0);
  expect(stdout).toContain(`Example:\n  bandwright stock ${command}`);
});

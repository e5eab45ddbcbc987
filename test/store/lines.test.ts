import Database from "better-sqlite3";
import * as v from "valibot";
import { beforeEach, describe, expect, test, vi } from "vitest";
import type { DrawerStore } from "../../app/store/drawer-store.ts";
import { DRAWER_LINE_SCHEMA, EVERY_LINE } from "../../core/contract/drawer-schemas.ts";
import { capacitor, openScratch, resistor } from "../helpers/drawer.ts";

// Real files, flushed: a busy disk takes its time.
vi.setConfig({ testTimeout: 30_000 });

let drawer: DrawerStore;
beforeEach(async () => {
  drawer = await openScratch();
});

function ids(text: string, withRetired = false): readonly string[] {
  return drawer.lines({ ...EVERY_LINE, text, withRetired }, { by: "id", descending: false }, 0, 100).lines.map((line) => line.id);
}

describe("lines", () => {
  test("a line comes back as it was put", () => {
    const line = resistor("Größe Ω-4k7 “µ” 電阻", { location: "Kästchen 3", notes: "two\nlines", prices: [{ from: 1, unitCost: 0.1 }, { from: 100, unitCost: 0.06 }], currency: "EUR", temperatureCoefficient: -50e-6 });
    const added = drawer.addLine(line, 7);
    expect(added.line).toEqual({ ...line, quantity: 7, reserved: 0, retired: false });
    expect(drawer.find(line.id)).toEqual(added.line);
    expect(ids("größe")).toEqual([line.id]);
    expect(ids("kastchen 電阻")).toEqual([line.id]);
  });

  test.each([
    [{ value: null }, "R-1: a resistor needs a value"],
    [{ value: -1 }, "R-1: its value must be a number above 0, got -1"],
    [{ type: "TL072" }, "R-1: only op amps have a type"],
    [{ kind: "op-amp" as const }, "R-1: an op amp has a type, and no value"],
    [{ tolerance: 1.5 }, "R-1: its tolerance must be from 0 to 100 %, got 150 %"],
    [{ rating: 0 }, "R-1: its rating must be a number above 0"],
    [{ currency: "euro" }, "R-1: its currency must be a code of three letters"],
    [{ prices: [{ from: 10, unitCost: 1 }] }, "R-1: its first price must hold from 1 piece"],
    [{ prices: [{ from: 1, unitCost: 1 }, { from: 1, unitCost: 2 }] }, "R-1: its prices must go up"],
    [{ id: "a\nb" }, "must not begin or end with a space, and be on one line"],
    [{ id: "  " }, "it needs an id"],
  ])("%j is refused, with the line's name", (own, complaint) => {
    expect(() => drawer.addLine(resistor("R-1", own), 0)).toThrow(complaint);
    expect(drawer.info().lines).toBe(0);
    expect(drawer.steps(5)).toEqual([]);
  });

  test("a line of an older drawer, with texts beyond the limits of now, can be worked on, and only what changes is held to them", async () => {
    const { path } = drawer;
    // More than 100 in UTF-16, fewer to the file.
    const id = "🎛".repeat(60);
    const [location, notes] = ["shelf ".repeat(50).trim(), "n".repeat(10_001)];
    const prices = Array.from({ length: 51 }, (_, i) => ({ from: i + 1, unitCost: 0.1 }));
    drawer.close();
    const db = new Database(path);
    db.prepare("INSERT INTO lines (id, kind, value, technology, package, location, supplier, order_code, currency, prices, notes) VALUES (?, 'resistor', 4700, '', '', ?, '', '', '', ?, ?)").run(id, location, JSON.stringify(prices), notes);
    db.exec("INSERT INTO line_words (rowid, id, kind, type, technology, package, location, supplier, order_code, notes) SELECT key, id, kind, type, technology, package, location, supplier, order_code, notes FROM lines");
    db.close();
    const older = await openScratch(path);
    expect(older.editLines([id], { tolerance: 0.05, location, prices })).toMatchObject({ changed: 1 });
    expect(older.find(id)).toMatchObject({ tolerance: 0.05, location, notes, prices });
    // It passes to the screens, too.
    const [shown] = older.lines(EVERY_LINE, { by: "id", descending: false }, 0, 10).lines;
    expect(v.safeParse(DRAWER_LINE_SCHEMA, shown)).toMatchObject({ success: true });
    expect(() => older.editLines([id], { location: `${location}!` })).toThrow("its location has more than 200 characters");
    expect(() => older.editLines([id], { notes: `${notes}n` })).toThrow("its notes have more than 10000 characters");
    expect(() => older.editLines([id], { value: null })).toThrow("a resistor needs a value");
    expect(older.retireLines([id], true)).toMatchObject({ changed: 1 });
    expect(older.editLines([id], { location: "box 4" })).toMatchObject({ changed: 1 });
  });

  test("a second line of the same name is refused", () => {
    drawer.addLine(resistor("R-1"), 1);
    expect(() => drawer.addLine(capacitor("R-1"), 1)).toThrow("R-1: there is a line of that name already.");
  });

  test("an edit of many lines is one step with a trace in each, all or none", () => {
    for (const id of ["R-1", "R-2", "R-3"]) drawer.addLine(resistor(id, { location: "old" }), 1);
    expect(drawer.editLines(["R-1", "R-2"], { location: "box 4", tolerance: 0.01 })).toMatchObject({ changed: 2 });
    expect(drawer.line("R-2").history).toMatchObject([
      { label: "Edit 2 lines", before: { location: "old" }, after: { location: "box 4" } },
      { label: "Add R-2", before: null },
    ]);
    expect(drawer.editLines(["R-1"], { location: "box 4" })).toEqual({ step: null, changed: 0 });
    expect(() => drawer.editLines(["R-1", "R-9"], { location: "nowhere" })).toThrow("There is no line “R-9”");
    expect(() => drawer.editLines(["R-3", "R-1"], { value: null })).toThrow("R-3: a resistor needs a value");
    expect(drawer.find("R-1")?.location).toBe("box 4");
    expect(ids("box")).toEqual(["R-1", "R-2"]);
    expect(ids("old")).toEqual(["R-3"]);
  });

  test("a retired line is not offered, and comes back", () => {
    drawer.addLine(resistor("R-1"), 4);
    drawer.retireLines(["R-1"], true);
    expect(ids("")).toEqual([]);
    expect(ids("", true)).toEqual(["R-1"]);
    expect(drawer.info()).toMatchObject({ lines: 0, retired: 1 });
    expect(drawer.candidates({ kind: "resistor", value: 4700, within: 0.1, type: null, technology: [], ratingFrom: null, toleranceTo: null, availableFrom: 0, limit: 10 })).toEqual([]);
    drawer.retireLines(["R-1"], false);
    expect(drawer.find("R-1")).toMatchObject({ quantity: 4, retired: false });
  });
});

describe("undo", () => {
  test("puts back what an edit took, unless it has been changed since", async () => {
    drawer.addLine(resistor("R-1", { location: "box 1", notes: "first" }), 1);
    const { step } = drawer.editLines(["R-1"], { location: "box 2", prices: [{ from: 1, unitCost: 0.2 }] });
    const undone = await drawer.undo(step ?? 0);
    expect(undone.label).toBe("Undo: Edit R-1");
    expect(drawer.find("R-1")).toMatchObject({ location: "box 1", prices: [] });
    expect(ids("box 2")).toEqual([]);
    const redone = await drawer.undo(undone.step);
    expect(redone.label).toBe("Redo: Edit R-1");
    expect(drawer.find("R-1")).toMatchObject({ location: "box 2", prices: [{ from: 1, unitCost: 0.2 }] });
    await expect(drawer.undo(step ?? 0)).rejects.toThrow("it has been undone already");
    drawer.editLines(["R-1"], { location: "box 3" });
    await expect(drawer.undo(redone.step)).rejects.toThrow("R-1: its location has been changed since.");
    expect(drawer.find("R-1")?.location).toBe("box 3");
    await expect(drawer.undo(999)).rejects.toMatchObject({ code: "drawer-missing" });
  });

  test("of an added line takes it out of use, with its pieces", async () => {
    const { step } = drawer.addLine(resistor("R-1"), 12);
    const undone = await drawer.undo(step);
    expect(drawer.find("R-1")).toMatchObject({ quantity: 0, retired: true });
    await drawer.undo(undone.step);
    expect(drawer.find("R-1")).toMatchObject({ quantity: 12, retired: false });
  });

  test("of an added line is refused once pieces have come to it, and so is retiring it while somebody holds some", async () => {
    const { step } = drawer.addLine(resistor("R-1"), 3);
    drawer.move([{ line: "R-1", kind: "bought", count: 5, reference: "", note: "" }]);
    await expect(drawer.undo(step)).rejects.toThrow("R-1: it has got 5 pieces since.");
    drawer.retireLines(["R-1"], true);
    const back = drawer.retireLines(["R-1"], false);
    drawer.reserve("Channel", 1, [{ line: "R-1", count: 2 }]);
    await expect(drawer.undo(back.step ?? 0)).rejects.toThrow("R-1: 2 of its pieces are spoken for.");
    expect(() => drawer.retireLines(["R-1"], true)).toThrow("R-1: 2 pieces are spoken for, by Channel (2). Release them before retiring it.");
    expect(drawer.find("R-1")).toMatchObject({ quantity: 8, reserved: 2, retired: false });
  });

  test("of a purchase is refused where the pieces have gone", async () => {
    drawer.addLine(resistor("R-1"), 0);
    const { step } = drawer.move([{ line: "R-1", kind: "bought", count: 10, reference: "", note: "" }]);
    drawer.move([{ line: "R-1", kind: "reserved", count: 7, reference: "Channel", note: "" }]);
    await expect(drawer.undo(step)).rejects.toThrow("R-1: 10 pieces came in, and only 3 of them are free to be taken out again.");
    expect(drawer.find("R-1")).toMatchObject({ quantity: 10, reserved: 7 });
  });
});

describe("pieces", () => {
  test("are kept with their marks, changed, removed, and brought back", async () => {
    drawer.addLine(capacitor("C-1"), 3);
    const { pieces } = drawer.putPieces([
      { id: null, line: "C-1", mark: "b", value: 1.02e-7, frequency: 1000 },
      { id: null, line: "C-1", mark: "a", value: 9.9e-8, frequency: null },
    ]);
    expect(drawer.pieces("C-1").map((piece) => piece.mark)).toEqual(["a", "b"]);
    drawer.putPieces([{ ...pieces[0], value: 1.03e-7 }]);
    const removed = drawer.removePieces([pieces[1].id]);
    expect(drawer.pieces("C-1")).toEqual([{ id: pieces[0].id, line: "C-1", mark: "b", value: 1.03e-7, frequency: 1000 }]);
    await drawer.undo(removed.step ?? 0);
    expect(drawer.pieces("C-1")).toContainEqual(pieces[1]);
    expect(drawer.info().pieces).toBe(2);
  });

  test("no two of a line have one mark, but any number has none", () => {
    drawer.addLine(capacitor("C-1"), 3);
    drawer.putPieces([{ id: null, line: "C-1", mark: "", value: 1e-7, frequency: null }, { id: null, line: "C-1", mark: "", value: 1e-7, frequency: null }, { id: null, line: "C-1", mark: "7", value: 1e-7, frequency: null }]);
    expect(() => drawer.putPieces([{ id: null, line: "C-1", mark: "7", value: 2e-7, frequency: null }])).toThrow("C-1: there is a piece marked 7 already");
    expect(() => drawer.putPieces([{ id: null, line: "C-1", mark: "8", value: 0, frequency: -1 }])).toThrow("its value must be a number above 0, got 0\nC-1, piece 8: it must be measured at a frequency above 0");
    expect(drawer.pieces("C-1")).toHaveLength(3);
  });
});

test("a text is no longer than the screens can take", () => {
  for (const field of ["technology", "package", "location", "supplier", "orderCode"] as const) expect(() => drawer.addLine(resistor("R-1", { [field]: "x".repeat(201) }), 0)).toThrow(/^R-1: its (technology|package|location|supplier|order code) has more than 200 characters$/);
  expect(() => drawer.addLine(resistor("R-1", { notes: "x".repeat(10_001) }), 0)).toThrow("R-1: its notes have more than 10000 characters");
  expect(() => drawer.addLine(resistor("R-1", { prices: Array.from({ length: 51 }, (_, n) => ({ from: n + 1, unitCost: 1 })) }), 0)).toThrow("R-1: it has more than 50 prices");
});

describe("builds", () => {
  beforeEach(() => {
    drawer.addLine(resistor("R-1"), 20);
    drawer.addLine(capacitor("C-1"), 6);
  });

  test("hold what their units take, book what was finished, and let the rest go", () => {
    const { build } = drawer.reserve("Channel", 3, [{ line: "R-1", count: 4 }, { line: "C-1", count: 1 }, { line: "R-1", count: 1 }]);
    expect(build).toMatchObject({ reference: "Channel", units: 3, unitsUsed: 0, state: "reserved", bill: [{ line: "R-1", count: 5, held: 15 }, { line: "C-1", count: 1, held: 3 }] });
    expect(drawer.find("R-1")).toMatchObject({ quantity: 20, reserved: 15 });
    const bill = [{ line: "C-1", count: 1 }, { line: "R-1", count: 5 }];
    expect(drawer.use("Channel", 2, bill).build).toMatchObject({ units: 1, unitsUsed: 2, state: "reserved" });
    expect(drawer.find("R-1")).toMatchObject({ quantity: 10, reserved: 5 });
    expect([...drawer.heldBy("Channel")]).toEqual([["C-1", 1], ["R-1", 5]]);
    drawer.release("Channel");
    expect(drawer.find("R-1")).toMatchObject({ quantity: 10, reserved: 0 });
    expect(drawer.builds()).toMatchObject([{ reference: "Channel", units: 0, unitsUsed: 2, state: "released" }]);
    expect(() => drawer.release("Nobody")).toThrow("Nothing is recorded for “Nobody”.");
  });

  test("reserving again is changing one's mind: what was held counts as free", () => {
    drawer.reserve("Channel", 3, [{ line: "R-1", count: 5 }]);
    expect(drawer.reserve("Channel", 4, [{ line: "R-1", count: 5 }]).build).toMatchObject({ units: 4, bill: [{ held: 20 }] });
    expect(() => drawer.reserve("Pedal", 1, [{ line: "R-1", count: 1 }])).toThrow("R-1: 1 wanted, but none of 20 are free; held by Channel (20).");
    expect(() => drawer.reserve("Channel", 5, [{ line: "R-1", count: 5 }])).toThrow("R-1: 25 wanted, but only 20 of 20 are free.");
    expect(drawer.find("R-1")?.reserved).toBe(20);
  });

  test("using what nobody held is one step, which one undo takes back", async () => {
    const before = drawer.steps(10).length;
    const { step, build } = drawer.use("Channel", 2, [{ line: "R-1", count: 4 }, { line: "C-1", count: 1 }]);
    expect(build).toMatchObject({ units: 0, unitsUsed: 2, state: "used" });
    expect(drawer.steps(10)).toHaveLength(before + 1);
    expect([drawer.find("R-1"), drawer.find("C-1")]).toMatchObject([{ quantity: 12, reserved: 0 }, { quantity: 4, reserved: 0 }]);
    await drawer.undo(step);
    expect([drawer.find("R-1"), drawer.find("C-1")]).toMatchObject([{ quantity: 20, reserved: 0 }, { quantity: 6, reserved: 0 }]);
    expect(drawer.builds()).toEqual([]);
  });

  test("more units may be finished than were held, out of free pieces; too few change nothing", () => {
    drawer.reserve("Channel", 2, [{ line: "R-1", count: 4 }]);
    drawer.reserve("Pedal", 1, [{ line: "R-1", count: 7 }]);
    expect(() => drawer.use("Channel", 4, [{ line: "R-1", count: 4 }])).toThrow("R-1: 8 wanted, but only 5 of 20 are free; held by Pedal (7).");
    expect([...drawer.heldBy("Channel")]).toEqual([["R-1", 8]]);
    expect(drawer.use("Channel", 3, [{ line: "R-1", count: 4 }]).build).toMatchObject({ units: 0, unitsUsed: 3, state: "used" });
    expect(drawer.find("R-1")).toMatchObject({ quantity: 8, reserved: 7 });
  });

  test("units still planned are held anew where the finished ones took other parts, or nothing is booked", () => {
    drawer.reserve("Channel", 5, [{ line: "R-1", count: 1 }]);
    const other = [{ line: "C-1", count: 1 }];
    expect(drawer.use("Channel", 2, other).build).toMatchObject({ units: 3, unitsUsed: 2, state: "reserved", bill: [{ line: "C-1", count: 1, held: 3 }] });
    expect([...drawer.heldBy("Channel")]).toEqual([["C-1", 3]]);
    drawer.reserve("Channel", 5, [{ line: "R-1", count: 1 }]);
    drawer.move([{ line: "C-1", kind: "used", count: 2, reference: "", note: "" }]);
    expect(() => drawer.use("Channel", 1, other)).toThrow("C-1: 4 wanted, but only 1 of 1 is free.");
    expect([...drawer.heldBy("Channel")]).toEqual([["R-1", 5]]);
  });

  test("a retired line is taken for no build", () => {
    drawer.retireLines(["C-1"], true);
    expect(() => drawer.reserve("Channel", 1, [{ line: "C-1", count: 1 }])).toThrow("C-1: it is retired");
    expect(() => drawer.use("Channel", 1, [{ line: "C-1", count: 1 }])).toThrow("C-1: it is retired");
  });
});

import Database from "better-sqlite3";
import fc from "fast-check";
import { beforeEach, describe, expect, test, vi } from "vitest";
import type { DrawerStore } from "../../app/store/drawer-store.ts";
import { isHostFailure } from "../../core/contract/failures.ts";
import { EVERY_LINE } from "../../core/contract/drawer-schemas.ts";
import { MOVEMENT_KINDS, type MovementKind } from "../../core/drawer/stock.ts";
import { capacitor, openScratch, resistor, withScratch } from "../helpers/drawer.ts";

// Real files, flushed: a busy disk takes its time.
vi.setConfig({ testTimeout: 30_000 });

let drawer: DrawerStore;
beforeEach(async () => {
  drawer = await openScratch();
  drawer.addLine(resistor("R-4K7"), 10);
});

function move(kind: MovementKind, count: number, reference = "", line = "R-4K7") {
  return drawer.move([{ line, kind, count, reference, note: "" }]);
}

function amounts(line = "R-4K7"): readonly [number, number] {
  const found = drawer.find(line);
  return [found?.quantity ?? -1, found?.reserved ?? -1];
}

function caught(work: () => unknown): unknown {
  try {
    work();
  } catch (error) {
    return error;
  }
  throw new Error("it was not refused");
}

describe("movements", () => {
  test("each kind does to the quantities what it says", () => {
    move("bought", 5);
    expect(amounts()).toEqual([15, 0]);
    move("used", 3);
    move("scrapped", 1);
    expect(amounts()).toEqual([11, 0]);
    move("counted", 20);
    expect(amounts()).toEqual([20, 0]);
    move("reserved", 8, "Channel");
    expect(amounts()).toEqual([20, 8]);
    move("released", 3, "Channel");
    expect(amounts()).toEqual([20, 5]);
    const { movements } = drawer.ledger({ line: "R-4K7", reference: null, before: null, limit: 100 });
    expect(movements.map(({ kind, change }) => [kind, change])).toEqual([["released", -3], ["reserved", 8], ["counted", 9], ["scrapped", -1], ["used", -3], ["bought", 5], ["counted", 10]]);
    expect(movements[0]).toMatchObject({ line: "R-4K7", reference: "Channel", reverses: null });
    expect(movements[0].at).toMatch(/^2030-01-01T00:00:0\d\.000Z$/);
  });

  test("counting what is known is written down too", () => {
    const { step } = move("counted", 10);
    expect(drawer.ledger({ line: "R-4K7", reference: null, before: null, limit: 1 }).movements[0]).toMatchObject({ step, kind: "counted", change: 0 });
  });

  test("more than there is cannot go, and the refusal names the line and the numbers", () => {
    expect(() => move("used", 11)).toThrow("R-4K7: 11 wanted, but only 10 of 10 are free.");
    expect(() => move("bought", 0)).toThrow("R-4K7: the number of pieces bought must be above 0.");
    expect(() => move("released", 1, "Channel")).toThrow("R-4K7: Channel holds 0 pieces, so 1 cannot be released.");
    expect(() => move("reserved", 1)).toThrow("R-4K7: pieces are held for a project or a build: name it.");
    expect(() => move("used", 1, "", "R-9")).toThrow("There is no line “R-9” in the drawer.");
    expect(() => move("bought", 1_000_000_000)).toThrow("R-4K7: 1000000010 pieces are more than a line can have (1000000000).");
    expect(() => move("counted", 1_000_000_001)).toThrow("more than a line can have");
    expect(() => drawer.addLine(resistor("R-9"), 2 ** 40)).toThrow("more than a line can have");
    // The screens could not take them.
    expect(() => move("reserved", 1, "x".repeat(201))).toThrow("R-4K7: the name of what the pieces are for has more than 200 characters.");
    expect(() => drawer.move([{ line: "R-4K7", kind: "used", count: 1, reference: "", note: "x".repeat(1001) }])).toThrow("R-4K7: the note has more than 1000 characters.");
    expect(amounts()).toEqual([10, 0]);
  });

  test("two projects that want the same last pieces: the second hears who has them", () => {
    move("reserved", 7, "Voice channel");
    move("reserved", 2, "Repair 12");
    const error = caught(() => move("reserved", 4, "Pedal"));
    if (!isHostFailure(error, "drawer-short")) throw error;
    expect(error.data).toEqual({ line: "R-4K7", wanted: 4, quantity: 10, available: 1, holders: [{ reference: "Voice channel", count: 7 }, { reference: "Repair 12", count: 2 }] });
    expect(error.message).toBe("R-4K7: 4 wanted, but only 1 of 10 is free; held by Voice channel (7), Repair 12 (2).");
    expect(() => move("counted", 8)).toThrow("R-4K7: 8 counted, but 9 are spoken for, by Voice channel (7), Repair 12 (2). Release some first.");
    expect(() => drawer.retireLines(["R-4K7"], true)).toThrow("9 pieces are spoken for, by Voice channel (7), Repair 12 (2)");
  });

  test("what a project uses comes first from what it holds", () => {
    move("reserved", 4, "Channel");
    move("used", 6, "Channel");
    expect(amounts()).toEqual([4, 0]);
    move("reserved", 3, "Pedal");
    expect(() => move("used", 2, "Channel")).toThrow("2 wanted, but only 1 of 4 is free; held by Pedal (3)");
  });

  test("several movements are booked together or not at all", () => {
    drawer.addLine(capacitor("C-100N"), 1);
    expect(() => drawer.move([{ line: "R-4K7", kind: "used", count: 2, reference: "", note: "" }, { line: "C-100N", kind: "used", count: 2, reference: "", note: "" }])).toThrow("C-100N: 2 wanted");
    expect(amounts()).toEqual([10, 0]);
    expect(drawer.ledger({ line: null, reference: null, before: null, limit: 10 }).movements).toHaveLength(2);
  });

  test("the ledger is read in pages, by line and by reference", () => {
    for (let n = 1; n <= 5; n += 1) move("reserved", 1, n % 2 === 0 ? "Even" : "Odd");
    const first = drawer.ledger({ line: null, reference: "Odd", before: null, limit: 2 });
    expect(first.hasMore).toBe(true);
    const rest = drawer.ledger({ line: null, reference: "Odd", before: first.movements[1].id, limit: 2 });
    expect([...first.movements, ...rest.movements].map(({ reference }) => reference)).toEqual(["Odd", "Odd", "Odd"]);
    expect(rest.hasMore).toBe(false);
  });
});

describe("the file itself", () => {
  test.each([
    ["ledger", "UPDATE ledger SET change = 99", "the ledger is never changed"],
    ["ledger", "DELETE FROM ledger", "the ledger is never cut"],
    ["changes", "DELETE FROM changes", "history is never cut"],
    ["changes", "UPDATE changes SET step = 1", "history is never changed"],
    ["steps", "DELETE FROM steps", "history is never cut"],
    ["lines", "DELETE FROM lines", "stock lines are retired, never deleted"],
    ["quantity", "INSERT INTO ledger (step, line, kind, change, reference, note) VALUES (1, 1, 'used', -11, '', '')", "CHECK constraint failed: quantity >= 0"],
    ["reserved", "INSERT INTO ledger (step, line, kind, change, reference, note) VALUES (1, 1, 'reserved', 11, 'X', '')", "CHECK constraint failed: reserved BETWEEN 0 AND quantity"],
    ["sign", "INSERT INTO ledger (step, line, kind, change, reference, note) VALUES (1, 1, 'used', 3, '', '')", "CHECK constraint failed"],
    ["stranger", "INSERT INTO ledger (step, line, kind, change, reference, note) VALUES (1, 77, 'bought', 3, '', '')", "FOREIGN KEY constraint failed"],
    ["kind", "UPDATE lines SET kind = 'valve'", "CHECK constraint failed"],
    ["type", "UPDATE lines SET value = 'much'", "cannot store TEXT value in REAL column"],
  ])("keeps its rules against anybody: %s", (_what, sql, complaint) => {
    drawer.close();
    const db = new Database(drawer.path);
    db.pragma("foreign_keys = ON");
    expect(() => db.exec(sql)).toThrow(complaint);
    db.close();
  });
});

/** What a user might do, at random; most of it possible, some refused. */
const COMMAND = fc.oneof(
  fc.record({ do: fc.constant("move" as const), line: fc.constantFrom("A", "B"), kind: fc.constantFrom(...MOVEMENT_KINDS), count: fc.integer({ min: 0, max: 12 }), reference: fc.constantFrom("", "Channel", "Pedal") }),
  fc.record({ do: fc.constant("reserve" as const), reference: fc.constantFrom("Channel", "Pedal"), units: fc.integer({ min: 1, max: 3 }), counts: fc.tuple(fc.integer({ min: 1, max: 3 }), fc.integer({ min: 1, max: 3 })) }),
  fc.record({ do: fc.constant("release" as const), reference: fc.constantFrom("Channel", "Pedal") }),
  fc.record({ do: fc.constant("use" as const), reference: fc.constantFrom("Channel", "Pedal"), units: fc.integer({ min: 1, max: 2 }), counts: fc.tuple(fc.integer({ min: 1, max: 3 }), fc.integer({ min: 1, max: 3 })) }),
  fc.record({ do: fc.constant("undo" as const), back: fc.integer({ min: 0, max: 6 }) }),
  fc.record({ do: fc.constant("edit" as const), line: fc.constantFrom("A", "B"), location: fc.constantFrom("box 1", "box 2") }),
);
type Command = typeof COMMAND extends fc.Arbitrary<infer T> ? T : never;

async function perform(store: DrawerStore, command: Command): Promise<void> {
  switch (command.do) {
    case "move":
      store.move([{ line: command.line, kind: command.kind, count: command.count, reference: command.reference, note: "" }]);
      break;
    case "reserve":
      store.reserve(command.reference, command.units, [{ line: "A", count: command.counts[0] }, { line: "B", count: command.counts[1] }]);
      break;
    case "release":
      store.release(command.reference);
      break;
    case "use":
      store.use(command.reference, command.units, [{ line: "A", count: command.counts[0] }, { line: "B", count: command.counts[1] }]);
      break;
    case "edit":
      store.editLines([command.line], { location: command.location });
      break;
    case "undo": {
      const step = store.steps(10)[command.back];
      if (step !== undefined) await store.undo(step.id);
    }
  }
}

function sumsOf(store: DrawerStore): Record<string, { quantity: number; reserved: number; holders: Record<string, number> }> {
  const sums: Record<string, { quantity: number; reserved: number; holders: Record<string, number> }> = { A: { quantity: 0, reserved: 0, holders: {} }, B: { quantity: 0, reserved: 0, holders: {} } };
  for (const { line, kind, change, reference } of store.ledger({ line: null, reference: null, before: null, limit: 1000 }).movements) {
    if (kind !== "reserved" && kind !== "released") sums[line].quantity += change;
    else {
      sums[line].reserved += change;
      sums[line].holders[reference] = (sums[line].holders[reference] ?? 0) + change;
    }
  }
  return sums;
}

test("after anything a user may do, quantities and holders are the sums of the ledger, and never impossible", async () => {
  await fc.assert(
    fc.asyncProperty(fc.array(COMMAND, { minLength: 1, maxLength: 25 }), async (commands) => {
      await withScratch(async (store) => {
        store.addLine(resistor("A"), 8);
        store.addLine(capacitor("B"), 5);
        for (const command of commands) {
          const before = JSON.stringify([store.lines(EVERY_LINE, { by: "id", descending: false }, 0, 10), store.builds(), store.steps(1)]);
          try {
            await perform(store, command);
          } catch (error) {
            // Refusals are part of it, and change nothing; anything else is not.
            if (!isHostFailure(error, "drawer-short") && !isHostFailure(error, "drawer-refused") && !isHostFailure(error, "drawer-missing") && !isHostFailure(error, "drawer-moved-on")) throw error;
            expect(JSON.stringify([store.lines(EVERY_LINE, { by: "id", descending: false }, 0, 10), store.builds(), store.steps(1)])).toBe(before);
          }
          const sums = sumsOf(store);
          for (const id of ["A", "B"]) {
            const { line, holders } = store.line(id);
            expect([line.quantity, line.reserved]).toEqual([sums[id].quantity, sums[id].reserved]);
            expect(line.quantity).toBeGreaterThanOrEqual(line.reserved);
            expect(line.reserved).toBeGreaterThanOrEqual(0);
            expect(Object.fromEntries(holders.map((one) => [one.reference, one.count]))).toEqual(Object.fromEntries(Object.entries(sums[id].holders).filter(([, count]) => count !== 0)));
          }
        }
        expect(store.integrityProblems()).toEqual([]);
      });
    }),
    { numRuns: 60 },
  );
});

test("undoing every step, the latest first, and then every undo gives the first state and then the last", async () => {
  await fc.assert(
    fc.asyncProperty(fc.array(COMMAND.filter((command) => command.do !== "undo"), { minLength: 1, maxLength: 12 }), async (commands) => {
      await withScratch(async (store) => {
        store.addLine(resistor("A"), 8);
        store.addLine(capacitor("B"), 5);
        const state = (): string => JSON.stringify([store.allLines(), store.builds().map((build) => ({ ...build })), store.allPieces(), ["A", "B"].map((id) => store.line(id).holders)]);
        const first = state();
        const steps: number[] = [];
        for (const command of commands) {
          try {
            await perform(store, command);
          } catch (error) {
            if (!(error instanceof Error) || error.name !== "HostFailure") throw error;
            continue;
          }
          const latest = store.steps(1)[0].id;
          if (latest !== steps.at(-1) && latest > 2) steps.push(latest);
        }
        const last = state();
        const undos: number[] = [];
        for (const step of steps.toReversed()) undos.push((await store.undo(step)).step);
        expect(state()).toBe(first);
        for (const step of undos.toReversed()) await store.undo(step);
        expect(state()).toBe(last);
      });
    }),
    { numRuns: 40 },
  );
});

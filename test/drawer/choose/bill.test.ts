import { describe, expect, it } from "vitest";
import * as fc from "fast-check";
import { buildBill, cheapestPurchase, sumMoney } from "../../../core/drawer/bill.ts";
import { freeForBuild, unitCost, type StockedLine } from "../../../core/drawer/stock.ts";
import type { Block, Part, Project } from "../../../core/model/project.ts";
import { resolveBoard, type Board } from "../../../core/net/board.ts";
import { bandOf, oneBus } from "../../helpers/boards.ts";
import { lineOf } from "../../helpers/drawer-lines.ts";

const part = (value: number, stock?: string, second?: Part["second"]): Part => ({ value, ...(stock === undefined ? {} : { stock }), ...(second === undefined ? {} : { second }) });

/** Two gyrator bands on a bus, all on TL072; every resistor of 470 Ω from one line, one capacitor made of two. */
function board(change: (project: Project) => Project = (p) => p): Board {
  const bands: Block[] = ["a", "b"].map((id) =>
    bandOf(id, "gyrator-section", { seriesC: part(1e-7, "C100n"), seriesR: part(470, "R470"), gyratorC: id === "a" ? part(4.7e-9, "C4n7") : part(9.4e-9, "C4n7", { stock: "C4n7", value: 4.7e-9, joined: "parallel", firstValue: 4.7e-9 }), gyratorR: part(100e3) }, { opAmp: "TL072", slider: { track: part(10e3, "P10k") } }));
  const project = oneBus(bands, { opAmp: "TL072" });
  return resolveBoard(change({ ...project, blocks: project.blocks.map((b) => (b.opAmp === undefined ? b : { ...b, opAmpStock: "TL072-DIP" })) }));
}

const LINES: readonly StockedLine[] = [
  lineOf("R470", "resistor", 470, { quantity: 15, prices: [{ from: 1, unitCost: 0.05 }, { from: 100, unitCost: 0.01 }], supplier: "North" }),
  lineOf("C100n", "capacitor", 1e-7, { quantity: 100, reserved: 90, prices: [{ from: 1, unitCost: 0.3 }, { from: 10, unitCost: 0.2 }], supplier: "South" }),
  lineOf("C4n7", "capacitor", 4.7e-9, { quantity: 25, prices: [], supplier: "South" }),
  lineOf("P10k", "potentiometer", 10e3, { currency: "USD", quantity: 40, prices: [{ from: 1, unitCost: 1.5 }], supplier: "North" }),
  lineOf("TL072-DIP", "op-amp", "TL072", { quantity: 12, prices: [{ from: 1, unitCost: 0.6 }] }),
];

describe("the bill of a build", () => {
  it("counts pieces by line, op amps by the package and pairs twice", () => {
    const bill = buildBill(board(), LINES, 10);
    expect(bill.rows.map((r) => [r.line.id, r.perUnit, r.total, r.available, r.short, r.left])).toEqual([
      ["R470", 2, 20, 15, 5, 0],
      ["C4n7", 3, 30, 25, 5, 0],
      ["C100n", 2, 20, 10, 10, 0],
      ["P10k", 2, 20, 40, 0, 20],
      // Three amplifiers are two duals.
      ["TL072-DIP", 2, 20, 12, 8, 0],
    ]);
    expect(bill.rows[1].roles).toEqual(["a.gyratorC", "b.gyratorC", "b.gyratorC"]);
    expect(bill.reserve).toContainEqual({ line: "C4n7", count: 3 });
    expect(bill.isReady).toBe(false);
  });

  it("lists what no line is named for, by value, and lines that are not there", () => {
    const bill = buildBill(board(), LINES.filter((l) => l.id !== "P10k"), 10);
    expect(bill.unassigned.map((u) => [u.kind, u.value, u.missing, u.perUnit, u.total])).toEqual([
      ["resistor", 0.01, null, 2, 20],
      ["resistor", 3000, null, 2, 20],
      ["resistor", 100e3, null, 2, 20],
      ["resistor", 1e6, null, 1, 10],
      ["potentiometer", 10e3, "P10k", 2, 20],
    ]);
    expect(bill.unassigned[2].roles).toEqual(["a.gyratorR", "b.gyratorR"]);
  });

  it("sums each currency for itself, and names what has no price", () => {
    const bill = buildBill(board(), LINES, 10);
    // 20 × 0.05 + 20 × 0.2 + 20 × 0.6 EUR, 20 × 1.5 USD
    expect(bill.cost.map((m) => m.currency)).toEqual(["EUR", "USD"]);
    expect(bill.cost[0].amount).toBeCloseTo(17, 12);
    expect(bill.cost[1].amount).toBeCloseTo(30, 12);
    expect(bill.costPerUnit[0].amount).toBeCloseTo(1.7, 12);
    expect(bill.unpriced).toEqual(["C4n7"]);
    expect(sumMoney([{ amount: 1, currency: "USD" }, null, { amount: 2, currency: "EUR" }, { amount: 3, currency: "USD" }])).toEqual([{ currency: "EUR", amount: 2 }, { currency: "USD", amount: 4 }]);
  });

  it("shops by supplier at the price of the bought quantity, more where that is cheaper", () => {
    const bill = buildBill(board(), LINES, 10);
    expect(bill.shopping.map((g) => [g.supplier, g.items.map((i) => [i.line.id, i.short, i.buy])])).toEqual([
      ["North", [["R470", 5, 5]]],
      ["South", [["C4n7", 5, 5], ["C100n", 10, 10]]],
      ["", [["TL072-DIP", 8, 8]]],
    ]);
    expect(bill.shopping[1].items[0].cost).toBeNull();
    expect(bill.shopping[1].cost).toEqual([{ currency: "EUR", amount: 2 }]);
    // 50 × 0.05 = 2.50, but a hundred cost 1.00.
    const many = buildBill(board(), LINES.map((l) => (l.id === "R470" ? { ...l, quantity: 0 } : l)), 25).shopping[0].items[0];
    expect(many).toMatchObject({ short: 50, buy: 100 });
    expect(many.cost!.amount).toBeCloseTo(1, 12);
    expect(many.insteadOf!.amount).toBeCloseTo(2.5, 12);
  });

  it("gives back what this build has reserved before", () => {
    const bill = buildBill(board(), freeForBuild(LINES, new Map([["C100n", 20]])), 10);
    expect(bill.rows.find((r) => r.line.id === "C100n")).toMatchObject({ available: 30, short: 0, left: 10 });
  });

  it("buys at the least cost that any quantity has", () => {
    const price = fc.array(fc.record({ step: fc.integer({ min: 1, max: 40 }), unitCost: fc.integer({ min: 1, max: 100 }) }), { minLength: 1, maxLength: 4 });
    fc.assert(
      fc.property(price, fc.integer({ min: 1, max: 120 }), (steps, short) => {
        let from = 1 - steps[0].step;
        const prices = steps.map(({ step, unitCost: cost }) => ({ from: (from += step), unitCost: cost }));
        const { buy, cost } = cheapestPurchase({ prices, currency: "EUR" }, short);
        let least = Infinity;
        for (let n = short; n <= short + 200; n++) least = Math.min(least, n * unitCost({ prices }, n)!);
        expect(buy).toBeGreaterThanOrEqual(short);
        expect(cost!.amount).toBe(least);
        expect(cost!.amount).toBe(buy * unitCost({ prices }, buy)!);
      }),
      { numRuns: 300 },
    );
  });
});

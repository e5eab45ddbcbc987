import * as fc from "fast-check";
import { describe, expect, test } from "vitest";
import { runs } from "../../fixtures/runs.ts";
import { slotWidth, spread } from "../../../core/geometry/placement.ts";

const wishes = fc.array(fc.double({ min: -50, max: 1050, noNaN: true }), { minLength: 1, maxLength: 62 });

describe("spread", () => {
  test("62 bands and fewer never overlap, keep their order and stay inside", () => {
    fc.assert(
      fc.property(wishes, fc.double({ min: 5, max: 120, noNaN: true }), (wanted, width) => {
        const xs = spread(wanted, width, 0, 1000);
        const pitch = Math.min(width, 1000 / wanted.length);
        const order = wanted.map((_, i) => i).sort((a, b) => wanted[a] - wanted[b] || a - b);
        for (let rank = 0; rank < order.length; rank++) {
          const x = xs[order[rank]];
          expect(x).toBeGreaterThanOrEqual(pitch / 2 - 1e-6);
          expect(x).toBeLessThanOrEqual(1000 - pitch / 2 + 1e-6);
          if (rank > 0) expect(x - xs[order[rank - 1]]).toBeGreaterThanOrEqual(pitch - 1e-6);
        }
      }),
      runs(200),
    );
  });

  test("what has the room stands exactly where it wants to", () => {
    expect(spread([700, 100, 400], 80, 0, 1000)).toEqual([700, 100, 400]);
  });

  test("two that want the same place share it evenly", () => {
    expect(spread([500, 500], 60, 0, 1000)).toEqual([470, 530]);
  });

  test("is the least-squares answer: no single item can be moved nearer without an overlap", () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 100, max: 900 }), { minLength: 2, maxLength: 8 }), (wanted) => {
        const width = 40;
        const xs = spread(wanted, width, 0, 1000);
        xs.forEach((x, i) => {
          const nearer = x + Math.sign(wanted[i] - x) * Math.min(0.5, Math.abs(wanted[i] - x));
          const isFree = xs.every((other, j) => j === i || Math.abs(other - nearer) >= width - 1e-9);
          if (isFree) expect(Math.abs(wanted[i] - x)).toBeLessThan(1e-6);
        });
      }),
      runs(200),
    );
  });
});

describe("slot width", () => {
  const SIZES = { best: 88, enough: 69, close: 46, least: 28 };
  const reach = (wanted: readonly number[], width: number): number => Math.max(...spread(wanted, width, 0, 1000).map((x, i) => Math.abs(x - wanted[i])));

  test("as wide as is best where there is room", () => {
    expect(slotWidth([100, 200, 300], SIZES, 0, 1000)).toBe(88);
    expect(slotWidth([100, 175, 250], SIZES, 0, 1000)).toBe(75);
  });

  test("closer bands fan out a little for their values, and stay where they are where that would take more", () => {
    const octaves = Array.from({ length: 8 }, (_, i) => 250 + 60 * i);
    const width = slotWidth(octaves, SIZES, 0, 1000);
    expect(width).toBeCloseTo(69, 0);
    expect(reach(octaves, width)).toBeLessThan(37);
    const thirds = Array.from({ length: 16 }, (_, i) => 200 + 30 * i);
    expect(slotWidth(thirds, SIZES, 0, 1000)).toBe(30);
  });

  test("two close bands do not narrow the rest", () => {
    expect(slotWidth([100, 110, 300, 500, 700], SIZES, 0, 1000)).toBe(88);
  });

  test("never more than what all of them have together", () => {
    fc.assert(fc.property(wishes, (wanted) => {
      expect(slotWidth(wanted, SIZES, 0, 1000) * wanted.length).toBeLessThanOrEqual(1000 + 1e-6);
    }), runs(200));
  });
});

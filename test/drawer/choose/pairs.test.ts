import * as fc from "fast-check";
import { describe, expect, it } from "vitest";
import { bestPairs, isSum, pairTolerance, pairValue, type PairItem } from "../../../core/drawer/pairs.ts";
import { randomFrom } from "../../../core/num/random.ts";

/** Every pair, nearest first: the errors of the first few. */
function exhaustive(target: number, items: readonly PairItem[], sums: boolean, count: number, need = 1): number[] {
  const errors: number[] = [];
  for (const [i, a] of items.entries()) {
    if (a.available >= 2 * need) errors.push(Math.abs(pairValue(a.value, a.value, sums) - target));
    if (a.available < need) continue;
    for (const b of items.slice(i + 1)) if (b.available >= need) errors.push(Math.abs(pairValue(a.value, b.value, sums) - target));
  }
  return errors.sort((a, b) => a - b).slice(0, count);
}

describe("pairs of parts", () => {
  it("are the nearest that trying all of three hundred values finds, in order", () => {
    const random = randomFrom(7);
    for (const sums of [true, false]) {
      for (let run = 0; run < 20; run++) {
        const items = Array.from({ length: 300 }, () => ({ value: Number((10 ** (1 + 5 * random())).toPrecision(3)), available: Math.floor(random() * 4) }));
        const target = 10 ** (1.5 + 4 * random());
        const found = bestPairs(target, items, sums, 40);
        const wanted = exhaustive(target, items, sums, 40);
        expect(found.map((p) => Math.abs(p.value - target))).toHaveLength(wanted.length);
        for (const [i, pair] of found.entries()) expect(Math.abs(pair.value - target) / target).toBeCloseTo(wanted[i] / target, 12);
        const keys = found.map(({ first, second }) => [items.indexOf(first), items.indexOf(second)].toSorted((a, b) => a - b).join());
        expect(new Set(keys).size).toBe(found.length);
      }
    }
  });

  it("are exact on random small drawers, for several units, with repeated values", () => {
    const item = fc.record({ value: fc.integer({ min: 1, max: 20 }), available: fc.integer({ min: 0, max: 5 }) });
    fc.assert(
      fc.property(fc.array(item, { maxLength: 12 }), fc.integer({ min: 1, max: 45 }), fc.boolean(), fc.integer({ min: 1, max: 100 }), fc.integer({ min: 1, max: 2 }), (items, target, sums, count, need) => {
        const found = bestPairs(target, items, sums, count, need);
        const wanted = exhaustive(target, items, sums, count, need);
        expect(found).toHaveLength(wanted.length);
        for (const [i, pair] of found.entries()) expect(Math.abs(pair.value - target)).toBeCloseTo(wanted[i], 9);
      }),
      { numRuns: 500 },
    );
  });

  it("add up as the trade adds them", () => {
    expect(isSum("resistor", "series")).toBe(true);
    expect(isSum("resistor", "parallel")).toBe(false);
    expect(isSum("capacitor", "parallel")).toBe(true);
    expect(isSum("capacitor", "series")).toBe(false);
    expect(pairValue(10e3, 10e3, false)).toBeCloseTo(5e3, 9);
  });

  it("have the tolerance of the worst case", () => {
    for (const sums of [true, false]) {
      const [a, b, ta, tb] = [100, 330, 0.001, 0.0005];
      const worst = pairValue(a * (1 + ta), b * (1 + tb), sums) / pairValue(a, b, sums) - 1;
      expect(pairTolerance(a, b, ta, tb, sums)!).toBeCloseTo(worst, 6);
    }
    expect(pairTolerance(1, 1, null, 0.1, true)).toBeNull();
  });
});

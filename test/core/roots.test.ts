import * as fc from "fast-check";
import { describe, expect, test } from "vitest";
import { findLeast, findRoot } from "../../core/num/roots.ts";
import { runs } from "../fixtures/runs.ts";

describe("the root of a function that changes sign", () => {
  test.each<[string, (x: number) => number, number, number, number]>([
    ["x² − 2", (x) => x * x - 2, 0, 2, Math.SQRT2],
    ["cos x − x", (x) => Math.cos(x) - x, 0, 1, 0.739_085_133_215_16],
    ["x·eˣ − 1 (the omega constant)", (x) => x * Math.exp(x) - 1, -1, 1, 0.567_143_290_409_78],
    ["x³ − 2x − 5 (Wallis)", (x) => x ** 3 - 2 * x - 5, 2, 3, 2.094_551_481_542_33],
    ["x⁹: flat at its root", (x) => x ** 9, -1, 1.5, 0],
    ["a step", (x) => (x < 0.3 ? -1 : 1), 0, 1, 0.3],
    ["1/(x − 3) at its pole: where the sign changes", (x) => 1 / (x - 3), 0, 5, 3],
    ["a descending line, ends given the other way round", (x) => 5 - x, 9, 1, 5],
  ])("%s", (_name, f, a, b, root) => {
    expect(Math.abs(findRoot(f, a, b, 1e-12) - root)).toBeLessThan(root === 0 ? 1e-3 : 3e-12);
    expect(Math.abs(findRoot(f, a, b, 1e-3) - root)).toBeLessThan(root === 0 ? 0.2 : 2e-3);
  });

  test("lies between the ends and within the tolerance, for random monotone functions", () => {
    const shape = fc.record({ root: fc.integer({ min: -990, max: 990 }), power: fc.constantFrom(1, 3, 5), slope: fc.integer({ min: 1, max: 1000 }), bend: fc.integer({ min: 0, max: 30 }), sign: fc.constantFrom(1, -1) });
    fc.assert(
      fc.property(shape, ({ root: n, power, slope, bend, sign }) => {
        const root = n / 100;
        const f = (x: number): number => sign * ((slope / 100) * (x - root) + (x - root) ** power + Math.sinh((bend / 10) * (x - root)));
        const found = findRoot(f, -10, 10, 1e-10);
        expect(Math.abs(found - root)).toBeLessThan(1e-9);
      }),
      runs(2000),
    );
  });

  test("takes few evaluations where the function is smooth", () => {
    let count = 0;
    findRoot((x) => (count++, Math.exp(x) - 5), -10, 10, 1e-12);
    expect(count).toBeLessThan(20);
  });

  test("is an end that is a root itself; given end values are not worked out again", () => {
    expect(findRoot((x) => x, 0, 1, 1e-12)).toBe(0);
    expect(findRoot((x) => x - 1, 0, 1, 1e-12)).toBe(1);
    const asked: number[] = [];
    findRoot((x) => (asked.push(x), x - 0.4), 0, 1, 1e-12, -0.4, 0.6);
    expect(asked).not.toContain(0);
    expect(asked).not.toContain(1);
  });

  test("needs a change of sign", () => {
    expect(() => findRoot((x) => x * x + 1, -1, 1, 1e-9)).toThrow(RangeError);
    expect(() => findRoot((x) => -x * x - 1, -1, 1, 1e-9)).toThrow(/no sign change between -1 and 1/);
  });
});

test("findLeast finds the bottom of a valley, wherever it lies between the ends", () => {
  for (const bottom of [-2, -1.99, -0.3, 0, 1.7, 3]) {
    for (const valley of [(x: number) => (x - bottom) ** 2, (x: number) => Math.abs(x - bottom), (x: number) => Math.cosh(x - bottom)]) expect(findLeast(valley, -2, 3, 1e-7)).toBeCloseTo(bottom, 6);
  }
});

import * as fc from "fast-check";
import { complex, lusolve, type Complex } from "mathjs";
import { Matrix, solve } from "ml-matrix";
import { describe, expect, test, vi } from "vitest";
import { ComplexLu } from "../../core/num/complex-lu.ts";
import { runs } from "../fixtures/runs.ts";

vi.setConfig({ testTimeout: 30_000 });

interface System {
  readonly size: number;
  readonly re: readonly number[];
  readonly im: readonly number[];
  readonly bRe: readonly number[];
  readonly bIm: readonly number[];
}

/** Random complex systems; entries over many decades, and many of them 0, as node equations have it. */
const systemArbitrary: fc.Arbitrary<System> = fc.integer({ min: 1, max: 12 }).chain((size) => {
  const entry = fc.oneof(fc.constant(0), fc.integer({ min: -1000, max: 1000 }).map((n) => n / 500), fc.tuple(fc.integer({ min: -999, max: 999 }), fc.integer({ min: -9, max: 3 })).map(([m, e]) => m * 10 ** e));
  const many = (length: number): fc.Arbitrary<number[]> => fc.array(entry, { minLength: length, maxLength: length });
  return fc.record({ size: fc.constant(size), re: many(size * size), im: many(size * size), bRe: many(size), bIm: many(size) });
});

function run(system: System): { isSolved: boolean; re: Float64Array; im: Float64Array } {
  const lu = new ComplexLu(system.size);
  lu.re.set(system.re);
  lu.im.set(system.im);
  const [re, im] = [Float64Array.from(system.bRe), Float64Array.from(system.bIm)];
  const isSolved = lu.factor();
  if (isSolved) lu.solve(re, im);
  return { isSolved, re, im };
}

/** Largest |A·x − b| in a row, over the row's size times the largest unknown: the backward error of the solution. */
function residual({ size: n, re: a, im: ai, bRe, bIm }: System, re: Float64Array, im: Float64Array): number {
  let worst = 0;
  const largest = Math.max(...re.map((x, j) => Math.hypot(x, im[j])));
  for (let i = 0; i < n; i++) {
    let [sr, si, size] = [-bRe[i], -bIm[i], Math.hypot(bRe[i], bIm[i])];
    for (let j = 0; j < n; j++) {
      const k = i * n + j;
      sr += a[k] * re[j] - ai[k] * im[j];
      si += a[k] * im[j] + ai[k] * re[j];
      size += Math.hypot(a[k], ai[k]) * largest;
    }
    if (size > 0) worst = Math.max(worst, Math.hypot(sr, si) / size);
  }
  return worst;
}

describe("complex LU", () => {
  test("A·x gives b back to rounding on whatever it solves", () => {
    let solved = 0;
    fc.assert(
      fc.property(systemArbitrary, (system) => {
        const { isSolved, re, im } = run(system);
        if (!isSolved || ![...re, ...im].every(Number.isFinite)) return;
        solved += 1;
        // Partial pivoting on a row-equilibrated matrix is backward stable but for element growth, which random matrices hardly have.
        expect(residual(system, re, im)).toBeLessThan(1e-11);
      }),
      runs(1500),
    );
    expect(solved).toBeGreaterThan(500);
  });

  test("L times U is the matrix with its rows exchanged and scaled", () => {
    fc.assert(
      fc.property(systemArbitrary, (system) => {
        const n = system.size;
        const lu = new ComplexLu(n);
        lu.re.set(system.re);
        lu.im.set(system.im);
        if (!lu.factor()) return;
        // Rows of L·U, each to be found among the rows of A, times a power of two.
        const rows = Array.from({ length: n }, (_, i) => {
          const row: number[] = [];
          for (let j = 0; j < n; j++) {
            let [sr, si] = [0, 0];
            for (let k = 0; k <= Math.min(i, j); k++) {
              const [lr, li] = k === i ? [1, 0] : [lu.re[i * n + k], lu.im[i * n + k]];
              sr += lr * lu.re[k * n + j] - li * lu.im[k * n + j];
              si += lr * lu.im[k * n + j] + li * lu.re[k * n + j];
            }
            row.push(sr, si);
          }
          return row;
        });
        const wanted = Array.from({ length: n }, (_, i) => {
          const row = system.re.slice(i * n, i * n + n).flatMap((x, j) => [x, system.im[i * n + j]]);
          const largest = Math.max(...row.filter((_x, c) => c % 2 === 0).map((x, c) => Math.abs(x) + Math.abs(row[2 * c + 1])));
          return row.map((x) => x * 2 ** -Math.round(Math.log2(largest)));
        });
        for (const row of rows) {
          const growth = Math.max(1, ...lu.re.map(Math.abs), ...lu.im.map(Math.abs));
          const nearest = Math.min(...wanted.map((w) => Math.max(...w.map((x, c) => Math.abs(x - row[c])))));
          expect(nearest).toBeLessThan(1e-13 * growth);
        }
      }),
      runs(500),
    );
  });

  // A matrix with a strong diagonal is well conditioned: there, solutions can be compared and not only residuals.
  const strong = systemArbitrary.map((s) => ({ ...s, re: s.re.map((x, k) => (k % (s.size + 1) === 0 ? 3e6 + x : x)) }));

  test("the solution is that of mathjs lusolve", () => {
    fc.assert(
      fc.property(strong, (system) => {
        const { size: n } = system;
        const { re, im } = run(system);
        const matrix = Array.from({ length: n }, (_, i) => Array.from({ length: n }, (_x, j) => complex(system.re[i * n + j], system.im[i * n + j])));
        const x = lusolve(matrix, system.bRe.map((b, i) => [complex(b, system.bIm[i])])) as unknown as (Complex | number)[][];
        const size = Math.max(1e-300, ...re.map(Math.abs), ...im.map(Math.abs));
        x.forEach(([entry], i) => {
          // A plain 0 comes back where the right-hand side is 0.
          const found = complex(entry as Complex);
          expect(Math.hypot(found.re - re[i], found.im - im[i]) / size).toBeLessThan(1e-12);
        });
      }),
      runs(150),
    );
  });

  test("the solution is that of ml-matrix on the real system of twice the size", () => {
    fc.assert(
      fc.property(strong, (system) => {
        const { size: n } = system;
        const { re, im } = run(system);
        const row = (a: readonly number[], i: number): number[] => a.slice(i * n, i * n + n);
        const real = [...Array.from({ length: n }, (_, i) => [...row(system.re, i), ...row(system.im, i).map((x) => -x)]), ...Array.from({ length: n }, (_, i) => [...row(system.im, i), ...row(system.re, i)])];
        const x = solve(new Matrix(real), Matrix.columnVector([...system.bRe, ...system.bIm]));
        const size = Math.max(1e-300, ...re.map(Math.abs), ...im.map(Math.abs));
        for (let i = 0; i < n; i++) expect(Math.hypot(x.get(i, 0) - re[i], x.get(n + i, 0) - im[i]) / size).toBeLessThan(1e-12);
      }),
      runs(150),
    );
  });

  test("by hand: (1 + j)·x = 2 gives 1 − j, and rows that must change places do", () => {
    expect(run({ size: 1, re: [1], im: [1], bRe: [2], bIm: [0] })).toMatchObject({ re: new Float64Array([1]), im: new Float64Array([-1]) });
    // x₁ + j·x₂ = j, j·x₁ … with a 0 in the corner: 0·a + j·b = 3j, 2·a + b = 7
    const { re, im } = run({ size: 2, re: [0, 0, 2, 1], im: [0, 1, 0, 0], bRe: [0, 7], bIm: [3, 0] });
    expect([...re]).toEqual([2, 3]);
    expect(im.every((x) => x === 0)).toBe(true);
  });

  test("solves more than once from one factoring", () => {
    const lu = new ComplexLu(2);
    lu.re.set([1e-9, 2e-9, 3e6, 4e6]);
    lu.factor();
    for (const [a, b] of [[1, 0], [0, 1], [5, -3]]) {
      const x = new Float64Array([1e-9 * a + 2e-9 * b, 3e6 * a + 4e6 * b]);
      lu.solve(x, new Float64Array(2));
      expect(x[0]).toBeCloseTo(a, 10);
      expect(x[1]).toBeCloseTo(b, 10);
    }
  });

  test.each<[string, System]>([
    ["a row of zeros", { size: 2, re: [1, 2, 0, 0], im: [0, 0, 0, 0], bRe: [1, 1], bIm: [0, 0] }],
    ["a column of zeros", { size: 2, re: [0, 1, 0, 2], im: [0, 0, 0, 0], bRe: [1, 1], bIm: [0, 0] }],
    ["two rows alike", { size: 2, re: [1, 2, 1, 2], im: [3, 4, 3, 4], bRe: [1, 1], bIm: [0, 0] }],
    ["rows that differ by the factor j", { size: 2, re: [1, 2, 0, 0], im: [0, 0, 1, 2], bRe: [1, 1], bIm: [0, 0] }],
    ["NaN", { size: 1, re: [NaN], im: [0], bRe: [1], bIm: [0] }],
    ["Infinity", { size: 1, re: [Infinity], im: [0], bRe: [1], bIm: [0] }],
  ])("%s is told as singular", (_what, system) => expect(run(system).isSolved).toBe(false));
});

import * as fc from "fast-check";
import { EigenvalueDecomposition, Matrix } from "ml-matrix";
import { describe, expect, test } from "vitest";
import { ComplexLu } from "../../../core/num/complex-lu.ts";
import { realEigenvalues } from "../../../core/num/real-eigen.ts";
import { runs } from "../../fixtures/runs.ts";

interface Root {
  readonly re: number;
  readonly im: number;
}

function eigenvalues(rows: readonly (readonly number[])[]): Root[] {
  const { re, im } = realEigenvalues(Float64Array.from(rows.flat()), rows.length);
  return Array.from(re, (x, i) => ({ re: x, im: im[i] }));
}

function byMlMatrix(rows: readonly (readonly number[])[]): Root[] {
  const { realEigenvalues: re, imaginaryEigenvalues: im } = new EigenvalueDecomposition(new Matrix(rows.map((r) => [...r])), { assumeSymmetric: false });
  return re.map((x, i) => ({ re: x, im: im[i] }));
}

/** The largest distance left when every root takes its nearest partner among those not taken yet. */
function furthest(found: readonly Root[], wanted: readonly Root[], relative: boolean): number {
  const left = [...wanted];
  let worst = 0;
  for (const root of found) {
    const distances = left.map((w) => Math.hypot(root.re - w.re, root.im - w.im));
    const nearest = distances.indexOf(Math.min(...distances));
    const [partner] = left.splice(nearest, 1);
    worst = Math.max(worst, distances[nearest] / (relative ? Math.hypot(partner.re, partner.im) : 1));
  }
  return left.length === 0 ? worst : Infinity;
}

const entry = fc.integer({ min: -1000, max: 1000 }).map((n) => n / 100);
const square = fc.integer({ min: 1, max: 16 }).chain((n) => fc.array(fc.array(entry, { minLength: n, maxLength: n }), { minLength: n, maxLength: n }));

describe("eigenvalues", () => {
  test.each([Infinity, -Infinity, NaN])("of a matrix with %d in it are refused at once", (bad) => {
    expect(() => eigenvalues([[1, bad, 0], [2, 3, 1], [0, 1, 1]])).toThrow(RangeError);
  });

  test("of a matrix whose sums run past any number's range are found or refused, and not sought for ever", () => {
    const outcome = (): string => {
      try {
        return eigenvalues([[0, 1.5e308, 1.5e308], [1, 0, 0], [1, 0, 0]]).length === 3 ? "found" : "lost";
      } catch (error) {
        return error instanceof RangeError ? "refused" : "broken";
      }
    };
    expect(["found", "refused"]).toContain(outcome());
  });

  test("of random matrices are those of ml-matrix", () => {
    fc.assert(
      fc.property(square, (rows) => {
        // Distances of backward-stable answers grow with the condition of the eigenvalue; characteristic sums do not.
        const size = Math.max(1, ...rows.map((r) => r.reduce((sum, x) => sum + Math.abs(x), 0)));
        const found = eigenvalues(rows);
        expect(furthest(found, byMlMatrix(rows), false)).toBeLessThan(1e-6 * size);
        const trace = rows.reduce((sum, r, i) => sum + r[i], 0);
        const squares = rows.reduce((sum, r, i) => sum + r.reduce((s, x, j) => s + x * rows[j][i], 0), 0);
        expect(Math.abs(found.reduce((sum, z) => sum + z.re, 0) - trace)).toBeLessThan(1e-12 * rows.length * size);
        expect(Math.abs(found.reduce((sum, z) => sum + z.re * z.re - z.im * z.im, 0) - squares)).toBeLessThan(1e-12 * rows.length * size * size);
      }),
      runs(300),
    );
  });

  test("complex ones come in pairs, conjugate to the last bit", () => {
    fc.assert(
      fc.property(square, (rows) => {
        const found = eigenvalues(rows);
        const above = found.filter((z) => z.im > 0).map((z) => `${z.re} ${z.im}`).sort();
        const below = found.filter((z) => z.im < 0).map((z) => `${z.re} ${-z.im}`).sort();
        expect(above).toEqual(below);
      }),
      runs(200),
    );
  });

  test("keep their digits when unknowns are scaled apart by up to twelve decades", () => {
    // Similar to a symmetric matrix, whose eigenvalues move no more than it does; scaled by powers of two, which is exact.
    const filled = entry.map((x) => (x < 0 ? x - 1 : x + 1));
    const apart = fc.record({ entries: fc.array(filled, { minLength: 100, maxLength: 100 }), scales: fc.array(fc.integer({ min: -20, max: 20 }), { minLength: 2, maxLength: 10 }) });
    let others = 0;
    fc.assert(
      fc.property(apart, ({ entries, scales }) => {
        const symmetric = scales.map((_r, i) => scales.map((_c, j) => entries[Math.min(i, j) * 10 + Math.max(i, j)]));
        const rows = symmetric.map((row, i) => row.map((x, j) => x * 2 ** (scales[i] - scales[j])));
        const wanted = new EigenvalueDecomposition(new Matrix(symmetric)).realEigenvalues.map((re) => ({ re, im: 0 }));
        const size = Math.max(...symmetric.map((row) => row.reduce((sum, x) => sum + Math.abs(x), 0)));
        expect(furthest(eigenvalues(rows), wanted, false)).toBeLessThan(1e-12 * size);
        others = Math.max(others, furthest(byMlMatrix(rows), wanted, false) / size);
      }),
      runs(200),
    );
    // Without balancing they do not: the matrices are hard enough to tell.
    expect(others).toBeGreaterThan(1e-6);
  });

  test("by hand: a rotation, a companion of (x − 1)(x − 2)(x − 3), a nought, nothing at all", () => {
    expect(eigenvalues([[0, -2], [2, 0]])).toEqual([{ re: 0, im: 2 }, { re: 0, im: -2 }]);
    expect(furthest(eigenvalues([[6, -11, 6], [1, 0, 0], [0, 1, 0]]), [1, 2, 3].map((re) => ({ re, im: 0 })), true)).toBeLessThan(1e-13);
    expect(eigenvalues([[0, 0], [0, 0]])).toEqual([{ re: 0, im: 0 }, { re: 0, im: 0 }]);
    expect(eigenvalues([])).toEqual([]);
    expect(eigenvalues([[7]])).toEqual([{ re: 7, im: 0 }]);
  });

  test("of a cyclic shift, which stalls an iteration without exceptional shifts, are the roots of unity", () => {
    for (const n of [3, 4, 8, 15]) {
      const rows = Array.from({ length: n }, (_r, i) => Array.from({ length: n }, (_c, j) => (j === (i + 1) % n ? 1 : 0)));
      const wanted = Array.from({ length: n }, (_, k) => ({ re: Math.cos((2 * Math.PI * k) / n), im: Math.sin((2 * Math.PI * k) / n) }));
      expect(furthest(eigenvalues(rows), wanted, true)).toBeLessThan(1e-12);
    }
  });

  test("of a triple root scatter by no more than the cube root of rounding", () => {
    expect(furthest(eigenvalues([[2, 1, 0], [0, 2, 1], [0, 0, 2]]), [2, 2, 2].map((re) => ({ re, im: 0 })), true)).toBeLessThan(2e-5);
  });
});

describe("the transposed solve", () => {
  const system = fc.integer({ min: 1, max: 12 }).chain((n) =>
    fc.record({ re: fc.array(entry, { minLength: n * n, maxLength: n * n }), im: fc.array(entry, { minLength: n * n, maxLength: n * n }), b: fc.array(entry, { minLength: 2 * n, maxLength: 2 * n }), decades: fc.array(fc.integer({ min: -8, max: 8 }), { minLength: n, maxLength: n }) }),
  );

  test("gives Aᵀ·x = b back, rows of very different size included", () => {
    let solved = 0;
    fc.assert(
      fc.property(system, ({ re, im, b, decades }) => {
        const n = decades.length;
        const lu = new ComplexLu(n);
        for (let i = 0; i < n * n; i++) {
          lu.re[i] = re[i] * 10 ** decades[Math.floor(i / n)];
          lu.im[i] = im[i] * 10 ** decades[Math.floor(i / n)];
        }
        const [ar, ai] = [lu.re.slice(), lu.im.slice()];
        if (!lu.factor()) return;
        const [xr, xi] = [Float64Array.from(b.slice(0, n)), Float64Array.from(b.slice(n))];
        lu.solveTransposed(xr, xi);
        solved += 1;
        for (let j = 0; j < n; j++) {
          let sr = -b[j];
          let si = -b[n + j];
          let size = Math.abs(b[j]) + Math.abs(b[n + j]);
          for (let i = 0; i < n; i++) {
            sr += ar[i * n + j] * xr[i] - ai[i * n + j] * xi[i];
            si += ar[i * n + j] * xi[i] + ai[i * n + j] * xr[i];
            size += Math.hypot(ar[i * n + j], ai[i * n + j]) * Math.hypot(xr[i], xi[i]);
          }
          // Backward stable: what is left is rounding of the terms themselves, not of the answer's condition.
          expect(Math.hypot(sr, si)).toBeLessThanOrEqual(1e-12 * size);
        }
      }),
      runs(400),
    );
    expect(solved).toBeGreaterThan(380);
  });

  test("agrees with the plain solve through yᵀ(A⁻¹b) = (A⁻ᵀy)ᵀb", () => {
    const lu = new ComplexLu(3);
    lu.re.set([1, 2, 0, 4e6, -1e6, 2e6, 1e-6, 5e-6, -3e-6]);
    lu.im.set([0, 1, 1, 0, 3e6, 0, 2e-6, 0, 1e-6]);
    expect(lu.factor()).toBe(true);
    const [b, y] = [[1, -2, 3], [0.5, 4, -1]];
    const [xr, xi, zr, zi] = [Float64Array.from(b), new Float64Array(3), Float64Array.from(y), new Float64Array(3)];
    lu.solve(xr, xi);
    lu.solveTransposed(zr, zi);
    const dot = (u: Float64Array, v: readonly number[]): number => u.reduce((sum, x, i) => sum + x * v[i], 0);
    expect(dot(zr, b)).toBeCloseTo(dot(xr, y), 6);
    expect(Math.abs(dot(zr, b) / dot(xr, y) - 1)).toBeLessThan(1e-12);
    expect(Math.abs(dot(zi, b) / dot(xi, y) - 1)).toBeLessThan(1e-12);
  });
});

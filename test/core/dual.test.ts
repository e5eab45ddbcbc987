import * as fc from "fast-check";
import { describe, expect, test, vi } from "vitest";
import { Dual } from "../../core/num/dual.ts";
import { runs } from "../fixtures/runs.ts";

vi.setConfig({ testTimeout: 30_000 });

/** A random rational function of s as a tree. */
type Tree = { readonly op: "affine"; readonly constant: number; readonly slope: number } | { readonly op: "add" | "sub" | "mul" | "div"; readonly a: Tree; readonly b: Tree } | { readonly op: "scale" | "shift"; readonly a: Tree; readonly by: number };

const coefficient = fc.integer({ min: -200, max: 200 }).map((n) => n / 50);
const leaf: fc.Arbitrary<Tree> = fc.record({ op: fc.constant("affine" as const), constant: coefficient, slope: coefficient });
const { tree } = fc.letrec<{ tree: Tree }>((tie) => ({
  tree: fc.oneof(
    { maxDepth: 4, withCrossShrink: true },
    leaf,
    fc.record({ op: fc.constantFrom("add" as const, "sub" as const, "mul" as const, "div" as const), a: tie("tree"), b: tie("tree") }),
    fc.record({ op: fc.constantFrom("scale" as const, "shift" as const), a: tie("tree"), by: coefficient }),
  ),
}));

function asDual(t: Tree, omega: number): Dual {
  const out = new Dual();
  switch (t.op) {
    case "affine":
      return out.affine(t.constant, t.slope, omega);
    case "scale":
    case "shift":
      return out[t.op](asDual(t.a, omega), t.by);
    default:
      return out[t.op](asDual(t.a, omega), asDual(t.b, omega));
  }
}

interface Point {
  readonly re: number;
  readonly im: number;
}

/** The same function of any complex s, in plain complex arithmetic. */
function asNumber(t: Tree, s: Point): Point {
  switch (t.op) {
    case "affine":
      return { re: t.constant + t.slope * s.re, im: t.slope * s.im };
    case "scale": {
      const a = asNumber(t.a, s);
      return { re: a.re * t.by, im: a.im * t.by };
    }
    case "shift": {
      const a = asNumber(t.a, s);
      return { re: a.re + t.by, im: a.im };
    }
    default: {
      const [a, b] = [asNumber(t.a, s), asNumber(t.b, s)];
      if (t.op === "add") return { re: a.re + b.re, im: a.im + b.im };
      if (t.op === "sub") return { re: a.re - b.re, im: a.im - b.im };
      const sign = t.op === "mul" ? 1 : -1;
      const norm = t.op === "mul" ? 1 : b.re * b.re + b.im * b.im;
      return { re: (a.re * b.re - sign * a.im * b.im) / norm, im: (a.im * b.re + sign * a.re * b.im) / norm };
    }
  }
}

/** d/ds by Cauchy's integral over a small circle about s: exact but for poles inside the circle. */
function derivative(t: Tree, omega: number, radius: number): Point {
  const points = 16;
  let [re, im] = [0, 0];
  for (let k = 0; k < points; k++) {
    const [c, d] = [Math.cos((2 * Math.PI * k) / points), Math.sin((2 * Math.PI * k) / points)];
    const f = asNumber(t, { re: radius * c, im: omega + radius * d });
    // f·e^(−jφ)/r
    re += (f.re * c + f.im * d) / (points * radius);
    im += (f.im * c - f.re * d) / (points * radius);
  }
  return { re, im };
}

describe("a dual number", () => {
  test("has the value and the derivative of random rational functions of s", () => {
    let compared = 0;
    fc.assert(
      fc.property(tree, fc.integer({ min: 10, max: 300 }), (t, n) => {
        const omega = n / 100;
        const found = asDual(t, omega);
        const value = asNumber(t, { re: 0, im: omega });
        if (!Number.isFinite(value.re) || !Number.isFinite(value.im)) return;
        const [coarse, fine] = [derivative(t, omega, 2e-2), derivative(t, omega, 1e-2)];
        const size = 1 + Math.hypot(value.re, value.im) + Math.hypot(fine.re, fine.im);
        expect(Math.hypot(found.re - value.re, found.im - value.im) / size).toBeLessThan(1e-9);
        // Two circles agree where no pole is near: only there is the numerical derivative one.
        if (!(Math.hypot(coarse.re - fine.re, coarse.im - fine.im) / size < 1e-9)) return;
        compared += 1;
        expect(Math.hypot(found.dre - fine.re, found.dim - fine.im) / size).toBeLessThan(1e-8);
      }),
      runs(3000),
    );
    expect(compared).toBeGreaterThan(1500);
  });

  test("addMul adds a product with its derivative", () => {
    const [a, b, c] = [new Dual().affine(1, 2, 3), new Dual().affine(-4, 0.5, 3), new Dual().affine(7, -1, 3)];
    const wanted = new Dual().add(c, new Dual().mul(a, b));
    expect([...c.addMul(a, b)]).toEqual([...wanted]);
    // By hand: (1 + 2s)(−4 + s/2) + 7 − s = s² − 8.5s + 3 at s = 3j: −6 − 25.5j; derivative 2s − 8.5.
    expect([...c]).toEqual([-6, -25.5, -8.5, 6]);
  });

  test("may be among its own arguments, whatever the operation", () => {
    const make = (): [Dual, Dual] => [new Dual().affine(1.5, -2, 0.7), new Dual().affine(-0.3, 4, 0.7)];
    for (const op of ["add", "sub", "mul", "div"] as const) {
      const [a, b] = make();
      const wanted = [...new Dual()[op](a, b)];
      expect([...a[op](a, b)]).toEqual(wanted);
      const [c, d] = make();
      expect([...d[op](c, d)]).toEqual(wanted);
      const [e] = make();
      expect([...e[op](e, e)]).toEqual([...new Dual()[op](make()[0], make()[0])]);
    }
    const [a] = make();
    const square = [...new Dual().add(a, new Dual().mul(a, a))];
    expect([...a.addMul(a, a)]).toEqual(square);
  });

  test("real is constant, and the four numbers have their names", () => {
    const a = new Dual().affine(2, 3, 5);
    expect([a.re, a.im, a.dre, a.dim]).toEqual([2, 15, 3, 0]);
    expect([...a.real(7)]).toEqual([7, 0, 0, 0]);
  });
});

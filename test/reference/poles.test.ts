/** Poles and zeros of boards whose polynomials can be written down, held against their coefficients. */
import * as fc from "fast-check";
import { describe, expect, test } from "vitest";
import { polesAndZeros, rootFigures, type Root } from "../../core/analysis/poles.ts";
import type { OpAmpModel, Project } from "../../core/model/project.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { runs } from "../fixtures/runs.ts";
import { bandOf, logUniform, oneBus, projectOf } from "../helpers/boards.ts";

type Polynomial = readonly number[];

/** Coefficients from the constant up. */
function times(a: Polynomial, b: Polynomial): number[] {
  const product = Array.from({ length: a.length + b.length - 1 }, () => 0);
  a.forEach((x, i) => b.forEach((y, j) => (product[i + j] += x * y)));
  return product;
}

function plus(...terms: readonly Polynomial[]): number[] {
  return Array.from({ length: Math.max(...terms.map((t) => t.length)) }, (_, i) => terms.reduce((sum, t) => sum + (t[i] ?? 0), 0));
}

/** Newton's step of a polynomial at a root that it is said to have, as a fraction of the root. */
function stepOf(polynomial: Polynomial, { re, im }: Root): number {
  let [pr, pi, dr, di] = [0, 0, 0, 0];
  for (const c of polynomial.toReversed()) {
    [dr, di] = [dr * re - di * im + pr, dr * im + di * re + pi];
    [pr, pi] = [pr * re - pi * im + c, pr * im + pi * re];
  }
  return Math.hypot(pr, pi) / Math.hypot(dr, di) / Math.hypot(re, im);
}

/** Every coefficient's worth of roots, each to 1e-9, and all of them: their product and the sum of their inverses are the coefficients'. */
function expectRoots(roots: readonly Root[], polynomial: Polynomial): void {
  expect(roots).toHaveLength(polynomial.length - 1);
  for (const root of roots) expect(stepOf(polynomial, root)).toBeLessThan(1e-9);
  const product = roots.reduce((p, r) => ({ re: p.re * r.re - p.im * r.im, im: p.re * r.im + p.im * r.re }), { re: 1, im: 0 });
  const degree = polynomial.length - 1;
  expect(product.re / ((degree % 2 === 0 ? 1 : -1) * (polynomial[0] / polynomial[degree]))).toBeCloseTo(1, 8);
  const inverses = roots.reduce((sum, r) => sum + r.re / (r.re * r.re + r.im * r.im), 0);
  // A high Q takes its own number of digits from this sum.
  expect(inverses / (-polynomial[1] / polynomial[0])).toBeCloseTo(1, 6);
}

// One band alone, ideal stage (algebra: core/blocks/boost-cut-stage/README.md). With Y′ = Y/(1 + Y·Ra·Rb/T), Z = 1/Y:
//   H = (Z + Ra·Rb/T + Rf·Rb/T) / (Z + Ra·Rb/T + Ri·Ra/T)
// so that zeros and poles are where the leg meets minus a resistance, Z(s) + R = 0.
const [TRACK, RI, RF, SOURCE] = [10e3, 3000, 4700, 0.01];
function resistances(position: number): { readonly poles: number; readonly zeros: number } {
  const [ra, rb] = [TRACK * (1 - position), TRACK * position];
  return { poles: (ra * rb + (RI + SOURCE) * ra) / TRACK, zeros: (ra * rb + RF * rb) / TRACK };
}

function lone(kind: "gyrator-section" | "inductor-section", values: Parameters<typeof bandOf>[2], position: number, opAmp: string, model?: OpAmpModel): Project {
  return oneBus([bandOf("b", kind, values, { opAmp, slider: { position } })], { inputR: RI, feedbackR: RF, sourceR: SOURCE, ...(model ? { opAmps: { house: model } } : {}) });
}

const positions = fc.constantFrom(0, 0.07, 0.5, 0.8, 1);

describe("a lone gyrator leg, ideal op amps", () => {
  // Z = Rs + 1/(s·C) + s·Lx/(1 + s·Cg·Rs), Lx = (Rg − Rs)·Rs·Cg (circuits; the simulated inductor of Berndt and Dutta Roy, 1969):
  //   s²·C·(Cg·Rs·(Rs + R) + Lx) + s·(C·(Rs + R) + Cg·Rs) + 1 = 0
  test("has the roots of its quadratic", () => {
    fc.assert(
      fc.property(logUniform(1e-9, 10e-6), logUniform(47, 2e3), logUniform(100e-12, 1e-6), logUniform(4.7e3, 470e3), positions, (c, rs, cg, rg, position) => {
        const { poles, zeros } = polesAndZeros(resolveBoard(lone("gyrator-section", { seriesC: c, seriesR: rs, gyratorC: cg, gyratorR: rg }, position, "ideal")));
        const quadratic = (r: number): Polynomial => [1, c * (rs + r) + cg * rs, c * (cg * rs * (rs + r) + (rg - rs) * rs * cg)];
        const at = resistances(position);
        expectRoots(poles, quadratic(at.poles));
        expectRoots(zeros, quadratic(at.zeros));
      }),
      runs(150),
    );
  });

  test("resonates, at full boost, with the leg's own f0 and Q (the losses of its parallel resistance included)", () => {
    const [c, rs, cg, rg] = [220e-9, 470, 3.9e-9, 68e3];
    const { poles } = polesAndZeros(resolveBoard(lone("gyrator-section", { seriesC: c, seriesR: rs, gyratorC: cg, gyratorR: rg }, 1, "ideal")));
    const { frequency, q } = rootFigures(poles[0]);
    // Z = 0: s²·C·Rg·Rs·Cg + s·Rs·(C + Cg) + 1, by hand.
    const omega = 1 / Math.sqrt(c * rg * rs * cg);
    expect(frequency).toBeCloseTo(omega / (2 * Math.PI), 6);
    expect(q).toBeCloseTo(1 / (omega * rs * (c + cg)), 9);
  });
});

describe("a lone gyrator leg whose op amp has one pole", () => {
  // v_o = v_n/(1 + e), e = 1/A; v_n = v_a·s·Tg/(1 + s·Tg), Tg = Cg·Rg. Currents out of a:
  //   Y = [(1 + e)(1 + s·Cg·Rs) + e·s·Tg] / (Rs·(1 + s·Tg)(1 + e))
  // and 1/Y + 1/(s·C) + R = 0 times s·C·[…] is a cubic in s.
  test("has the roots of its cubic", () => {
    fc.assert(
      fc.property(logUniform(1e-9, 10e-6), logUniform(47, 2e3), logUniform(100e-12, 1e-6), logUniform(4.7e3, 470e3), logUniform(1e4, 1e6), logUniform(1e6, 1e8), positions, (c, rs, cg, rg, openLoopGain, gainBandwidth, position) => {
        const model = { openLoopGain, gainBandwidth, inputR: 1e30, outputR: 0 };
        const { poles, zeros } = polesAndZeros(resolveBoard(lone("gyrator-section", { seriesC: c, seriesR: rs, gyratorC: cg, gyratorR: rg }, position, "house", model)));
        const [e0, e1] = [1 / openLoopGain, 1 / (2 * Math.PI * gainBandwidth)];
        const cubic = (r: number): Polynomial => plus(times([0, c * rs], times([1, cg * rg], [1 + e0, e1])), times([1, c * r], plus(times([1 + e0, e1], [1, cg * rs]), times([e0, e1], [0, cg * rg]))));
        const at = resistances(position);
        expectRoots(poles, cubic(at.poles));
        expectRoots(zeros, cubic(at.zeros));
      }),
      runs(150),
    );
  });
});

describe("a lone inductor leg", () => {
  // Z = Rs + 1/(s·C) + (Rw + s·L)/(1 + s·Cp·(Rw + s·L)), series R–L–C algebra.
  test("without self-capacitance has the roots of its quadratic", () => {
    fc.assert(
      fc.property(logUniform(1e-9, 10e-6), logUniform(10, 2e3), logUniform(1e-3, 5), fc.oneof(fc.constant(0), logUniform(1, 500)), positions, (c, rs, l, windingR, position) => {
        const { poles, zeros } = polesAndZeros(resolveBoard(lone("inductor-section", { seriesC: c, seriesR: rs, inductor: { value: l, windingR } }, position, "ideal")));
        const quadratic = (r: number): Polynomial => [1, c * (rs + windingR + r), c * l];
        const at = resistances(position);
        expectRoots(poles, quadratic(at.poles));
        expectRoots(zeros, quadratic(at.zeros));
      }),
      runs(150),
    );
  });

  test("with self-capacitance has the roots of its cubic", () => {
    fc.assert(
      fc.property(logUniform(1e-9, 10e-6), logUniform(10, 2e3), logUniform(1e-3, 5), logUniform(1, 500), logUniform(1e-12, 1e-9), positions, (c, rs, l, windingR, selfC, position) => {
        const { poles, zeros } = polesAndZeros(resolveBoard(lone("inductor-section", { seriesC: c, seriesR: rs, inductor: { value: l, windingR, selfC } }, position, "ideal")));
        const coil = [windingR, l];
        const cubic = (r: number): Polynomial => plus(times([1, c * (rs + r)], plus([1], times([0, selfC], coil))), times([0, c], coil));
        const at = resistances(position);
        expectRoots(poles, cubic(at.poles));
        expectRoots(zeros, cubic(at.zeros));
      }),
      runs(150),
    );
  });

  // R. Bristow-Johnson, Audio EQ Cookbook (W3C note): peaking form H = (s² + s·A/Q + 1)/(s² + s/(A·Q) + 1), A² = 1 + Rf/Rs.
  test("at full boost is the cookbook's peaking form: poles of Q·A, zeros of Q/A", () => {
    const [rs, l, c] = [390, 0.12, 220e-9];
    const { poles, zeros } = polesAndZeros(resolveBoard(lone("inductor-section", { seriesC: c, seriesR: rs, inductor: l }, 1, "ideal")));
    const a = Math.sqrt(1 + RF / rs);
    const legQ = Math.sqrt(l / c) / rs;
    expect(rootFigures(poles[0]).q).toBeCloseTo(legQ, 9);
    expect(rootFigures(zeros[0])).toMatchObject({ q: 0.5 });
    // Real zeros, since legQ/A² < 0.5: their sum is ω0·A²/legQ and their product ω0².
    expect((zeros[0].re + zeros[1].re) * -Math.sqrt(l * c)).toBeCloseTo(a ** 2 / legQ, 9);
    expect(zeros[0].re * zeros[1].re * l * c).toBeCloseTo(1, 9);
  });
});

describe("first-order ends of the chain (R–C algebra)", () => {
  test("coupling capacitors, a shelf and feedbackC, one root each where a pencil puts it", () => {
    const project = projectOf(
      [
        { id: "in", kind: "input", parts: { sourceR: { value: 600 }, couplingC: { value: 4.7e-6 }, loadR: { value: 47e3 } } },
        { id: "u", kind: "buffer", opAmp: "ideal" },
        { id: "eq", kind: "boost-cut-stage", opAmp: "ideal", parts: { inputR: { value: 3300 }, feedbackR: { value: 3300 }, feedbackC: { value: 100e-12 } } },
        { id: "out", kind: "output", parts: { seriesR: { value: 100 }, couplingC: { value: 10e-6 }, loadR: { value: 10e3 } } },
      ],
      [{ from: "in.out", to: "u.in" }, { from: "u.out", to: "eq.in" }, { from: "eq.out", to: "out.in" }],
    );
    const { poles, zeros, lnGain, sign } = polesAndZeros(resolveBoard(project));
    // No current flows in the stage without bands: feedbackC is there and does nothing, a pole and a zero together.
    const wanted = [-1 / (4.7e-6 * 47600), -1 / (10e-6 * 10100), -1 / (100e-12 * 3300)];
    expect(poles).toHaveLength(3);
    poles.forEach((p, i) => expect(p.re / wanted[i]).toBeCloseTo(1, 9));
    expect(zeros.slice(0, 2).map(({ re, im }) => [re, im])).toEqual([[0, 0], [0, 0]]);
    expect(zeros[2].re / wanted[2]).toBeCloseTo(1, 9);
    expect(sign).toBe(1);
    expect(Math.exp(lnGain)).toBeCloseTo((47e3 / 47600) * (10e3 / 10100), 9);
  });
});

import * as fc from "fast-check";
import { EigenvalueDecomposition, inverse, Matrix } from "ml-matrix";
import { describe, expect, test, vi } from "vitest";
import { polesAndZeros, rootFigures, unstablePoles, type PolesAndZeros, type Root } from "../../../core/analysis/poles.ts";
import { angular, logFrequencies } from "../../../core/analysis/response.ts";
import type { Project } from "../../../core/model/project.ts";
import { resolveBoard, type Board } from "../../../core/net/board.ts";
import { expandBoard } from "../../../core/net/expand.ts";
import { describeNetlist, nodalTransfer } from "../../../core/net/nodal.ts";
import { transferColumns } from "../../../core/net/transfer.ts";
import { ComplexLu } from "../../../core/num/complex-lu.ts";
import { DEMOS } from "../../fixtures/demos.ts";
import { withEnds } from "../../fixtures/ends.ts";
import { OSCILLATING } from "../../fixtures/oscillating.ts";
import { preciseStep, preciseTransfer } from "../../fixtures/precise.ts";
import { runs } from "../../fixtures/runs.ts";
import { bandOf, boardArbitrary, crowdedBoardArbitrary, oneBus, TABLE_OP_AMP } from "../../helpers/boards.ts";

vi.setConfig({ testTimeout: 60_000 });

const sizeOf = ({ re, im }: Root): number => Math.hypot(re, im);
const gyrator = { seriesC: 220e-9, seriesR: 470, gyratorC: 3.9e-9, gyratorR: 68e3 };

describe("the factored form", () => {
  const OMEGA = angular(logFrequencies(10, 100e3, 25));

  /** The largest difference between gain·Π(jω − zero)/Π(jω − pole) and the node equations, dB, phase included. */
  function apart(board: Board, { lnGain, sign, poles, zeros }: PolesAndZeros): number {
    const netlist = expandBoard(board);
    const dense = transferColumns(OMEGA.length, false);
    nodalTransfer(netlist, OMEGA, dense);
    const difference = (w: number, re: number, im: number): number => {
      let [ln, angle] = [lnGain, sign < 0 ? Math.PI : 0];
      for (const z of zeros) [ln, angle] = [ln + Math.log(Math.hypot(z.re, w - z.im)), angle + Math.atan2(w - z.im, -z.re)];
      for (const p of poles) [ln, angle] = [ln - Math.log(Math.hypot(p.re, w - p.im)), angle - Math.atan2(w - p.im, -p.re)];
      return (20 / Math.LN10) * Math.hypot(ln - Math.log(Math.hypot(re, im)), 2 * Math.sin((angle - Math.atan2(im, re)) / 2));
    };
    let worst = 0;
    for (let k = 0; k < OMEGA.length; k++) {
      let here = difference(OMEGA[k], dense.re[k], dense.im[k]);
      // On a board in a thousand the dense solve loses the digits: 44 of them tell.
      if (here > 5e-7) {
        const exact = preciseTransfer(netlist, OMEGA[k]);
        here = difference(OMEGA[k], exact.re, exact.im);
      }
      worst = Math.max(worst, here);
    }
    return worst;
  }

  test.each(DEMOS)("of %s gives the response back within 1e-6 dB", (_name, project) => {
    const board = resolveBoard(project);
    const found = polesAndZeros(board);
    expect(found.poles.length).toBeGreaterThan(10);
    expect(found.reproducedWithin).toBeLessThan(1e-6);
    expect(apart(board, found)).toBeLessThan(1e-6);
    expect(found.unstable).toEqual([]);
  });

  test("of random boards too, and never is a figure of it missing", () => {
    fc.assert(
      fc.property(boardArbitrary(), (project) => {
        const board = resolveBoard(project);
        const found = polesAndZeros(board);
        expect(found.reproducedWithin).toBeLessThan(1e-6);
        expect(apart(board, found)).toBeLessThan(1e-6);
        for (const { re, im } of [...found.poles, ...found.zeros]) expect(Number.isFinite(re) && Number.isFinite(im)).toBe(true);
      }),
      runs(300),
    );
  });

  test("of 31 bands of all kinds on one bus", () => {
    fc.assert(
      fc.property(crowdedBoardArbitrary, (project) => {
        const board = resolveBoard(project);
        const found = polesAndZeros(board);
        expect(found.reproducedWithin).toBeLessThan(1e-6);
        expect(apart(board, found)).toBeLessThan(1e-6);
      }),
      runs(12),
    );
  });

  test("tells a wrong table: a zero moved by a part in a thousand shows", () => {
    const board = resolveBoard(oneBus([bandOf("b", "gyrator-section", gyrator, { slider: { position: 0.8 } })]));
    const found = polesAndZeros(board);
    expect(apart(board, found)).toBeLessThan(1e-9);
    expect(apart(board, { ...found, zeros: found.zeros.map(({ re, im }) => ({ re: re * 1.001, im })) })).toBeGreaterThan(1e-4);
    expect(apart(board, { ...found, sign: -1 })).toBeGreaterThan(1);
    expect(apart(board, { ...found, lnGain: found.lnGain + 1e-3 })).toBeGreaterThan(8e-3);
  });
});

describe("the roots themselves", () => {
  test("are those that a general eigenvalue solver finds at a shift near them, to 1e-5, one for one", () => {
    let compared = 0;
    const compare = (project: Project): void => {
      const board = resolveBoard(project);
      const { poles } = polesAndZeros(board);
      const { size: n, conductance, storage } = describeNetlist(expandBoard(board));
      for (const sigma of [1e1, 1e3, 1e5]) {
        const rows = Array.from({ length: n }, (_, i) => {
          const g = Array.from({ length: n }, (_c, j) => conductance[i * n + j]);
          const c = Array.from({ length: n }, (_c, j) => storage[i * n + j]);
          const scale = Math.max(...g.map((x, j) => Math.abs(x + sigma * c[j])));
          return { a: g.map((x, j) => (x + sigma * c[j]) / scale), c: c.map((x) => (sigma * x) / scale) };
        });
        // (G + σC)⁻¹·σC has the eigenvalues κ = σ/(σ − s).
        const { realEigenvalues: re, imaginaryEigenvalues: im } = new EigenvalueDecomposition(inverse(new Matrix(rows.map((r) => r.a))).mmul(new Matrix(rows.map((r) => r.c))), { assumeSymmetric: false });
        const others = re.map((x, i): Root => {
          const norm = x * x + im[i] * im[i];
          return { re: sigma - (sigma * x) / norm, im: (sigma * im[i]) / norm };
        }).filter((root) => Number.isFinite(sizeOf(root)));
        const isNear = (root: Root): boolean => sizeOf(root) > sigma / 10 && sizeOf(root) <= sigma * 10;
        const nearest = (root: Root, list: readonly Root[]): number => Math.min(...list.map((o) => Math.hypot(o.re - root.re, o.im - root.im))) / sizeOf(root);
        const [mine, theirs] = [poles.filter(isNear), others.filter(isNear)];
        for (const root of mine) expect(nearest(root, others)).toBeLessThan(1e-5);
        for (const root of theirs) expect(nearest(root, poles)).toBeLessThan(1e-5);
        expect(Math.abs(mine.length - theirs.length)).toBeLessThanOrEqual([...mine, ...theirs].some((r) => Math.abs(sizeOf(r) / sigma - 0.1) < 1e-5 || Math.abs(sizeOf(r) / sigma - 10) < 1e-3) ? 1 : 0);
        compared += mine.length;
      }
    };
    fc.assert(fc.property(boardArbitrary({ mostBands: 4, mostInChain: 3 }), compare), runs(60));
    fc.assert(fc.property(crowdedBoardArbitrary, compare), runs(4));
    expect(compared).toBeGreaterThan(500);
  });

  test("keep nine digits from slow to fast on random boards, by a Newton step in 44 digits", () => {
    let checked = 0;
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 2, mostInChain: 2 }), (project) => {
        const board = resolveBoard(project);
        const netlist = expandBoard(board);
        const { poles, zeros } = polesAndZeros(board);
        for (const [roots, isZero] of [[poles, false], [zeros, true]] as const) {
          for (const root of roots) {
            // Far slower or faster roots hang on differences of conductances that 16 digits do not hold.
            if (sizeOf(root) < 1e-2 || sizeOf(root) > 1e7 || root.im < 0) continue;
            expect(preciseStep(netlist, root, isZero)).toBeLessThan(1e-9);
            checked += 1;
          }
        }
      }),
      runs(40),
    );
    expect(checked).toBeGreaterThan(200);
  });

  test("keep them on one board with time constants from 10 s to 1 ns", () => {
    const fast = { openLoopGain: 1e5, gainBandwidth: 160e6, inputR: 1e9, outputR: 0 };
    const chain = withEnds(oneBus([bandOf("b", "gyrator-section", gyrator, { opAmp: "fast", slider: { position: 0.9 } })], { opAmp: "fast", opAmps: { fast } }), { in: { couplingC: { value: 1e-6 }, loadR: { value: 100e3 } } });
    const project: Project = {
      ...chain,
      blocks: [...chain.blocks, { id: "u", kind: "buffer", opAmp: "fast" }],
      wires: [...chain.wires.filter((w) => w.to !== "out.in"), { from: "eq.out", to: "u.in" }, { from: "u.out", to: "out.in" }],
      supply: { kind: "single", voltage: 9, reference: { upperR: { value: 20e3 }, lowerR: { value: 20e3 }, bypassC: { value: 1000e-6 } } },
    };
    const board = resolveBoard(project);
    const { poles, zeros, reproducedWithin } = polesAndZeros(board);
    // 10 kΩ with 1000 µF, and the unity-gain loop of a 160 MHz amplifier.
    expect(Math.min(...poles.map(sizeOf))).toBeCloseTo(0.1, 2);
    expect(Math.max(...poles.map(sizeOf)) / (2 * Math.PI * 160e6)).toBeCloseTo(1, 4);
    expect(reproducedWithin).toBeLessThan(1e-9);
    for (const root of poles) expect(preciseStep(expandBoard(board), root)).toBeLessThan(1e-9);
    for (const root of zeros.filter((z) => sizeOf(z) > 0)) expect(preciseStep(expandBoard(board), root, true)).toBeLessThan(1e-9);
  });

  test("count as the argument of det(G + jωC) says, right half plane included", () => {
    let unstable = 0;
    const expectCount = (board: Board, { poles, unstable: right }: PolesAndZeros): void => {
      // From ω = 0 to ∞ the argument turns by a quarter for every pole on the left, back by one for every pole on the right.
      const away = poles.filter((p) => sizeOf(p) > 0);
      const [slowest, fastest] = [Math.min(...away.map(sizeOf)), Math.max(...away.map(sizeOf))];
      const turn = argumentTurn(board, slowest * 1e-4, fastest * 1e3);
      expect(Math.round(turn / (Math.PI / 2))).toBe(away.length - 2 * right.length);
      unstable += right.length;
    };
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 3, mostInChain: 3 }), (project) => {
        const board = resolveBoard(project);
        expectCount(board, polesAndZeros(board));
      }),
      runs(60),
    );
    for (const project of Object.values(OSCILLATING)) expectCount(resolveBoard(project), polesAndZeros(resolveBoard(project)));
    expect(unstable).toBeGreaterThanOrEqual(4);
  });

  test("come in pairs, conjugate to the last bit, slowest first", () => {
    fc.assert(
      fc.property(boardArbitrary(), (project) => {
        const { poles, zeros } = polesAndZeros(resolveBoard(project));
        for (const roots of [poles, zeros]) {
          for (const root of roots) expect(roots.filter((r) => r.re === root.re && r.im === -root.im).length).toBeGreaterThan(0);
          for (let i = 1; i < roots.length; i++) expect(sizeOf(roots[i])).toBeGreaterThanOrEqual(sizeOf(roots[i - 1]) * (1 - 1e-12));
        }
      }),
      runs(80),
    );
  });

  test("move with the positions of the run: cut mirrors boost, so poles and zeros change places", () => {
    const bands = [bandOf("a", "gyrator-section", gyrator), bandOf("b", "inductor-section", { seriesC: 1e-6, seriesR: 220, inductor: 1.2 }), bandOf("c", "shelf-section", { seriesC: 10e-9, seriesR: 470 })];
    const board = resolveBoard(oneBus(bands, { inputR: 3000 - 0.01 }));
    const boosted = polesAndZeros(board, { positions: { a: 0.9, b: 0.3, c: 1 } });
    const cut = polesAndZeros(board, { positions: { a: 0.1, b: 0.7, c: 0 } });
    expect(boosted.zeros).toHaveLength(5);
    const expectSame = (a: readonly Root[], b: readonly Root[]): void => a.forEach((root, i) => expect(Math.hypot(root.re - b[i].re, root.im - b[i].im) / sizeOf(root)).toBeLessThan(1e-10));
    expectSame(boosted.zeros, cut.poles);
    expectSame(boosted.poles, cut.zeros);
    expect(Math.abs(sizeOf(boosted.zeros[0]) / sizeOf(boosted.poles[0]) - 1)).toBeGreaterThan(0.01);
    expect(polesAndZeros(board, { positions: {} })).toEqual(polesAndZeros(board));
  });
});

/** How far arg det(G + jωC) turns between two frequencies (rad/s), in steps small enough to follow. */
function argumentTurn(board: Board, from: number, to: number): number {
  const { size: n, conductance, storage } = describeNetlist(expandBoard(board));
  const lu = new ComplexLu(n);
  const angleAt = (ln: number): number => {
    lu.re.set(conductance);
    for (let i = 0; i < n * n; i++) lu.im[i] = Math.exp(ln) * storage[i];
    // The determinant of the rows as they stand by plain elimination, apart from the solver's own bookkeeping of exchanges.
    const rows = Array.from({ length: n }, (_, i) => Array.from({ length: n }, (_c, j) => [lu.re[i * n + j], lu.im[i * n + j]] as [number, number]));
    for (const row of rows) {
      const scale = 1 / Math.max(...row.map(([x, y]) => Math.abs(x) + Math.abs(y)));
      for (const entry of row) [entry[0], entry[1]] = [entry[0] * scale, entry[1] * scale];
    }
    let angle = 0;
    for (let k = 0; k < n; k++) {
      let best = k;
      for (let i = k + 1; i < n; i++) if (Math.hypot(...rows[i][k]) > Math.hypot(...rows[best][k])) best = i;
      if (best !== k) {
        [rows[k], rows[best]] = [rows[best], rows[k]];
        angle += Math.PI;
      }
      const [pr, pi] = rows[k][k];
      angle += Math.atan2(pi, pr);
      const norm = pr * pr + pi * pi;
      for (let i = k + 1; i < n; i++) {
        const [ar, ai] = rows[i][k];
        if (ar === 0 && ai === 0) continue;
        const [fr, fi] = [(ar * pr + ai * pi) / norm, (ai * pr - ar * pi) / norm];
        for (let j = k + 1; j < n; j++) {
          const [ur, ui] = rows[k][j];
          rows[i][j][0] -= fr * ur - fi * ui;
          rows[i][j][1] -= fr * ui + fi * ur;
        }
      }
    }
    return angle;
  };
  const turnBetween = (a: number, b: number, angleA: number, angleB: number, depth: number): number => {
    const turn = angleB - angleA - 2 * Math.PI * Math.round((angleB - angleA) / (2 * Math.PI));
    if (depth === 0 || (b - a < 0.3 && Math.abs(turn) < 0.7)) return turn;
    const middle = (a + b) / 2;
    const angle = angleAt(middle);
    return turnBetween(a, middle, angleA, angle, depth - 1) + turnBetween(middle, b, angle, angleB, depth - 1);
  };
  const [a, b] = [Math.log(from), Math.log(to)];
  return turnBetween(a, b, angleAt(a), angleAt(b), 22);
}

describe("zeros at the origin", () => {
  const bands = [bandOf("b", "gyrator-section", gyrator, { opAmp: "table" })];
  const chain = (opAmp: string): Project => oneBus(bands, { opAmp, opAmps: { table: TABLE_OP_AMP } });
  const nought = (roots: readonly Root[]): number => roots.filter((r) => r.re === 0 && r.im === 0).length;

  test.each([
    ["none without a coupling capacitor", {}, 0],
    ["one for a coupling capacitor in front", { in: { couplingC: { value: 4.7e-6 }, loadR: { value: 100e3 } } }, 1],
    ["one for a coupling capacitor behind", { out: { couplingC: { value: 10e-6 } } }, 1],
    ["two for both, exact although they are one and the same root", { in: { couplingC: { value: 4.7e-6 }, loadR: { value: 100e3 } }, out: { couplingC: { value: 10e-6 } } }, 2],
    ["and for both alike", { in: { couplingC: { value: 1e-6 }, loadR: { value: 10e3 } }, out: { couplingC: { value: 1e-6 }, loadR: { value: 10e3 } } }, 2],
  ] as const)("%s", (_about, ends, count) => {
    for (const opAmp of ["table", "ideal"]) {
      const { zeros, poles, reproducedWithin } = polesAndZeros(resolveBoard(withEnds(chain(opAmp), ends)));
      expect(nought(zeros)).toBe(count);
      expect(nought(poles)).toBe(0);
      expect(reproducedWithin).toBeLessThan(1e-9);
    }
  });

  test("a capacitor into an ideal input keeps its charge: a pole and a zero at the origin, and no instability", () => {
    const board = resolveBoard(withEnds(chain("ideal"), { in: { couplingC: { value: 4.7e-6 } } }));
    const { poles, zeros, unstable, reproducedWithin } = polesAndZeros(board);
    // The stage's + input takes no current, so nothing discharges the capacitor but the band's track into its leg, which blocks.
    expect([nought(poles), nought(zeros)]).toEqual([1, 1]);
    expect(unstable).toEqual([]);
    expect(unstablePoles(board)).toEqual([]);
    expect(reproducedWithin).toBeLessThan(1e-9);
  });

  test("a capacitor into a very high input resistance discharges slowly, and that is no instability either", () => {
    const open = { openLoopGain: 1e7, gainBandwidth: 1e7, inputR: 1e12, outputR: 0 };
    const board = resolveBoard(withEnds(oneBus([], { opAmp: "open", opAmps: { open } }), { in: { couplingC: { value: 100e-6 } } }));
    const found = polesAndZeros(board);
    expect(found.unstable).toEqual([]);
    expect(found.reproducedWithin).toBeLessThan(1e-9);
  });
});

describe("corners", () => {
  test.each([0, 0.5, 1])("sliders at %d with endR 0, outputR 0 and ideal op amps in every mixture", (position) => {
    for (const [stage, leg] of [["ideal", "ideal"], ["ideal", "stiff"], ["stiff", "ideal"], ["stiff", "stiff"], ["table", "stiff"], ["stiff", "table"]]) {
      const slider = { position, endR: 0 };
      const bands = [bandOf("a", "gyrator-section", gyrator, { opAmp: leg, slider }), bandOf("b", "inductor-section", { seriesC: 1e-6, seriesR: 220, inductor: { value: 1.2, windingR: 90, selfC: 60e-12 } }, { slider }), bandOf("c", "low-shelf-section", { seriesR: 1e3, gyratorC: 47e-9, gyratorR: 100e3, blockingC: 47e-6 }, { opAmp: leg, slider })];
      const board = resolveBoard(oneBus(bands, { opAmp: stage, opAmps: { table: TABLE_OP_AMP, stiff: { ...TABLE_OP_AMP, outputR: 0 } } }));
      const { poles, unstable, reproducedWithin } = polesAndZeros(board);
      expect(reproducedWithin).toBeLessThan(1e-8);
      expect(unstable).toEqual([]);
      // Two capacitors and an amplifier's pole a gyrator; capacitor, coil and winding of the inductor leg.
      const amps = [stage, leg, leg].filter((name) => name !== "ideal").length;
      expect(poles.length).toBe(2 + 3 + 2 + amps);
    }
  });

  test("a board of resistors alone has neither poles nor zeros", () => {
    const found = polesAndZeros(resolveBoard(oneBus([bandOf("v", "level-section", { seriesR: 680 }, { slider: { position: 1 } })])));
    expect(found.poles).toEqual([]);
    expect(found.zeros).toEqual([]);
    // The stage's gain with 10 mΩ in the source and the output: 1 + 3000/680.
    expect(Math.exp(found.lnGain)).toBeCloseTo(1 + 3000 / 680, 5);
    expect(found.sign).toBe(1);
    expect(found.reproducedWithin).toBeLessThan(1e-12);
  });

  test("frequency and Q by hand", () => {
    expect(rootFigures({ re: -3, im: 4 })).toEqual({ frequency: 5 / (2 * Math.PI), q: 5 / 6 });
    expect(rootFigures({ re: 3, im: 4 }).q).toBe(-5 / 6);
    expect(rootFigures({ re: -7, im: 0 })).toEqual({ frequency: 7 / (2 * Math.PI), q: 0.5 });
    expect(rootFigures({ re: 0, im: 0 })).toEqual({ frequency: 0, q: null });
  });
});

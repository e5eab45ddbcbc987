import * as fc from "fast-check";
import { describe, expect, test, vi } from "vitest";
import { angular, logFrequencies } from "../../core/analysis/response.ts";
import type { Project } from "../../core/model/project.ts";
import { resolveBoard, type Board } from "../../core/net/board.ts";
import { expandBoard } from "../../core/net/expand.ts";
import { nodalTransfer } from "../../core/net/nodal.ts";
import { compileBoard, Sweep } from "../../core/net/star.ts";
import { transferColumns, type TransferColumns } from "../../core/net/transfer.ts";
import type { ValueOpts } from "../../core/net/values.ts";
import { preciseTransfer, type PreciseTransfer } from "../fixtures/precise.ts";
import { runs } from "../fixtures/runs.ts";
import { bandOf, boardArbitrary, crowdedBoardArbitrary, oneBus, positionArbitrary, tenBandBoard } from "../helpers/boards.ts";

vi.setConfig({ testTimeout: 30_000 });

const OMEGA = angular(logFrequencies(10, 40e3, 13));

/** 1e-9 dB as a relative difference of |H|, and 1e-9 rad. */
const GAIN_BOUND = 1e-9 * (Math.LN10 / 20);
const PHASE_BOUND = 1e-9;
const SLOPE_BOUND = 1e-7;

function star(board: Board, omega: Float64Array, isWithSlope: boolean, opts: ValueOpts = {}): TransferColumns {
  const compiled = compileBoard(board, opts);
  const out = transferColumns(omega.length, isWithSlope);
  new Sweep(compiled, omega).run(compiled.positions, out);
  return out;
}

function nodal(board: Board, omega: Float64Array, opts: ValueOpts = {}): TransferColumns {
  const out = transferColumns(omega.length, true);
  nodalTransfer(expandBoard(board, opts), omega, out);
  return out;
}

function pointOf(columns: TransferColumns, index: number): PreciseTransfer {
  return { re: columns.re[index], im: columns.im[index], slopeRe: columns.slopeRe?.[index] ?? NaN, slopeIm: columns.slopeIm?.[index] ?? NaN };
}

/** A slope of H smaller than this at ω is none: the rounding of H itself, over ω. */
function leastSlope(size: number, omega: number): number {
  return (1e-15 * size) / omega;
}

/** Whether two answers agree as closely as is asked for; NaN agrees with nothing. */
function agrees(a: PreciseTransfer, b: PreciseTransfer, isWithSlope: boolean, omega: number): boolean {
  const [size, other] = [Math.hypot(a.re, a.im), Math.hypot(b.re, b.im)];
  const angle = Math.atan2(a.im * b.re - a.re * b.im, a.re * b.re + a.im * b.im);
  const isSame = Math.abs(Math.log(size / other)) < GAIN_BOUND && Math.abs(angle) < PHASE_BOUND;
  if (!isWithSlope) return isSame;
  return isSame && Math.hypot(a.slopeRe - b.slopeRe, a.slopeIm - b.slopeIm) <= SLOPE_BOUND * Math.hypot(b.slopeRe, b.slopeIm) + leastSlope(other, omega);
}

/**
 * Holds the fast solver to the node equations at every frequency. On a board in a thousand the dense solve itself loses
 * the digits (nearly cancelling conductances, a deep notch): there the same equations in 44 digits must bear the fast one
 * out, within the same bounds. Returns how often they had to.
 */
function expectSame(board: Board, fast: TransferColumns, isWithSlope: boolean, opts: ValueOpts = {}): number {
  const reference = nodal(board, OMEGA, opts);
  let arbitrated = 0;
  for (let k = 0; k < OMEGA.length; k++) {
    if (agrees(pointOf(fast, k), pointOf(reference, k), isWithSlope, OMEGA[k])) continue;
    arbitrated += 1;
    const exact = preciseTransfer(expandBoard(board, opts), OMEGA[k]);
    if (!agrees(pointOf(fast, k), exact, isWithSlope, OMEGA[k])) throw new Error(`at ${OMEGA[k] / 2 / Math.PI} Hz the fast solver gives ${JSON.stringify(pointOf(fast, k))}, the node equations ${JSON.stringify(exact)}`);
  }
  return arbitrated;
}

describe("the fast solver equals the node equations", () => {
  test("on random boards: gain to 1e-9 dB, phase to 1e-9 rad, slope to 1e-7", () => {
    let arbitrated = 0;
    let points = 0;
    fc.assert(
      fc.property(boardArbitrary(), (project: Project) => {
        const board = resolveBoard(project);
        arbitrated += expectSame(board, star(board, OMEGA, false), false);
        arbitrated += expectSame(board, star(board, OMEGA, true), true);
        points += 2 * OMEGA.length;
      }),
      runs(800),
    );
    // The dense solver is the reference: it may fall short now and then, not as a rule.
    expect(arbitrated / points).toBeLessThan(0.01);
  });

  test("on straight boards of many bands", () => {
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 12, mostInChain: 2, isStraight: true }), (project) => {
        const board = resolveBoard(project);
        expectSame(board, star(board, OMEGA, false), false);
        expectSame(board, star(board, OMEGA, true), true);
      }),
      runs(100),
    );
  });

  test("on a bus of 31 bands of all kinds", () => {
    fc.assert(
      fc.property(crowdedBoardArbitrary, (project) => {
        const board = resolveBoard(project);
        expectSame(board, star(board, OMEGA, false), false);
        expectSame(board, star(board, OMEGA, true), true);
      }),
      runs(20),
    );
  });

  test("and the node equations in 44 digits, to a hundred times less", () => {
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 3, mostInChain: 4 }), fc.integer({ min: 1000, max: 4600 }), (project, at) => {
        const board = resolveBoard(project);
        const omega = new Float64Array([2 * Math.PI * 10 ** (at / 1000)]);
        const exact = preciseTransfer(expandBoard(board), omega[0]);
        const size = Math.hypot(exact.re, exact.im);
        for (const isWithSlope of [false, true]) {
          const fast = pointOf(star(board, omega, isWithSlope), 0);
          expect(Math.hypot(fast.re - exact.re, fast.im - exact.im) / size).toBeLessThan(GAIN_BOUND / 100);
          if (isWithSlope) expect(Math.hypot(fast.slopeRe - exact.slopeRe, fast.slopeIm - exact.slopeIm)).toBeLessThanOrEqual((SLOPE_BOUND / 1000) * Math.hypot(exact.slopeRe, exact.slopeIm) + leastSlope(size, omega[0]));
        }
      }),
      runs(250),
    );
  });

  test("with measured values asked for, and not otherwise", () => {
    const project = tenBandBoard();
    const blocks = project.blocks.map((b) => (b.id === "b1000" ? { ...b, parts: { ...b.parts, seriesC: { value: 0.22e-6, measured: 0.25e-6 } }, slider: { track: { value: 10e3, measured: 9e3 }, position: 1 } } : b));
    const board = resolveBoard({ ...project, blocks });
    const measured = star(board, OMEGA, true, { isMeasured: true });
    const named = star(board, OMEGA, true);
    expectSame(board, measured, true, { isMeasured: true });
    expectSame(board, named, true);
    expect(Math.abs(measured.re[7] - named.re[7])).toBeGreaterThan(1e-3);
  });
});

describe("a sweep", () => {
  const withPositions = fc.tuple(boardArbitrary(), fc.array(positionArbitrary, { minLength: 40, maxLength: 40 }));

  test("that is kept while sliders move equals one made afresh, digit for digit", () => {
    fc.assert(
      fc.property(withPositions, ([project, wanted]) => {
        const board = resolveBoard(project);
        const compiled = compileBoard(board);
        const sweep = new Sweep(compiled, OMEGA);
        const kept = transferColumns(OMEGA.length, false);
        sweep.run(compiled.positions, kept);
        const positions = Float64Array.from(compiled.bands, (_, i) => wanted[i]);
        sweep.run(positions, kept);
        const byId = Object.fromEntries(compiled.bands.map((band, i) => [band.id, wanted[i]]));
        const fresh = star(board, OMEGA, false, { positions: byId });
        expect(kept).toEqual(fresh);
        const keptSlope = transferColumns(OMEGA.length, true);
        sweep.run(positions, keptSlope);
        expect(keptSlope).toEqual(star(board, OMEGA, true, { positions: byId }));
        // The positions of a run that goes back give what they gave before.
        sweep.run(compiled.positions, kept);
        expect(kept).toEqual(star(board, OMEGA, false));
      }),
      runs(100),
    );
  });

  test("takes the file's position for a band that the run does not name", () => {
    const board = resolveBoard(oneBus([bandOf("a", "level-section", { seriesR: 500 }, { slider: { position: 0.9 } }), bandOf("b", "level-section", { seriesR: 500 }, { slider: { position: 0.2 } })]));
    expect([...compileBoard(board).positions]).toEqual([0.9, 0.2]);
    expect([...compileBoard(board, { positions: { b: 1 } }).positions]).toEqual([0.9, 1]);
    expect(compileBoard(board).bands.map((b) => [b.id, b.index])).toEqual([["a", 0], ["b", 1]]);
  });

  test("of one point that is retuned equals one made for that frequency, digit for digit", () => {
    fc.assert(
      fc.property(boardArbitrary(), (project) => {
        const compiled = compileBoard(resolveBoard(project));
        const point = new Sweep(compiled, new Float64Array([1]));
        for (const isWithSlope of [false, true]) {
          for (const omega of [OMEGA[3], OMEGA[9]]) {
            const out = transferColumns(1, isWithSlope);
            point.retune(omega);
            point.run(compiled.positions, out);
            const fresh = transferColumns(1, isWithSlope);
            new Sweep(compiled, new Float64Array([omega])).run(compiled.positions, fresh);
            expect(out).toEqual(fresh);
          }
        }
      }),
      runs(60),
    );
  });

  test("is the same with slopes and without, on either kind of supply", () => {
    fc.assert(
      fc.property(boardArbitrary(), (project) => {
        const board = resolveBoard(project);
        const sloped = star(board, OMEGA, true);
        const plain = star(board, OMEGA, false);
        for (let k = 0; k < OMEGA.length; k++) expect(Math.hypot(sloped.re[k] - plain.re[k], sloped.im[k] - plain.im[k])).toBeLessThanOrEqual(1e-12 * Math.hypot(plain.re[k], plain.im[k]));
      }),
      runs(200),
    );
  });
});

describe("the weight of a band", () => {
  test("1 is as it stands; 0 is as if it were not there, slope and shared reference included", () => {
    fc.assert(
      fc.property(boardArbitrary(), fc.array(fc.boolean(), { minLength: 40, maxLength: 40 }), (project, wanted) => {
        const board = resolveBoard(project);
        const compiled = compileBoard(board);
        const kept = new Set(compiled.bands.filter((_, i) => wanted[i]).map((b) => b.id));
        const hung = new Set(compiled.bands.map((b) => b.id));
        const isThere = (id: string): boolean => !hung.has(id) || kept.has(id);
        const fewer = resolveBoard({ ...project, blocks: project.blocks.filter((b) => isThere(b.id)), wires: project.wires.filter((w) => isThere(w.to.slice(0, -".bus".length))) });
        const weights = Float64Array.from(compiled.bands, (_, i) => (wanted[i] ? 1 : 0));
        for (const isWithSlope of [false, true]) {
          const sweep = new Sweep(compiled, OMEGA);
          const [weighted, whole] = [transferColumns(OMEGA.length, isWithSlope), transferColumns(OMEGA.length, isWithSlope)];
          sweep.run(compiled.positions, weighted, weights);
          const without = star(fewer, OMEGA, isWithSlope);
          for (let k = 0; k < OMEGA.length; k++) expect(agrees(pointOf(weighted, k), pointOf(without, k), isWithSlope, OMEGA[k])).toBe(true);
          sweep.run(compiled.positions, whole);
          expect(whole).toEqual(star(board, OMEGA, isWithSlope));
        }
      }),
      runs(80),
    );
  });
});

describe("corners", () => {
  test("a slider a hair from its end does what the end does", () => {
    for (const [hair, end] of [[5e-324, 0], [1e-300, 0], [1 - 2 ** -53, 1]] as const) {
      const at = (position: number): TransferColumns => star(resolveBoard(oneBus([bandOf("a", "gyrator-section", { seriesC: 1e-7, seriesR: 470, gyratorC: 4.7e-9, gyratorR: 1e5 }, { opAmp: "TL072", slider: { position } })])), OMEGA, false);
      const [near, exact] = [at(hair), at(end)];
      for (let k = 0; k < OMEGA.length; k++) expect(Math.hypot(near.re[k] - exact.re[k], near.im[k] - exact.im[k])).toBeLessThan(1e-12);
    }
  });

  test("a single supply whose reference is an ideal follower does what a split one does", () => {
    const single = (opAmp: string | undefined): Project => ({
      ...tenBandBoard(),
      supply: { kind: "single", voltage: 9, reference: { upperR: { value: 10e3 }, lowerR: { value: 10e3 }, bypassC: { value: 1e-6 }, ...(opAmp === undefined ? {} : { opAmp }) } },
    });
    const positions = { b32: 1, b64: 0.2, b1000: 0.8 };
    const split = star(resolveBoard(tenBandBoard()), OMEGA, true, { positions });
    expect(star(resolveBoard(single("ideal")), OMEGA, true, { positions })).toEqual(split);
    // Without it the divider's impedance is shared, and the low bands feel each other through it.
    const shared = star(resolveBoard(single(undefined)), OMEGA, true, { positions });
    expect(Math.abs(shared.re[2] - split.re[2])).toBeGreaterThan(1e-3);
  });

  test("a dead-end branch loads what drives it", () => {
    const plain = oneBus([], { sourceR: 1000 });
    const branched: Project = {
      ...plain,
      blocks: [...plain.blocks, { id: "side", kind: "boost-cut-stage", opAmp: "ideal", parts: { inputR: { value: 1000 }, feedbackR: { value: 1000 } } }, bandOf("leak", "level-section", { seriesR: 1000 }, { slider: { position: 0 } })],
      wires: [...plain.wires, { from: "in.out", to: "side.in" }, { from: "side.bus", to: "leak.bus" }],
    };
    // By hand: at full cut the leg hangs on the + input, so the branch takes 1 V over 2 kΩ: H = 2000/(1000 + 2000).
    const loaded = star(resolveBoard(branched), OMEGA, false);
    const alone = star(resolveBoard(plain), OMEGA, false);
    for (let k = 0; k < OMEGA.length; k++) {
      expect(alone.re[k]).toBeCloseTo(1, 5);
      expect(loaded.re[k]).toBeCloseTo(2 / 3, 5);
    }
  });
});

test("positions for some bands leave the others as they stand, whatever these are called", () => {
  const board = tenBandBoard();
  const band = board.blocks.find((b) => b.slider)!;
  const renamed = (id: string): Project => ({
    ...board,
    blocks: board.blocks.map((b) => (b.id === band.id ? { ...b, id } : b)),
    wires: board.wires.map((w) => (w.to === `${band.id}.bus` ? { ...w, to: `${id}.bus` } : w)),
  });
  const positionsOf = (project: Project): Float64Array => compileBoard(resolveBoard(project), { positions: {} }).positions;
  for (const id of ["constructor", "toString", "__proto__"]) expect(positionsOf(renamed(id))).toEqual(positionsOf(board));
});

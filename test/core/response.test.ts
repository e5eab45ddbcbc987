import * as fc from "fast-check";
import { describe, expect, test, vi } from "vitest";
import { angular, decibels, logFrequencies, respond, ResponseSweep } from "../../core/analysis/response.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { compileBoard } from "../../core/net/star.ts";
import { netlistOf, nodalH } from "../fixtures/figures.ts";
import { preciseTransfer } from "../fixtures/precise.ts";
import { runs } from "../fixtures/runs.ts";
import { bandOf, boardArbitrary, oneBus, positionArbitrary, tenBandBoard } from "../helpers/boards.ts";

vi.setConfig({ testTimeout: 30_000 });

describe("log-spaced frequencies", () => {
  test("keep both ends exact and a constant ratio", () => {
    const ends = fc.tuple(fc.integer({ min: 1, max: 20_000 }), fc.integer({ min: 20_001, max: 1_000_000 }), fc.integer({ min: 2, max: 500 }));
    fc.assert(
      fc.property(ends, ([from, to, points]) => {
        const f = logFrequencies(from / 7, to / 7, points);
        expect(f).toHaveLength(points);
        expect([f[0], f[points - 1]]).toEqual([from / 7, to / 7]);
        for (let k = 1; k < points; k++) expect(f[k] / f[k - 1] / (to / from) ** (1 / (points - 1))).toBeCloseTo(1, 11);
      }),
      runs(200),
    );
  });

  test("angular frequencies and decibels are what they are called", () => {
    expect([...angular(new Float64Array([1, 1000]))]).toEqual([2 * Math.PI, 2000 * Math.PI]);
    expect(decibels(3, 4)).toBeCloseTo(20 * Math.log10(5), 13);
    expect(decibels(0, -0.1)).toBeCloseTo(-20, 13);
  });
});

describe("the response", () => {
  const GRID = logFrequencies(10, 40e3, 241);

  test("of a coupling capacitor by hand: gain, phase and delay of a first-order high pass", () => {
    // 1 µF into 10 kΩ behind 10 mΩ: sRC/(1 + sRC); φ = 90° − atan(ωRC), delay = RC/(1 + (ωRC)²).
    const plain = oneBus([], { loadR: 1e9 });
    const project = { ...plain, blocks: plain.blocks.map((b) => (b.kind === "output" ? { ...b, parts: { seriesR: { value: 0.01 }, couplingC: { value: 1e-6 }, loadR: { value: 10e3 } } } : b)) };
    const { gain, phase, groupDelay, frequency } = respond(compileBoard(resolveBoard(project)), GRID);
    const rc = 1e-6 * 10_000.01;
    for (let k = 0; k < GRID.length; k++) {
      const x = 2 * Math.PI * frequency[k] * rc;
      expect(gain[k]).toBeCloseTo(20 * Math.log10((x / Math.hypot(1, x)) * (10e3 / 10_000.01)), 10);
      expect(phase[k]).toBeCloseTo(90 - (Math.atan(x) * 180) / Math.PI, 9);
      expect(groupDelay[k] / (rc / (1 + x * x))).toBeCloseTo(1, 9);
    }
  });

  test("has the gain of the node equations, and a phase that differs from theirs by whole turns", () => {
    fc.assert(
      fc.property(boardArbitrary(), (project) => {
        const frequency = logFrequencies(10, 40e3, 31);
        const { gain, phase } = respond(compileBoard(resolveBoard(project)), frequency);
        const { re, im } = nodalH(netlistOf(project), frequency);
        for (let k = 0; k < frequency.length; k++) {
          expect(Math.abs(gain[k] - 20 * Math.log10(Math.hypot(re[k], im[k])))).toBeLessThan(1e-6);
          const turns = (phase[k] - (Math.atan2(im[k], re[k]) * 180) / Math.PI) / 360;
          expect(Math.abs(turns - Math.round(turns))).toBeLessThan(1e-8);
        }
      }),
      runs(150),
    );
  });

  test("has the group delay that an eighth-order difference of the exact phase gives", () => {
    const weights = [4 / 5, -1 / 5, 4 / 105, -1 / 280];
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 3, mostInChain: 3 }), fc.integer({ min: 1100, max: 4500 }), (project, at) => {
        const f = 10 ** (at / 1000);
        const netlist = netlistOf(project);
        const w = 2 * Math.PI * f;
        const angle = (omega: number): number => {
          const { re, im } = preciseTransfer(netlist, omega);
          return Math.atan2(im, re);
        };
        const step = w * 2e-3;
        let slope = 0;
        weights.forEach((weight, n) => {
          const difference = angle(w + (n + 1) * step) - angle(w - (n + 1) * step);
          slope += (weight * (difference - 2 * Math.PI * Math.round(difference / (2 * Math.PI)))) / step;
        });
        const [delay] = respond(compileBoard(resolveBoard(project)), new Float64Array([f])).groupDelay;
        // 1e-8 of a radian over ω is what the difference itself resolves; near a sharp notch its step is too long for more.
        expect(Math.abs(delay + slope)).toBeLessThan(1e-5 * Math.abs(slope) + 1e-8 / w);
      }),
      runs(30),
    );
  });

  test("has one phase whether it is asked for at 2 points or at 4001", () => {
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 4, mostInChain: 5 }), (project) => {
        const compiled = compileBoard(resolveBoard(project));
        const [coarse, fine] = [respond(compiled, logFrequencies(10, 40e3, 2)), respond(compiled, logFrequencies(10, 40e3, 4001))];
        expect(coarse.phase[0]).toBe(fine.phase[0]);
        expect(Math.abs(coarse.phase[1] - fine.phase[4000])).toBeLessThan(1e-6);
      }),
      runs(30),
    );
  });

  test("turns round more than once where several stages turn it: no jump between neighbours", () => {
    // Four stages with heavy feedbackC make low passes in a row.
    const stages = [0, 1, 2, 3, 4, 5];
    const project = {
      ...oneBus([]),
      blocks: [
        { id: "in", kind: "input" as const, parts: { sourceR: { value: 10 } } },
        ...stages.map((n) => ({ id: `s${n}`, kind: "boost-cut-stage" as const, opAmp: "NE5532", parts: { inputR: { value: 3000 }, feedbackR: { value: 3000 } } })),
        ...stages.map((n) => bandOf(`b${n}`, "gyrator-section", { seriesC: 220e-9, seriesR: 470, gyratorC: 3.9e-9, gyratorR: 68e3 }, { opAmp: "TL072", slider: { position: 0 } })),
        { id: "out", kind: "output" as const, parts: { seriesR: { value: 100 }, couplingC: { value: 1e-7 }, loadR: { value: 10e3 } } },
      ],
      wires: [
        { from: "in.out", to: "s0.in" },
        ...stages.slice(1).map((n) => ({ from: `s${n - 1}.out`, to: `s${n}.in` })),
        ...stages.map((n) => ({ from: `s${n}.bus`, to: `b${n}.bus` })),
        { from: "s5.out", to: "out.in" },
      ],
    };
    const compiled = compileBoard(resolveBoard(project));
    const { phase, frequency } = respond(compiled, logFrequencies(1, 1e8, 4001));
    expect(Math.max(...phase) - Math.min(...phase)).toBeGreaterThan(540);
    for (let k = 1; k < phase.length; k++) expect(Math.abs(phase[k] - phase[k - 1])).toBeLessThan(90);
    const ends = respond(compiled, new Float64Array([frequency[0], frequency[4000]]));
    expect(Math.abs(ends.phase[1] - phase[4000])).toBeLessThan(1e-6);
  });

  test("while sliders move is the same as worked out afresh", () => {
    const board = resolveBoard(tenBandBoard());
    const compiled = compileBoard(board);
    const live = new ResponseSweep(compiled, GRID);
    fc.assert(
      fc.property(fc.array(positionArbitrary, { minLength: 10, maxLength: 10 }), (positions) => {
        const { gain, phase } = live.run(Float64Array.from(positions));
        const fresh = respond(compileBoard(board, { positions: Object.fromEntries(compiled.bands.map((b, i) => [b.id, positions[i]])) }), GRID);
        for (let k = 0; k < GRID.length; k++) {
          expect(Math.abs(gain[k] - fresh.gain[k])).toBeLessThan(1e-10);
          expect(Math.abs(phase[k] - fresh.phase[k])).toBeLessThan(1e-8);
        }
      }),
      runs(40),
    );
  });
});

/** Loop margins against the closed forms of one-pole and two-pole amplifiers. */
import * as fc from "fast-check";
import { describe, expect, test } from "vitest";
import { loopMargins, smallestMargin, type LoopMargin } from "../../core/analysis/stability.ts";
import type { Block, OpAmpModel, Project } from "../../core/model/project.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { runs } from "../fixtures/runs.ts";
import { logUniform, projectOf } from "../helpers/boards.ts";

const DEGREES = 180 / Math.PI;

function chain(block: Block, model: OpAmpModel, ends: { readonly sourceR: number; readonly seriesR: number; readonly couplingC?: number; readonly loadR: number }): Project {
  const out = { seriesR: { value: ends.seriesR }, loadR: { value: ends.loadR }, ...(ends.couplingC === undefined ? {} : { couplingC: { value: ends.couplingC } }) };
  return projectOf([{ id: "in", kind: "input", parts: { sourceR: { value: ends.sourceR } } }, block, { id: "out", kind: "output", parts: out }], [{ from: "in.out", to: `${block.id}.in` }, { from: `${block.id}.out`, to: "out.in" }], { opAmps: { house: model } });
}

function only(project: Project): LoopMargin {
  const margins = loopMargins(resolveBoard(project));
  expect(margins).toHaveLength(1);
  return margins[0];
}

const FOLLOWER: Block = { id: "u", kind: "buffer", opAmp: "house" };
const model = fc.record({ openLoopGain: logUniform(1e4, 1e7), gainBandwidth: logUniform(1e5, 1e8), inputR: logUniform(1e4, 1e12), outputR: fc.oneof(fc.constant(0), logUniform(1, 500)) });

describe("a one-pole loop, T = A·β with β real", () => {
  // |A·β| = 1 at f = (GBW/A0)·√((A0·β)² − 1), where A's angle is −atan(f·A0/GBW): first-order algebra.
  function expectOnePole(found: LoopMargin, { openLoopGain: a0, gainBandwidth }: OpAmpModel, beta: number): void {
    const tangent = Math.sqrt((a0 * beta) ** 2 - 1);
    expect(found.crossover! / ((gainBandwidth / a0) * tangent)).toBeCloseTo(1, 8);
    expect(found.phaseMargin).toBeCloseTo(180 - Math.atan(tangent) * DEGREES, 6);
    expect(found.gainMargin).toBeNull();
    expect(found.phaseCrossing).toBeNull();
  }

  test("a follower: β is what outputR, load, source and input resistance leave", () => {
    fc.assert(
      fc.property(model, logUniform(1, 1e5), logUniform(100, 1e5), (amp, sourceR, loadR) => {
        const load = 1 / (100 + loadR) + 1 / (amp.inputR + sourceR);
        const beta = amp.inputR / (amp.inputR + sourceR) / (1 + amp.outputR * load);
        expectOnePole(only(chain(FOLLOWER, amp, { sourceR, seriesR: 100, loadR })), amp, beta);
      }),
      runs(100),
    );
  });

  test("a stage without bands: the feedback goes through feedbackR and inputR past the input resistance", () => {
    fc.assert(
      fc.property(model, logUniform(500, 1e5), logUniform(500, 1e5), logUniform(100, 1e5), (amp, inputR, feedbackR, loadR) => {
        const stage: Block = { id: "eq", kind: "boost-cut-stage", opAmp: "house", parts: { inputR: { value: inputR }, feedbackR: { value: feedbackR } } };
        const round = feedbackR + amp.inputR + inputR + 50;
        const beta = amp.inputR / round / (1 + amp.outputR * (1 / (100 + loadR) + 1 / round));
        expectOnePole(only(chain(stage, amp, { sourceR: 50, seriesR: 100, loadR })), amp, beta);
      }),
      runs(100),
    );
  });

  test("by hand: a plain follower has 90 degrees at its gain-bandwidth", () => {
    const found = only(chain(FOLLOWER, { openLoopGain: 1e5, gainBandwidth: 1e7, inputR: 1e12, outputR: 0 }, { sourceR: 1, seriesR: 1, loadR: 1e6 }));
    expect(found).toMatchObject({ source: "u.opAmp", block: "u" });
    expect(found.phaseMargin).toBeCloseTo(90, 2);
    expect(found.crossover! / 1e7).toBeCloseTo(1, 6);
  });

  test("a loop whose gain is below 1 throughout has no margin to speak of", () => {
    const found = only(chain({ ...FOLLOWER }, { openLoopGain: 1e3, gainBandwidth: 1e6, inputR: 1e4, outputR: 500 }, { sourceR: 1e9, seriesR: 1, loadR: 1 }));
    expect(found).toMatchObject({ phaseMargin: null, crossover: null, gainMargin: null, phaseCrossing: null });
    expect(smallestMargin([found])).toBeUndefined();
  });
});

describe("a follower with a capacitive load through its output resistance: the classic two-pole loop", () => {
  const exact = { openLoopGain: 2e5, gainBandwidth: 3e6, inputR: 1e12, outputR: 125 };

  // A(f)·Z/(Z + outputR) with Z = seriesR + loadR + 1/(jωC), its crossing found here by halving.
  function byHalving(amp: OpAmpModel, r: number, c: number): { readonly crossover: number; readonly phaseMargin: number } {
    const at = (f: number): { size: number; angle: number } => {
      const [x, xo] = [2 * Math.PI * f * c * r, 2 * Math.PI * f * c * (r + amp.outputR)];
      const corner = (f * amp.openLoopGain) / amp.gainBandwidth;
      return { size: (amp.openLoopGain / Math.hypot(1, corner)) * (Math.hypot(1, x) / Math.hypot(1, xo)), angle: -Math.atan(corner) + Math.atan(x) - Math.atan(xo) };
    };
    let [low, high] = [100, 1e10];
    for (let i = 0; i < 200; i++) {
      const middle = Math.sqrt(low * high);
      if (at(middle).size > 1) low = middle;
      else high = middle;
    }
    return { crossover: low, phaseMargin: 180 + at(low).angle * DEGREES };
  }

  test("margin and crossover are those of the exact loop gain, load resistance included", () => {
    fc.assert(
      fc.property(logUniform(1e-11, 1e-5), logUniform(1e-3, 1e3), logUniform(1, 500), logUniform(1e5, 1e8), (c, r, outputR, gainBandwidth) => {
        const amp = { ...exact, outputR, gainBandwidth };
        const found = only(chain(FOLLOWER, amp, { sourceR: 1e-3, seriesR: r / 2, couplingC: c, loadR: r / 2 }));
        const wanted = byHalving(amp, r, c);
        expect(found.crossover! / wanted.crossover).toBeCloseTo(1, 8);
        expect(found.phaseMargin).toBeCloseTo(wanted.phaseMargin, 5);
        // Two poles never turn the loop by half a circle.
        expect(found.phaseMargin).toBeGreaterThan(0);
        expect(found.gainMargin).toBeNull();
      }),
      runs(150),
    );
  });

  // Textbook: with f2 = 1/(2π·Ro·C), f_c² = (f2²/2)·(√(1 + 4·(GBW/f2)²) − 1) and the margin is 90° − atan(f_c/f2).
  test.each([100e-12, 1e-9, 10e-9, 100e-9])("%d F: the textbook's two-pole margin within 0.01 degrees", (c) => {
    const f2 = 1 / (2 * Math.PI * exact.outputR * c);
    const crossover = Math.sqrt((f2 ** 2 / 2) * (Math.sqrt(1 + 4 * (exact.gainBandwidth / f2) ** 2) - 1));
    const found = only(chain(FOLLOWER, exact, { sourceR: 1e-3, seriesR: 1e-6, couplingC: c, loadR: 1e-6 }));
    expect(found.crossover! / crossover).toBeCloseTo(1, 4);
    expect(Math.abs(found.phaseMargin! - (90 - Math.atan(crossover / f2) * DEGREES))).toBeLessThan(0.01);
  });
});

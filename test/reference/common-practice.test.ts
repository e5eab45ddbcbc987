/** Rules of the trade without a source of their own: common practice. */
import { describe, expect, test, vi } from "vitest";
import { bandFigures } from "../../core/analysis/bands.ts";
import { logFrequencies } from "../../core/analysis/response.ts";
import type { Block } from "../../core/model/project.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { centredBut, netlistOf, nodalGain } from "../fixtures/figures.ts";
import { bandOf, oneBus } from "../helpers/boards.ts";

vi.setConfig({ testTimeout: 30_000 });

describe("lone leg (common practice)", () => {
  const project = oneBus([bandOf("b", "inductor-section", { seriesC: 1 / ((2 * Math.PI * 95.75) ** 2 * 1.842), seriesR: 330, inductor: 1.842 })], { inputR: 3300 - 0.01, feedbackR: 3300 });
  const [figure] = bandFigures(resolveBoard(project));

  test("1.842 H with 330 Ω resonating at 95.75 Hz has Q 3.36", () => {
    expect(figure.resonance).toBeCloseTo(95.75, 9);
    expect(Math.abs(figure.legQ! - 3.36)).toBeLessThan(0.005);
  });

  test("alone on its bus it loses nothing: peak at its resonance, 1 + 3300/330 = 11, boost and cut", () => {
    expect(figure.boost.frequency! / 95.75).toBeCloseTo(1, 9);
    expect(figure.boost.peak).toBeCloseTo(20 * Math.log10(11), 5);
    expect(figure.cut.frequency! / 95.75).toBeCloseTo(1, 9);
    expect(figure.cut.peak).toBeCloseTo(-20 * Math.log10(11), 5);
    expect(Math.abs(figure.interactionLoss)).toBeLessThan(1e-5);
    // −3 dB from an 11-fold peak |1 + 10/(1 + jx)|: 121/2 = (121 + x²)/(1 + x²), x² = 60.5/59.5, and Q = legQ/x.
    expect(figure.boost.q).toBeCloseTo(figure.legQ! / Math.sqrt(60.5 / 59.5), 5);
  });
});

describe("broadband level control (common practice)", () => {
  test.each([
    ["gain 5.545 is 14.88 dB", 3000, 3000 / 4.545, 5.545, 14.88],
    ["1 + 3300/330 = 11 is 20.83 dB", 3300, 330, 11, 20.83],
  ])("%s, at all frequencies, and its inverse at full cut", (_name, feedbackR, seriesR, gain, decibels) => {
    const project = oneBus([bandOf("level", "level-section", { seriesR })], { inputR: feedbackR - 0.01, feedbackR });
    const frequency = logFrequencies(10, 40e3, 21);
    for (const value of nodalGain(netlistOf(project, { level: 1 }), frequency)) {
      expect(value).toBeCloseTo(20 * Math.log10(gain), 6);
      expect(Math.abs(value - decibels)).toBeLessThan(0.005);
    }
    for (const value of nodalGain(netlistOf(project, { level: 0 }), frequency)) expect(Math.abs(value + decibels)).toBeLessThan(0.005);
    const [figure] = bandFigures(resolveBoard(project));
    expect(Math.abs(figure.boost.peak - decibels)).toBeLessThan(0.005);
    expect(Math.abs(figure.cut.peak + decibels)).toBeLessThan(0.005);
    expect(Math.abs(figure.isolatedBoost - decibels)).toBeLessThan(0.005);
  });

  test("5.545 is 1.39 % under 15 dB", () => {
    const project = oneBus([bandOf("level", "level-section", { seriesR: 3000 / 4.545 })]);
    const [value] = nodalGain(netlistOf(project, { level: 1 }), [1000]);
    expect(Math.abs((1 - 10 ** (value / 20) / 10 ** (15 / 20)) * 100 - 1.39)).toBeLessThan(0.01);
  });
});

describe("interaction on a seven-band board (common practice)", () => {
  // Octave bands of equal leg Q (1.7) and equal isolated boost, so that neighbours alone make the difference. A rule of
  // thumb: that the end bands lose least Q holds for such tracks (20 kΩ and up); with 10 kΩ the sums of all the tracks
  // weigh more than the neighbours, and it turns round.
  const centres = [125, 250, 500, 1000, 2000, 4000, 8000];
  const [seriesR, feedbackR, track] = [390, 3000, 20e3];
  const bands: Block[] = centres.map((f) => {
    const inductor = (1.7 * seriesR) / (2 * Math.PI * f);
    return bandOf(`b${f}`, "inductor-section", { seriesC: 1 / ((2 * Math.PI * f) ** 2 * inductor), seriesR, inductor }, { slider: { track: { value: track } } });
  });
  const figures = bandFigures(resolveBoard(oneBus(bands, { inputR: feedbackR - 0.01, feedbackR })));

  test("neighbours cost a boost about 5 dB", () => {
    for (const { interactionLoss } of figures) {
      expect(interactionLoss).toBeGreaterThan(3);
      expect(interactionLoss).toBeLessThan(7);
    }
    const mean = figures.reduce((sum, f) => sum + f.interactionLoss, 0) / figures.length;
    expect(Math.abs(mean - 5)).toBeLessThan(1);
  });

  test("and lower its Q against the band alone on its bus", () => {
    figures.forEach((figure, index) => {
      const [alone] = bandFigures(resolveBoard(oneBus([bands[index]], { inputR: feedbackR - 0.01, feedbackR })));
      expect(Math.abs(alone.interactionLoss)).toBeLessThan(1e-4);
      expect(figure.boost.q!).toBeLessThan(alone.boost.q!);
    });
  });

  test("the end bands, with one neighbour, lose least boost", () => {
    for (const { interactionLoss } of figures.slice(1, -1)) expect(interactionLoss).toBeGreaterThan(Math.max(figures[0].interactionLoss, figures[6].interactionLoss) + 0.3);
  });

  test("and least Q", () => {
    // About the middle of the two edges on the log axis: a neighbour on one side pulls the peak off that middle, and
    // peak/(upper − lower) then differs between a lowest and a highest band that mirror each other.
    const q = figures.map(({ boost }) => Math.sqrt(boost.lower! * boost.upper!) / (boost.upper! - boost.lower!));
    expect(q[0]).toBeCloseTo(q[6], 2);
    for (const inner of q.slice(1, -1)) expect(Math.min(q[0], q.at(-1)!)).toBeGreaterThan(inner);
  });

  test("what one band does shows at its neighbours' centres less and less the further off they are", () => {
    const project = oneBus(bands, { inputR: feedbackR - 0.01, feedbackR });
    const gain = nodalGain(netlistOf(project, centredBut(project, { b1000: 1 })), centres);
    for (let i = 1; i <= 3; i++) expect(gain[i]).toBeGreaterThan(gain[i - 1]);
    for (let i = 3; i < 6; i++) expect(gain[i]).toBeGreaterThan(gain[i + 1]);
  });
});

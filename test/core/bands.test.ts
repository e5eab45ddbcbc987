/** Band figures, each found again by searching alone on the general node equations. */
import { readFileSync } from "node:fs";
import { describe, expect, test, vi } from "vitest";
import { bandFigures, type BandPeak } from "../../core/analysis/bands.ts";
import { logFrequencies } from "../../core/analysis/response.ts";
import { BLOCKS } from "../../core/blocks/index.ts";
import type { Project } from "../../core/model/project.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { centredBut, netlistOf, nodalGain, searchPeak } from "../fixtures/figures.ts";
import { bandOf, oneBus, tenBandBoard } from "../helpers/boards.ts";

vi.setConfig({ testTimeout: 30_000 });

const demo = (name: string): Project => restoreProject(readFileSync(new URL(`../../assets/demo/${name}.bandwright`, import.meta.url), "utf8")).project;

const BOARDS: Readonly<Record<string, Project>> = {
  "the ten-band table": tenBandBoard(),
  "a voice channel with a shelf": demo("saltmarsh-voice-channel"),
  "inductors, shelves and a level on one bus": oneBus(
    [
      bandOf("low", "low-shelf-section", { seriesR: 1000, gyratorC: 100e-9, gyratorR: 100e3 }, { opAmp: "TL072" }),
      bandOf("mid", "inductor-section", { seriesC: 220e-9, seriesR: 390, inductor: { value: 0.12, windingR: 45, selfC: 1e-10 } }),
      bandOf("presence", "inductor-section", { seriesC: 22e-9, seriesR: 390, inductor: { value: 0.04, windingR: 20 } }),
      bandOf("high", "shelf-section", { seriesC: 10e-9, seriesR: 680 }),
    ],
    { opAmp: "NE5532" },
  ),
};

function expectPeak(found: BandPeak, project: Project, id: string, position: 0 | 1, near: number): void {
  const searched = searchPeak(netlistOf(project, centredBut(project, { [id]: position })), near / 3, near * 3, position === 1 ? 1 : -1);
  expect(Math.abs(found.peak - searched.peak)).toBeLessThan(1e-7);
  // The top of a parabola is seen to the root of the rounding only.
  expect(Math.abs(found.frequency! / searched.frequency - 1)).toBeLessThan(3e-6);
  for (const [own, other] of [[found.lower, searched.lower], [found.upper, searched.upper]] as const) {
    if (Number.isNaN(other)) expect(own).toBeNull();
    else expect(Math.abs(own! / other - 1)).toBeLessThan(1e-7);
  }
  if (found.q !== null) expect(Math.abs(found.q / searched.q - 1)).toBeLessThan(1e-5);
}

describe.each(Object.entries(BOARDS))("%s", (_name, project) => {
  const figures = bandFigures(resolveBoard(project));
  const resonant = figures.filter((f) => BLOCKS[f.kind].shape === "resonance");

  test("has a row for every band on a bus", () => expect(figures.map((f) => f.id)).toEqual(resolveBoard(project).chain.flatMap((item) => item.bands.map((b) => b.id))));

  // Half of the bands a board, evenly: the search is slow.
  test.each(resonant.filter((_, n) => n % 2 === 0).map((f) => [f.id, f] as const))("%s: peak, frequency, −3 dB points and Q at both ends, found again by search", (id, figure) => {
    expectPeak(figure.boost, project, id, 1, figure.resonance!);
    expectPeak(figure.cut, project, id, 0, figure.resonance!);
    expect(figure.interactionLoss).toBe(figure.isolatedBoost - figure.boost.peak);
    expect(figure.boost.lower! < figure.boost.frequency! && figure.boost.frequency! < figure.boost.upper!).toBe(true);
  });

  test("does not depend on where the sliders stand", () => {
    const moved = { ...project, blocks: project.blocks.map((b, n) => (b.slider ? { ...b, slider: { ...b.slider, position: (n * 37) % 101 / 100 } } : b)) };
    expect(bandFigures(resolveBoard(moved))).toEqual(figures);
  });
});

describe("shelves", () => {
  test.each([
    ["high", "shelf-section", { seriesC: 10e-9, seriesR: 680 }, 100e6],
    ["low", "low-shelf-section", { seriesR: 1000, gyratorC: 220e-9, gyratorR: 100e3 }, 1e-3],
  ] as const)("a lone %s shelf: the plateau far out, and the corner where half of it, in dB, is reached", (id, kind, values, far) => {
    // The source counted in, so that centred is 0 dB and the effect of the slider is the response itself.
    const project = oneBus([bandOf(id, kind, values, { opAmp: "ideal" })], { inputR: 3000 - 0.01 });
    const [figure] = bandFigures(resolveBoard(project));
    for (const [position, found] of [[1, figure.boost], [0, figure.cut]] as const) {
      const netlist = netlistOf(project, { [id]: position });
      const [plateau, corner] = nodalGain(netlist, [far, found.frequency!]);
      expect(Math.abs(found.peak - plateau)).toBeLessThan(1e-4);
      expect(Math.abs(corner - found.peak / 2)).toBeLessThan(1e-6);
      expect(found.q).toBeNull();
    }
    expect(figure.boost.peak).toBeCloseTo(figure.isolatedBoost, 1);
    expect(figure.cut.peak).toBeCloseTo(-figure.isolatedBoost, 1);
  });

  test("a level has a plateau at all frequencies, and no corner", () => {
    const project = oneBus([bandOf("level", "level-section", { seriesR: 680 })]);
    const [{ boost, cut, resonance, inductance, legQ }] = bandFigures(resolveBoard(project));
    expect(boost.peak).toBeCloseTo(20 * Math.log10(1 + 3000 / 680), 4);
    expect(cut.peak).toBeCloseTo(-20 * Math.log10(1 + 3000.01 / 680), 4);
    expect([boost.frequency, cut.frequency, boost.q, boost.lower, boost.upper, resonance, inductance, legQ]).toEqual(Array(8).fill(null));
  });
});

test("a shelf whose plateau lies where the op amps begin to tire is read at its extremum, not on a flat further out", () => {
  const channel = demo("saltmarsh-voice-channel");
  const added = [
    bandOf("low", "low-shelf-section", { seriesR: 1000, gyratorC: 47e-9, gyratorR: 100e3 }, { opAmp: "TL072" }),
    bandOf("level", "level-section", { seriesR: 680 }),
    bandOf("high", "shelf-section", { seriesC: 10e-9, seriesR: 470 }),
  ];
  const project = { ...channel, blocks: [...channel.blocks, ...added], wires: [...channel.wires, ...added.map((b) => ({ from: "eq.bus", to: `${b.id}.bus` }))] };
  const { boost, cut } = bandFigures(resolveBoard(project)).find((f) => f.id === "high")!;
  for (const [figure, position] of [[boost, 1], [cut, 0]] as const) {
    const sign = position === 1 ? 1 : -1;
    const frequency = logFrequencies(40e3, 250e3, 2001);
    const gain = nodalGain(netlistOf(project, centredBut(project, { high: position })), [...frequency]).map((g) => sign * g);
    const at = gain.indexOf(Math.max(...gain));
    // An extremum inside the range, and the same one.
    expect(at).toBeGreaterThan(0);
    expect(at).toBeLessThan(gain.length - 1);
    expect(Math.abs(sign * figure.peak - gain[at])).toBeLessThan(1e-5);
  }
  expect(Math.abs(boost.peak + cut.peak)).toBeLessThan(0.5);
});

describe("a low shelf that the input's coupling capacitor cuts off", () => {
  const coupled = (couplingC: number, gyratorC: number): Project => {
    const plain = oneBus([bandOf("low", "low-shelf-section", { seriesR: 390, gyratorC, gyratorR: 100e3 }, { opAmp: "TL072" })], { opAmp: "NE5532", inputR: 3000, feedbackR: 3000, loadR: 10e3 });
    return { ...plain, blocks: plain.blocks.map((b) => (b.id === "in" ? { ...b, parts: { ...b.parts, couplingC: { value: couplingC }, loadR: { value: 10e3 } } } : b)) };
  };

  test.each([
    [10e-6, 47e-9],
    [2.2e-6, 220e-9],
    [1e-6, 47e-9],
    [0.47e-6, 100e-9],
    [0.22e-6, 100e-9],
  ])("of %d F, with %d F in its gyrator: its boost is read where the response is highest", (couplingC, gyratorC) => {
    const project = coupled(couplingC, gyratorC);
    const [figure] = bandFigures(resolveBoard(project));
    const gain = nodalGain(netlistOf(project, { low: 1 }), [...logFrequencies(1, 1000, 3001)]);
    expect(figure.boost.peak).toBeCloseTo(Math.max(...gain), 4);
    expect(figure.boost.frequency).toBeGreaterThan(5);
  });

  test("before anything is left of it has no boost to speak of, and none is made up elsewhere", () => {
    const [{ boost, cut }] = bandFigures(resolveBoard(coupled(0.22e-6, 470e-9)));
    for (const { peak } of [boost, cut]) expect(Math.abs(peak)).toBeLessThan(4);
  });
});

test("a board without bands has no figures", () => expect(bandFigures(resolveBoard(oneBus([])))).toEqual([]));

test("measured values count where they are asked for", () => {
  const project = oneBus([bandOf("b", "inductor-section", { seriesC: { value: 220e-9, measured: 250e-9 }, seriesR: 390, inductor: 0.12 })]);
  const [[named], [measured]] = [bandFigures(resolveBoard(project)), bandFigures(resolveBoard(project), { isMeasured: true })];
  expect(measured.resonance! / named.resonance!).toBeCloseTo(Math.sqrt(220 / 250), 9);
  expect(measured.boost.frequency! / named.boost.frequency!).toBeCloseTo(Math.sqrt(220 / 250), 4);
});

test("a shelf's plateau is read past its own corner, not on the skirts of a band beside it", () => {
  const project = oneBus(
    [
      bandOf("mid", "gyrator-section", { seriesC: 180e-9, seriesR: 470, gyratorC: 3.3e-9, gyratorR: 91e3 }, { opAmp: "TL072" }),
      bandOf("near", "gyrator-section", { seriesC: 22e-9, seriesR: 470, gyratorC: 390e-12, gyratorR: 100e3 }, { opAmp: "TL072" }),
      bandOf("high", "shelf-section", { seriesC: 22e-9, seriesR: 680 }),
    ],
    { opAmp: "NE5532" },
  );
  const { boost, cut } = bandFigures(resolveBoard(project)).find((f) => f.id === "high")!;
  // Three octaves above the leg's corner of 10.6 kHz the capacitor is a wire.
  const far = 2 ** 3 / (2 * Math.PI * 22e-9 * 680);
  for (const [figure, position] of [[boost, 1], [cut, 0]] as const) {
    expect(Math.abs(figure.peak - nodalGain(netlistOf(project, centredBut(project, { high: position })), [far])[0])).toBeLessThan(0.7);
    expect(figure.frequency!).toBeGreaterThan(5e3);
  }
});

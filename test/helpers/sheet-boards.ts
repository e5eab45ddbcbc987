import type { Block, Project } from "../../core/model/project.ts";
import { newProject } from "../../core/model/new-project.ts";

/** A gyrator section tuned near a frequency, for tests that need many. */
export function gyratorAt(frequency: number, id = `b${Math.round(frequency)}`): Block {
  const scale = 1000 / frequency;
  return {
    id,
    kind: "gyrator-section",
    label: frequency >= 1000 ? `${frequency / 1000} kHz` : `${frequency} Hz`,
    opAmp: "TL072",
    slider: { track: { value: 50e3 }, law: "linear", position: 0.5, endR: 0 },
    parts: { seriesC: { value: 220e-9 * scale }, seriesR: { value: 470 }, gyratorC: { value: 3.9e-9 * scale }, gyratorR: { value: 62e3 } },
  };
}

/** A project with one stage and these bands on its bus. */
export function boardOf(bands: readonly Block[]): Project {
  const project = newProject();
  return { ...project, blocks: [...project.blocks, ...bands], wires: [...project.wires, ...bands.map((band) => ({ from: "eq.bus", to: `${band.id}.bus` }))] };
}

/** A project with the bands dealt over two stages by turns. */
export function twoStages(bands: readonly Block[]): Project {
  const { blocks, ...rest } = newProject();
  const [input, stage, output] = blocks;
  return {
    ...rest,
    blocks: [input, stage, { ...stage, id: "eq2" }, ...bands, output],
    wires: [
      { from: "in.out", to: "eq.in" }, { from: "eq.out", to: "eq2.in" }, { from: "eq2.out", to: "out.in" },
      ...bands.map((band, index) => ({ from: index % 2 === 0 ? "eq.bus" : "eq2.bus", to: `${band.id}.bus` })),
    ],
  };
}

/** Third-octave centres from 20 Hz to 20 kHz (ISO 266). */
export const THIRD_OCTAVES = [
  20, 25, 31.5, 40, 50, 63, 80, 100, 125, 160, 200, 250, 315, 400, 500, 630, 800, 1000, 1250, 1600, 2000, 2500, 3150, 4000, 5000, 6300, 8000, 10000, 12500, 16000, 20000,
];

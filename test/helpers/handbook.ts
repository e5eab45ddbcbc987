import { PROJECT_FORMAT, PROJECT_VERSION, type Block, type OpAmpModel, type Project } from "../../core/model/project.ts";

/** The op amp of the independent analysis that the ten-band table is held against. */
export const HANDBOOK_OP_AMP: OpAmpModel = { openLoopGain: 1e5, gainBandwidth: 10e6, inputR: 300e3, outputR: 50 };

/** Ten-band octave table, Audio/Radio Handbook, National Semiconductor, 1980, from memory: nominal Hz, gyratorC, seriesC, gyratorR, seriesR. */
export const HANDBOOK_BANDS: readonly (readonly [hz: number, gyratorC: number, seriesC: number, gyratorR: number, seriesR: number])[] = [
  [32, 0.12e-6, 4.7e-6, 75e3, 560],
  [64, 0.056e-6, 3.3e-6, 68e3, 510],
  [125, 0.033e-6, 1.5e-6, 62e3, 510],
  [250, 0.015e-6, 0.82e-6, 68e3, 470],
  [500, 8200e-12, 0.39e-6, 62e3, 470],
  [1000, 3900e-12, 0.22e-6, 68e3, 470],
  [2000, 2000e-12, 0.1e-6, 68e3, 470],
  [4000, 1100e-12, 0.056e-6, 62e3, 470],
  [8000, 510e-12, 0.022e-6, 68e3, 510],
  [16000, 330e-12, 0.012e-6, 51e3, 510],
];

/** The handbook table on one bus: stage resistors 3 kΩ, tracks 10 kΩ, next to nothing before and after it. */
export function tenBandTable(opAmp = "handbook"): Project {
  return oneBus(HANDBOOK_BANDS.map((row, index) => band(`b${HANDBOOK_BANDS[index][0]}`, row, opAmp)), opAmp);
}

/** A board of any number of gyrator bands, spread evenly over 20 Hz–20 kHz on one bus. */
export function gyratorBoard(bands: number, opAmp = "handbook"): Project {
  return oneBus(
    Array.from({ length: bands }, (_, index) => {
      const f = 20 * 1000 ** (bands === 1 ? 0.5 : index / (bands - 1));
      const [seriesR, gyratorR, q] = [470, 68e3, (1.4 * bands) / 10];
      const inductance = (q * seriesR) / (2 * Math.PI * f);
      return band(`b${index + 1}`, [f, inductance / (seriesR * gyratorR), 1 / ((2 * Math.PI * f) ** 2 * inductance), gyratorR, seriesR], opAmp);
    }),
    opAmp,
  );
}

function band(id: string, [, gyratorC, seriesC, gyratorR, seriesR]: (typeof HANDBOOK_BANDS)[number], opAmp: string): Block {
  const parts = { seriesC: { value: seriesC }, seriesR: { value: seriesR }, gyratorC: { value: gyratorC }, gyratorR: { value: gyratorR } };
  return { id, kind: "gyrator-section", opAmp, slider: { track: { value: 10e3 }, law: "linear", position: 0.5, endR: 0 }, parts };
}

function oneBus(bands: readonly Block[], opAmp: string): Project {
  return {
    format: PROJECT_FORMAT,
    version: PROJECT_VERSION,
    name: `${bands.length} gyrator bands`,
    supply: { kind: "split", positive: 15, negative: 15 },
    blocks: [
      { id: "in", kind: "input", parts: { sourceR: { value: 1e-3 } } },
      { id: "eq", kind: "boost-cut-stage", opAmp, parts: { inputR: { value: 3000 }, feedbackR: { value: 3000 } } },
      ...bands,
      { id: "out", kind: "output", parts: { seriesR: { value: 1e-3 }, loadR: { value: 1e9 } } },
    ],
    wires: [{ from: "in.out", to: "eq.in" }, ...bands.map(({ id }) => ({ from: "eq.bus", to: `${id}.bus` })), { from: "eq.out", to: "out.in" }],
    opAmps: { handbook: HANDBOOK_OP_AMP },
  };
}

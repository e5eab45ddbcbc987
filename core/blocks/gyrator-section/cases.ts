import type { LegCase } from "../definition.ts";

const BERNDT = "D. F. Berndt and S. C. Dutta Roy, IEEE J. Solid-State Circuits, 1969: Z = seriesR + 1/(s·seriesC) + s·Lx/(1 + s·gyratorC·seriesR), worked out apart from this program";
const VALUES = { seriesC: 220e-9, seriesR: 470, gyratorC: 3.9e-9, gyratorR: 68e3 };

export const CASES: readonly LegCase[] = [
  { about: "just above the resonance, ideal op amp", source: BERNDT, values: VALUES, opAmp: "ideal", frequency: 1000, impedance: [478.95620063542987, 54.21361367820373], within: 1e-12 },
  { about: "far above the resonance, where the parallel resistance shows", source: BERNDT, values: VALUES, opAmp: "ideal", frequency: 40e3, impedance: [12292.7020100702, 25645.32754441598], within: 1e-12 },
  {
    about: "below the resonance of a low band",
    source: BERNDT,
    values: { seriesC: 4.7e-6, seriesR: 560, gyratorC: 0.12e-6, gyratorR: 75e3 },
    opAmp: "ideal",
    frequency: 31.3,
    impedance: [572.9992254596651, -98.26471474397522],
    within: 1e-12,
  },
  {
    about: "a real op amp, 1 kHz",
    source: "the four node equations of the circuit, solved apart from this program",
    values: VALUES,
    opAmp: { openLoopGain: 1e5, gainBandwidth: 1e7, inputR: 3e5, outputR: 50 },
    frequency: 1000,
    impedance: [479.06055003959153, 54.33929586540841],
    within: 1e-11,
  },
  {
    about: "a real op amp, 20 kHz: inputR eats into gyratorR",
    source: "the four node equations of the circuit, solved apart from this program",
    values: VALUES,
    opAmp: { openLoopGain: 1e5, gainBandwidth: 1e7, inputR: 3e5, outputR: 50 },
    frequency: 20e3,
    impedance: [4390.0319858879775, 15660.728100473973],
    within: 1e-11,
  },
];

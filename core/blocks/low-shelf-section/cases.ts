import type { LegCase } from "../definition.ts";

const BERNDT = "D. F. Berndt and S. C. Dutta Roy, IEEE J. Solid-State Circuits, 1969: Z = seriesR + s·Lx/(1 + s·gyratorC·seriesR), and 1/(s·blockingC) where there is one, worked out apart from this program";
const VALUES = { seriesR: 1000, gyratorC: 47e-9, gyratorR: 100e3 };

export const CASES: readonly LegCase[] = [
  { about: "without blocking capacitor", source: BERNDT, values: VALUES, opAmp: "ideal", frequency: 50, impedance: [1021.5792318661235, 1461.4644338807173], within: 1e-12 },
  { about: "with one", source: BERNDT, values: { ...VALUES, blockingC: 47e-6 }, opAmp: "ideal", frequency: 50, impedance: [1021.5792318661235, 1393.7389261820383], within: 1e-12 },
];

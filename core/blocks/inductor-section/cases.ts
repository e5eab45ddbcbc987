import type { LegCase } from "../definition.ts";

const SERIES = "series impedance 1/(s·seriesC) + seriesR + (windingR + s·L) ∥ 1/(s·selfC), worked out apart from this program";
const REAL_COIL = { seriesC: 220e-9, seriesR: 390, inductor: 0.12, windingR: 45, selfC: 120e-12 };

export const CASES: readonly LegCase[] = [
  { about: "a coil with winding and self-capacitance near the resonance", source: SERIES, values: REAL_COIL, frequency: 1000, impedance: [435.0512076396857, 30.978022511412746], within: 1e-12 },
  { about: "the same coil on the way to its own resonance", source: SERIES, values: REAL_COIL, frequency: 20e3, impedance: [465.38725333733794, 19481.702313881735], within: 1e-12 },
  {
    about: "1.842 H with 330 Ω and 1.5 µF at 95.75 Hz: all but resistive",
    source: "common practice: 1.842 H with 330 Ω resonating at 95.75 Hz",
    values: { seriesC: 1.5e-6, seriesR: 330, inductor: 1.842 },
    frequency: 95.75,
    impedance: [330, 0.04640597340289787],
    within: 1e-11,
  },
];

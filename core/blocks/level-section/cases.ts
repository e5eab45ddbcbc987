import type { LegCase } from "../definition.ts";

export const CASES: readonly LegCase[] = [
  { about: "a resistor at all frequencies", source: "seriesR", values: { seriesR: 680 }, frequency: 20, impedance: [680, 0], within: 1e-15 },
  { about: "with a blocking capacitor", source: "seriesR + 1/(s·blockingC): 1/(2π·20 Hz·47 µF) = 169.31376924669718 Ω", values: { seriesR: 680, blockingC: 47e-6 }, frequency: 20, impedance: [680, -169.31376924669718], within: 1e-12 },
];

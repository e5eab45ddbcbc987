import type { LegCase } from "../definition.ts";

export const CASES: readonly LegCase[] = [
  { about: "below the corner", source: "seriesR + 1/(s·seriesC): 1/(2π·5 kHz·10 nF) = 3183.098861837907 Ω", values: { seriesC: 10e-9, seriesR: 470 }, frequency: 5000, impedance: [470, -3183.098861837907], within: 1e-12 },
];

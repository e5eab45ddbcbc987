import { describe, expect, test } from "vitest";
import type { BandFigures } from "../../../core/analysis/bands.ts";
import { bandFigureTexts, fittedLabel } from "../../../renderer/sheet/figure-texts.ts";

const end = (peak: number) => ({ peak, frequency: 1017.4, q: 1.3381, lower: 700, upper: 1460 });
const figures: BandFigures = {
  id: "b", label: "1 kHz", kind: "gyrator-section", inductance: 0.1, resonance: 1000, legQ: 2, isolatedBoost: 18, boost: end(10.47), cut: end(-10.44), interactionLoss: 7.5,
};

const within = (length: number) => (text: string): boolean => text.length <= length;

describe("figures under a band", () => {
  test("boost and cut are told apart where they differ", () => {
    expect(bandFigureTexts(figures)).toEqual({ boost: "▲ +10.5 dB", cut: "▼ −10.4 dB", barePeak: "±10.5", shortPeak: "±10.5", centre: "1.02 kHz", quality: "Q 1.34" });
    expect(bandFigureTexts({ ...figures, cut: end(-11.2) })).toMatchObject({ cut: "▼ −11.2 dB", barePeak: "+10.5 −11.2", shortPeak: "+10.5" });
  });

  test("shelves and levels have no Q", () => {
    expect(bandFigureTexts({ ...figures, kind: "shelf-section" })).toMatchObject({ centre: "1.02 kHz", quality: "high shelf" });
    expect(bandFigureTexts({ ...figures, kind: "level-section", boost: { ...end(12), frequency: null } })).toMatchObject({ centre: "all alike", quality: "level" });
  });

  test("a label gives up its unit before its figures", () => {
    expect(fittedLabel("3.15 kHz", within(8))).toBe("3.15 kHz");
    expect(fittedLabel("3.15 kHz", within(6))).toBe("3.15 k");
    expect(fittedLabel("3.15 kHz", within(5))).toBe("3.15k");
    expect(fittedLabel("Presence", within(5))).toBe("Pres…");
    expect(fittedLabel("63 Hz", within(2))).toBe("63");
  });
});

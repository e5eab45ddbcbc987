import { describe, expect, test } from "vitest";
import type { BandFigures } from "../../../core/analysis/bands.ts";
import { bandFigureTexts, degreesText, fittedLabel, NO_END_VOID, peakForms, voidEndsOf, voidEndsText } from "../../../renderer/sheet/figure-texts.ts";

const end = (peak: number) => ({ peak, frequency: 1017.4, q: 1.3381, lower: 700, upper: 1460 });
const figures: BandFigures = {
  id: "b", label: "1 kHz", kind: "gyrator-section", inductance: 0.1, resonance: 1000, legQ: 2, isolatedBoost: 18, boost: end(10.47), cut: end(-10.44), interactionLoss: 7.5,
};

const within = (length: number) => (text: string): boolean => text.length <= length;

describe("figures under a band", () => {
  test("boost and cut are told apart where they differ", () => {
    expect(bandFigureTexts(figures)).toEqual({ boost: "▲ +10.5 dB", cut: "▼ −10.4 dB", bareBoost: "+10.5", bareCut: "−10.4", mirrored: "±10.5", centre: "1.02 kHz", quality: "Q 1.34" });
    expect(bandFigureTexts({ ...figures, cut: end(-11.2) })).toMatchObject({ cut: "▼ −11.2 dB", bareCut: "−11.2", mirrored: null });
  });

  test("on one line they are one figure where they mirror each other, and never where only one of them holds", () => {
    const forms = (cut: number, voids = NO_END_VOID): string[] => peakForms(bandFigureTexts({ ...figures, cut: end(cut) }), voids).map((runs) => runs.map(({ text, isVoid }) => (isVoid ? `~${text}~` : text)).join(" "));
    expect(forms(-10.44)).toEqual(["±10.5", "10.5"]);
    expect(forms(-11.2)).toEqual(["+10.5 −11.2", "+10.5", "10.5"]);
    expect(forms(-10.44, { boost: true, cut: false })).toEqual(["~+10.5~ −10.4", "~+10.5~", "~10.5~"]);
    expect(forms(-10.44, { boost: false, cut: true })).toEqual(["+10.5 ~−10.4~", "+10.5", "10.5"]);
    expect(forms(-10.44, { boost: true, cut: true })).toEqual(["~±10.5~", "~10.5~"]);
  });

  test("unstable ends are gathered by band and told in words", () => {
    const voids = voidEndsOf([{ id: "a", end: "cut" }, { id: "b", end: "boost" }, { id: "b", end: "cut" }]);
    expect([...voids]).toEqual([["a", { boost: false, cut: true }], ["b", { boost: true, cut: true }]]);
    expect([...voids.values()].map(voidEndsText)).toEqual(["unstable at full cut", "unstable at full boost and full cut"]);
    expect(voidEndsText(NO_END_VOID)).toBe("");
  });

  test("shelves and levels have no Q", () => {
    expect(bandFigureTexts({ ...figures, kind: "shelf-section" })).toMatchObject({ centre: "1.02 kHz", quality: "high shelf" });
    expect(bandFigureTexts({ ...figures, kind: "level-section", boost: { ...end(12), frequency: null } })).toMatchObject({ centre: "all alike", quality: "level" });
  });

  test("angles carry a true minus sign, and zero none", () => {
    expect([degreesText(-23.44), degreesText(7), degreesText(-0.04), degreesText(-179.6, 0)]).toEqual(["−23.4°", "7.0°", "0.0°", "−180°"]);
  });

  test("a label gives up its unit before its figures", () => {
    expect(fittedLabel("3.15 kHz", within(8))).toBe("3.15 kHz");
    expect(fittedLabel("3.15 kHz", within(6))).toBe("3.15 k");
    expect(fittedLabel("3.15 kHz", within(5))).toBe("3.15k");
    expect(fittedLabel("3.15 kHz", (text) => text.length <= 4 && !text.includes("."))).toBe("3k15");
    expect(fittedLabel("Presence", within(5))).toBe("Pres…");
    expect(fittedLabel("63 Hz", within(2))).toBe("63");
    expect(fittedLabel("1 kHz · 2", within(9))).toBe("1 kHz · 2");
    expect(fittedLabel("1 kHz · 2", within(5))).toBe("1 k·2");
  });
});

import { describe, expect, test } from "vitest";
import { impracticalParts, impracticalText } from "../../../core/blocks/practical.ts";
import { layoutSheet } from "../../../core/geometry/layout.ts";
import { bandValues, referenceCode } from "../../../core/geometry/values.ts";
import { boardOf, gyratorAt } from "../../helpers/sheet-boards.ts";

describe("values that no part has", () => {
  test.each([
    ["resistor", "seriesR", "resistance", 0.01, 100e6],
    ["capacitor", "seriesC", "capacitance", 0.5e-12, 0.1],
    ["inductor", "inductor", "inductance", 10e-9, 1e3],
    ["track", "track", "resistance", 100, 10e6],
  ] as const)("bounds of a %s", (_, role, quantity, least, most) => {
    for (const value of [least, most, Math.sqrt(least * most)]) expect(impracticalText(value, role, quantity)).toBeNull();
    for (const value of [least * 0.99, most * 1.01, 1e99, 1e-30]) expect(impracticalText(value, role, quantity)).toMatch(/^outside what \w+( \w+)? are made in: .+ to .+$/);
  });

  test("are marked on the sheet however little room there is, and others are not", () => {
    for (const count of [1, 10]) {
      const plain = gyratorAt(1000);
      const odd = { ...plain, slider: { ...plain.slider!, track: { value: 5 } }, parts: { ...plain.parts, gyratorC: { value: 9400 } } };
      const others = [31.5, 63, 125, 250, 500, 2000, 4000, 8000, 16000].slice(0, count - 1).map((f) => gyratorAt(f, `b${f}`.replace(".", "_")));
      const project = boardOf([odd, ...others]);
      const layout = layoutSheet({ project, figures: new Map(), width: 716, height: 608, range: { from: 20, to: 20e3 }, span: null, scroll: 0 });
      const values = bandValues(layout.bands.find((band) => band.id === odd.id)!, odd);
      expect(values.filter((value) => value.isOdd).map((value) => [value.role, value.text])).toEqual([["gyratorC", "9400F !"], ["track", "5R !"]]);
      expect(values.filter((value) => !value.isOdd).map((value) => value.role)).toEqual(["seriesC", "seriesR", "gyratorR"]);
      expect(impracticalParts(project)).toEqual([{ id: "b1000", role: "gyratorC" }, { id: "b1000", role: "track" }]);
    }
  });

  test("in the divider of a single supply too", () => {
    const reference = { upperR: { value: 10e3 }, lowerR: { value: 1e9 }, bypassC: { value: 100e-6 } };
    expect(["upperR", "lowerR", "bypassC", "other"].map((role) => referenceCode(reference, role))).toEqual(["10k", "1G !", "100µ", null]);
  });
});

/** Tables and rules of published standards, typed out here. */
import { describe, expect, test } from "vitest";
import { nearestPreferred, seriesValues } from "../../core/e-series.ts";
import { OCTAVE_CENTRES } from "../../core/model/edit-bands.ts";
import { formatCode, parseValue } from "../../core/units.ts";

describe("IEC 60063:2015, preferred number series", () => {
  // The whole tables.
  test.each([
    [3, [1.0, 2.2, 4.7]],
    [6, [1.0, 1.5, 2.2, 3.3, 4.7, 6.8]],
    [12, [1.0, 1.2, 1.5, 1.8, 2.2, 2.7, 3.3, 3.9, 4.7, 5.6, 6.8, 8.2]],
    [24, [1.0, 1.1, 1.2, 1.3, 1.5, 1.6, 1.8, 2.0, 2.2, 2.4, 2.7, 3.0, 3.3, 3.6, 3.9, 4.3, 4.7, 5.1, 5.6, 6.2, 6.8, 7.5, 8.2, 9.1]],
    [
      48,
      [
        1.0, 1.05, 1.1, 1.15, 1.21, 1.27, 1.33, 1.4, 1.47, 1.54, 1.62, 1.69, 1.78, 1.87, 1.96, 2.05, 2.15, 2.26, 2.37, 2.49, 2.61, 2.74, 2.87, 3.01,
        3.16, 3.32, 3.48, 3.65, 3.83, 4.02, 4.22, 4.42, 4.64, 4.87, 5.11, 5.36, 5.62, 5.9, 6.19, 6.49, 6.81, 7.15, 7.5, 7.87, 8.25, 8.66, 9.09, 9.53,
      ],
    ],
  ] as const)("E%d", (series, table) => expect(seriesValues(series)).toEqual(table));

  test.each([48, 96, 192] as const)("E%d: round(10^(n/N), 2), but for 9.20 in E192", (series) => {
    const values = seriesValues(series);
    expect(values).toHaveLength(series);
    for (let n = 0; n < series; n++) {
      const byRule = Math.round(10 ** (n / series) * 100) / 100;
      expect(values[n]).toBe(series === 192 && n === 185 ? 9.2 : byRule);
    }
    expect(Math.round(10 ** (185 / 192) * 100) / 100).toBe(9.19);
  });

  test("every series from E48 on is every second value of the next; E3, E6 and E12 are every second of theirs", () => {
    for (const [coarse, fine] of [[3, 6], [6, 12], [12, 24], [48, 96], [96, 192]] as const) expect(seriesValues(fine).filter((_, n) => n % 2 === 0)).toEqual(seriesValues(coarse));
  });

  test("10 % parts are nearest in E12, 1 % parts in E96", () => {
    expect(nearestPreferred(5000, 12)).toBe(4700);
    expect(nearestPreferred(5000, 96)).toBe(4990);
  });
});

describe("IEC 60062:2016, letter code for values (clause 4: the letter stands for the decimal mark)", () => {
  // Examples of the standard's tables.
  test.each([
    ["R33", 0.33], ["3R3", 3.3], ["33R", 33], ["330R", 330], ["3k3", 3300], ["33k", 33e3], ["330k", 330e3], ["3M3", 3.3e6], ["10M", 10e6],
    ["R10", 0.1], ["1R5", 1.5], ["59R04", 59.04], ["590R4", 590.4], ["5k904", 5904], ["59k04", 59.04e3],
  ] as const)("resistance %s", (code, ohms) => {
    expect(parseValue(code, "resistance")).toEqual({ ok: true, value: ohms });
    // Printed without trailing zeros, the code says the same.
    expect(parseValue(formatCode(ohms, "resistance"), "resistance")).toEqual({ ok: true, value: ohms });
  });

  test.each([
    ["p10", 0.1e-12], ["p332", 0.332e-12], ["1p0", 1e-12], ["3p32", 3.32e-12], ["33p2", 33.2e-12], ["332p", 332e-12], ["1n0", 1e-9], ["3n32", 3.32e-9], ["33n2", 33.2e-9], ["332n", 332e-9],
    ["1µ0", 1e-6], ["3µ32", 3.32e-6], ["33µ2", 33.2e-6], ["1m0", 1e-3], ["3m32", 3.32e-3],
  ] as const)("capacitance %s", (code, farads) => {
    expect(parseValue(code, "capacitance")).toEqual({ ok: true, value: farads });
    expect(parseValue(formatCode(farads, "capacitance"), "capacitance")).toEqual({ ok: true, value: farads });
  });
});

describe("ISO 266:1997, preferred frequencies, and IEC 61260-1:2014, exact base-ten centres", () => {
  test("octave centres from 16 Hz to 16 kHz: the nominal values, each the exact one rounded", () => {
    expect(OCTAVE_CENTRES).toEqual([16, 31.5, 63, 125, 250, 500, 1000, 2000, 4000, 8000, 16000]);
    // Exact: 1000·G^n with G = 10^(3/10).
    OCTAVE_CENTRES.forEach((nominal, index) => expect(Math.abs(nominal / (1000 * 10 ** (0.3 * (index - 6))) - 1)).toBeLessThan(0.013));
  });
});

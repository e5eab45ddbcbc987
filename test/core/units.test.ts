import * as fc from "fast-check";
import { describe, expect, test, vi } from "vitest";
import { seriesValues } from "../../core/e-series.ts";
import { editText, formatCode, formatDb, formatFigure, formatValue, parseValue, type Quantity } from "../../core/units.ts";
import { runs } from "../fixtures/runs.ts";

vi.setConfig({ testTimeout: 30_000 });

function valueOf(text: string, quantity: Quantity): number {
  const parsed = parseValue(text, quantity);
  if (!parsed.ok) throw new Error(`“${text}” was refused: ${parsed.message}`);
  return parsed.value;
}

/** The double nearest to a decimal: what a file holds. */
const decimal = (mantissa: number, exponent: number): number => Number(`${mantissa}e${exponent}`);

describe("what is typed is read", () => {
  test.each<[string, Quantity, number]>([
    ["4k7", "resistance", 4700],
    ["4.7k", "resistance", 4700],
    ["4700", "resistance", 4700],
    ["4,7 kΩ", "resistance", 4700],
    ["4.7 kohm", "resistance", 4700],
    ["4.7 K", "resistance", 4700],
    ["4700R", "resistance", 4700],
    ["R47", "resistance", 0.47],
    ["0R47", "resistance", 0.47],
    ["4R7", "resistance", 4.7],
    ["470 Ω", "resistance", 470],
    ["1M", "resistance", 1e6],
    ["1M5", "resistance", 1.5e6],
    ["10 MΩ", "resistance", 1e7],
    ["100m", "resistance", 0.1],
    [".5", "resistance", 0.5],
    ["5.", "resistance", 5],
    ["1e3", "resistance", 1000],
    ["2n2", "capacitance", 2.2e-9],
    ["0.0022u", "capacitance", 2.2e-9],
    ["2.2nF", "capacitance", 2.2e-9],
    ["2,2 nF", "capacitance", 2.2e-9],
    ["2200p", "capacitance", 2.2e-9],
    ["4µ7", "capacitance", 4.7e-6],
    ["4μ7", "capacitance", 4.7e-6],
    ["4u7", "capacitance", 4.7e-6],
    ["p33", "capacitance", 0.33e-12],
    ["100 n", "capacitance", 100e-9],
    ["1e-7", "capacitance", 1e-7],
    ["1.5E-7 F", "capacitance", 1.5e-7],
    ["1H8", "inductance", 1.8],
    ["120m", "inductance", 0.12],
    ["120 mH", "inductance", 0.12],
    ["1.842 H", "inductance", 1.842],
    ["1k", "frequency", 1000],
    ["1k25", "frequency", 1250],
    ["31.5 Hz", "frequency", 31.5],
    ["20 kHz", "frequency", 20e3],
    ["15", "voltage", 15],
    ["15 V", "voltage", 15],
    ["4V5", "voltage", 4.5],
    ["25 °C", "temperature", 25],
    ["5 %", "ratio", 0.05],
    ["0.05", "ratio", 0.05],
    ["2,5%", "ratio", 0.025],
    ["1.7", "plain", 1.7],
    ["1,7", "plain", 1.7],
  ])("%s as a %s is %d", (text, quantity, value) => {
    expect(valueOf(text, quantity)).toBe(value);
    expect(valueOf(`  ${text} `, quantity)).toBe(value);
  });

  test.each<[string, Quantity, number]>([
    ["2*4k7", "resistance", 9400],
    ["3k3 + 330", "resistance", 3630],
    ["10k/4", "resistance", 2500],
    ["(1k + 2k) * 3", "resistance", 9000],
    ["1/(1/10k+1/10k)", "resistance", 5000],
    ["2^3", "plain", 8],
    ["4,7k - 700", "resistance", 4000],
    ["100n + 2n2", "capacitance", 100e-9 + 2.2e-9],
    ["1k*1e2", "resistance", 1e5],
    ["-5 + 30", "temperature", 25],
    ["-10", "temperature", -10],
  ])("arithmetic: %s as a %s is %d", (text, quantity, value) => {
    expect(valueOf(text, quantity)).toBeCloseTo(value, 12 - Math.ceil(Math.log10(Math.abs(value))));
  });

  test.each<[string, Quantity]>([
    ["", "resistance"],
    ["   ", "resistance"],
    ["abc", "resistance"],
    ["4k7k", "resistance"],
    ["4k7.5", "resistance"],
    ["1.2.3", "resistance"],
    ["1,2,3", "resistance"],
    ["k", "resistance"],
    ["R", "resistance"],
    ["4k7 nF", "resistance"],
    ["5 Hz", "resistance"],
    ["2n2 Ω", "capacitance"],
    ["4R7", "capacitance"],
    ["10 %", "resistance"],
    ["1k", "ratio"],
    ["1e999", "resistance"],
    ["1/0", "resistance"],
    ["0/0", "resistance"],
    ["Infinity", "resistance"],
    ["NaN", "resistance"],
    ["-Infinity", "resistance"],
    ["sqrt(4)", "resistance"],
    ["pi*2", "resistance"],
    ["x=3*2", "resistance"],
    ["f(x)=x+1", "resistance"],
    ["[1,2]+1", "resistance"],
    ["import('fs')+1", "resistance"],
    ["2k ? 1 : 0", "resistance"],
    ["1;2*3", "resistance"],
    ["5!*1", "resistance"],
    ["2*", "resistance"],
    ["(2", "resistance"],
    ["1k\n+2k)", "resistance"],
  ])("%j is refused for a %s, with an example of what is understood", (text, quantity) => {
    const parsed = parseValue(text, quantity);
    if (parsed.ok) throw new Error(`read as ${parsed.value}`);
    expect(parsed.message).toMatch(/expected a value such as \S/);
  });

  test("a text of any length or content gives a value or a message, quickly", () => {
    expect(parseValue("9".repeat(201), "resistance")).toMatchObject({ ok: false });
    expect(parseValue(`${"(".repeat(99)}1${")".repeat(99)}`, "resistance")).toMatchObject({ ok: true, value: 1 });
    const pieces = fc.constantFrom("1", "4k7", ",", ".", "e", "E5", "-", "+", "*", "/", "^", "(", ")", "k", "µ", "Ω", "R", "%", " ", "\n", "__proto__", "constructor", "0x1F", "\u0000", "π", "٤", "1e400");
    fc.assert(
      fc.property(fc.oneof(fc.string(), fc.array(pieces, { maxLength: 12 }).map((p) => p.join(""))), fc.constantFrom<Quantity>("resistance", "capacitance", "inductance", "frequency", "voltage", "temperature", "ratio", "plain"), (text, quantity) => {
        const parsed = parseValue(text, quantity);
        if (parsed.ok) expect(parsed.value).toSatisfy(Number.isFinite);
        else expect(parsed.message).not.toBe("");
      }),
      runs(2000),
    );
  });
});

describe("what is printed is read back exactly", () => {
  const E192 = seriesValues(192);

  test.each([
    ["resistance", [0, 1, 2, 3, 4, 5, 6, 7]],
    ["capacitance", [-12, -11, -10, -9, -8, -7, -6, -5, -4, -3, -2]],
    ["inductance", [-6, -5, -4, -3, -2, -1, 0]],
  ] as const)("every E192 %s of its decades, as letter code, as a value and while it is edited", (quantity, decades) => {
    for (const decade of decades) {
      for (const mantissa of E192) {
        const value = decimal(mantissa, decade);
        expect(valueOf(formatCode(value, quantity), quantity)).toBe(value);
        expect(valueOf(formatValue(value, quantity), quantity)).toBe(value);
        expect(valueOf(editText(value, quantity), quantity)).toBe(value);
      }
    }
  });

  test("any value of up to four digits, as letter code", () => {
    const value = (least: number, most: number): fc.Arbitrary<number> => fc.tuple(fc.integer({ min: 1000, max: 9999 }), fc.integer({ min: least, max: most })).map(([m, e]) => decimal(m, e - 3));
    fc.assert(fc.property(value(-3, 9), (x) => { expect(valueOf(formatCode(x, "resistance"), "resistance")).toBe(x); }), runs(1000));
    fc.assert(fc.property(value(-12, -1), (x) => { expect(valueOf(formatCode(x, "capacitance"), "capacitance")).toBe(x); }), runs(1000));
    fc.assert(fc.property(value(-9, 2), (x) => { expect(valueOf(formatCode(x, "inductance"), "inductance")).toBe(x); }), runs(1000));
  });

  test("any value of up to twelve digits, in full, for every quantity", () => {
    const twelve = fc.tuple(fc.integer({ min: 1, max: 999_999_999_999 }), fc.integer({ min: -24, max: 3 })).map(([m, e]) => decimal(m, e));
    fc.assert(
      fc.property(twelve, fc.constantFrom<Quantity>("resistance", "capacitance", "inductance", "frequency", "voltage"), (x, quantity) => {
        expect(valueOf(formatValue(x, quantity, { significant: "exact" }), quantity)).toBe(x);
        expect(valueOf(editText(x, quantity), quantity)).toBe(x);
      }),
      runs(3000),
    );
  });

  test("fractions, as per cent", () => {
    for (const fraction of [0.001, 0.0025, 0.005, 0.01, 0.02, 0.05, 0.07, 0.1, 0.2, 0.29, 0.57, 0.58, 1]) {
      expect(valueOf(formatValue(fraction, "ratio"), "ratio")).toBe(fraction);
      expect(valueOf(editText(fraction, "ratio"), "ratio")).toBe(fraction);
    }
  });
});

describe("how values are written", () => {
  test.each([
    [4700, "resistance", "4k7"], [0.47, "resistance", "R47"], [470, "resistance", "470R"], [4.7, "resistance", "4R7"], [1e6, "resistance", "1M"], [1.5e6, "resistance", "1M5"], [999, "resistance", "999R"],
    [2.2e-9, "capacitance", "2n2"], [100e-9, "capacitance", "100n"], [4.7e-6, "capacitance", "4µ7"], [330e-12, "capacitance", "330p"], [1.8, "inductance", "1H8"], [0.12, "inductance", "120m"],
  ] as const)("%d as a letter code of %s is %s (IEC 60062)", (value, quantity, code) => expect(formatCode(value, quantity)).toBe(code));

  test.each([
    [4700, "resistance", "4.7 kΩ"], [999.6, "resistance", "1 kΩ"], [470, "resistance", "470 Ω"], [0.1, "resistance", "100 mΩ"], [100e-9, "capacitance", "100 nF"], [0.01, "capacitance", "10000 µF"],
    [1.842, "inductance", "1.84 H"], [957.49, "frequency", "957 Hz"], [1000, "frequency", "1 kHz"], [15, "voltage", "15 V"], [25, "temperature", "25 °C"], [0.05, "ratio", "5 %"], [1.7, "plain", "1.7"], [0, "resistance", "0 Ω"],
  ] as const)("%d as a %s is %s", (value, quantity, text) => expect(formatValue(value, quantity)).toBe(text));

  test.each([
    [1000, "frequency", "1.00 kHz"], [59, "frequency", "59.0 Hz"], [957.49, "frequency", "957 Hz"], [999.7, "frequency", "1.00 kHz"], [0.123_782, "inductance", "124 mH"], [1.7, "plain", "1.70"], [0.8, "plain", "0.800"], [-0.512, "plain", "-0.512"], [0.051_24, "plain", "0.0512"], [0, "frequency", "0 Hz"],
  ] as const)("the computed figure %d (%s) is %s, three digits whatever they are", (value, quantity, text) => expect(formatFigure(value, quantity)).toBe(text));

  test.each([
    [10.434, 1, "+10.4 dB"], [-0.5, 2, "−0.50 dB"], [0, 1, "0.0 dB"], [-0.04, 1, "0.0 dB"], [0.05, 1, "+0.1 dB"],
  ] as const)("%d dB with %d decimals is %s", (gain, decimals, text) => expect(formatDb(gain, decimals)).toBe(text));
});

import { describe, expect, test } from "vitest";
import { readCoefficient, readKind, readMoney, readPrices, readQuantity, readRating, readTick, readTolerance, readValue } from "../../core/drawer/cells.ts";
import { guessDelimiter, guessMapping } from "../../core/drawer/guess-mapping.ts";
import { freeId, makeId } from "../../core/drawer/make-id.ts";
import { capacitor, resistor } from "../helpers/drawer.ts";

type Row = readonly [text: string, unit: string, value: number | null];
function value(cell: { readonly ok: boolean; readonly value?: unknown }): unknown {
  return cell.ok ? cell.value : null;
}

describe("a cell", () => {
  test.each<Row>([
    ["5%", "", 0.05], ["± 5 %", "", 0.05], ["+/-1%", "", 0.01], ["2,5%", "", 0.025], ["0.05", "", 0.05], ["5", "%", 0.05], ["0.1", "%", 0.001], ["J", "", 0.05], ["F", "%", 0.01], ["-20/+80%", "", 0.8],
    ["0%", "", 0], ["150%", "", null], ["five", "", null], ["5", "", null], ["-5%", "", null],
  ])("tolerance “%s” in a column of “%s”", (text, unit, expected) => expect(value(readTolerance(text, unit))).toBe(expected));

  test.each<Row>([
    ["0.25W", "", 0.25], ["1/4 W", "", 0.25], ["250mW", "", 0.25], ["0,6 W", "", 0.6], ["63 V", "", 63], ["63VDC", "", 63], ["1kV", "", 1000], ["63", "V", 63], ["250", "mW", 0.25], ["2W", "mW", 2], ["25", "", 25],
    ["0", "", null], ["lots", "", null], ["63 A", "", null],
  ])("rating “%s” in a column of “%s”", (text, unit, expected) => expect(value(readRating(text, unit))).toBe(expected));

  test.each([
    ["1Meg", "resistance", 1e6], ["2.2 MEGOHM", "resistance", 2.2e6], ["4K7", "resistance", 4700], ["100N", "capacitance", 1e-7], ["100NF", "capacitance", 1e-7], ["2N2", "capacitance", 2.2e-9], ["47PF", "capacitance", 47e-12], ["10UF", "capacitance", 1e-5],
    ["22MFD", "capacitance", 22e-6], ["0.1 mfd", "capacitance", 1e-7], ["470 MMF", "capacitance", 470e-12], ["100mH", "inductance", 0.1], ["1M", "resistance", 1e6], ["1mF", "capacitance", 1e-3],
    ["1N", "resistance", null], ["5U", "resistance", null], ["N", "capacitance", null], ["MFD", "capacitance", null],
  ] as const)("value “%s” as a %s", (text, quantity, expected) => {
    const read = value(readValue(text, "", quantity));
    if (expected === null) expect(read).toBeNull();
    else expect(read).toBeCloseTo(expected, 15);
  });

  test.each<Row>([["50ppm", "", 50e-6], ["±100 ppm/K", "", 100e-6], ["-200ppm/°C", "", -200e-6], ["50", "ppm", 50e-6], ["0.00005", "", 0.00005], ["5e-05", "", 5e-5], ["1", "", null], ["low", "", null]])(
    "temperature coefficient “%s” in a column of “%s”",
    (text, unit, expected) => expect(value(readCoefficient(text, unit))).toBe(expected),
  );

  test.each([["12", 12], ["1,200", 1200], ["2.500 pcs", 2500], ["1'000'000", 1_000_000], ["1 200", 1200], ["10.0", 10], ["3 ea", 3], ["0", 0], ["2.5", null], ["-3", null], ["some", null], ["1,20", null], ["99999999999999999999", null]] as const)(
    "quantity “%s”",
    (text, expected) => expect(value(readQuantity(text))).toBe(expected),
  );

  test.each([
    ["0.10", 0.1, ""], ["€0,10", 0.1, "EUR"], ["0.10 USD", 0.1, "USD"], ["$1,234.50", 1234.5, "USD"], ["1.234,50 €", 1234.5, "EUR"], ["£ 2", 2, "GBP"], ["1,234,567", 1234567, ""], [".5", 0.5, ""], ["CHF 1'200.05", 1200.05, "CHF"], ["1e-7", 1e-7, ""],
  ] as const)("price “%s”", (text, amount, currency) => expect(value(readMoney(text))).toEqual({ amount, currency }));
  test.each(["free", "-1", "", "1 or 2"])("no price “%s”", (text) => expect(readMoney(text).ok).toBe(false));

  test("price breaks", () => {
    expect(value(readPrices("1:0,10 € ; 100+: 0,06 €"))).toEqual({ prices: [{ from: 1, unitCost: 0.1 }, { from: 100, unitCost: 0.06 }], currency: "EUR" });
    expect(value(readPrices("0.10"))).toEqual({ prices: [{ from: 1, unitCost: 0.1 }], currency: "" });
    expect(readPrices("1:cheap").ok).toBe(false);
  });

  test("kinds by their usual words, and ticks", () => {
    expect(["Resistors", "CAP", "op-amp", "Op Amp", "IC", "pot", "slider", "choke", "L"].map((text) => value(readKind(text)))).toEqual(["resistor", "capacitor", "op-amp", "op-amp", "op-amp", "potentiometer", "potentiometer", "inductor", "inductor"]);
    expect(readKind("valve").ok).toBe(false);
    expect(["yes", "x", "", "no", "0", "perhaps"].map((text) => value(readTick(text)))).toEqual([true, true, false, false, false, null]);
  });
});

describe("a guess", () => {
  test("at the delimiter is not led astray by decimal commas and quoted text", () => {
    expect(guessDelimiter("a;b;c\n1,5;2,5;3,5\n")).toBe(";");
    expect(guessDelimiter('a,b\n"one; two; three",4\n"x;y;z",5\n')).toBe(",");
    expect(guessDelimiter("a\tb, c\n1\t2, 3, 4\n")).toBe("\t");
    expect(guessDelimiter("just one column\nand a row\n")).toBe(",");
  });

  test("at the columns goes by their names, their units, and what is in them", () => {
    const fields = (headers: readonly string[], ...rows: readonly (readonly string[])[]): readonly string[] => guessMapping(headers, rows).columns.map(({ column, field, unit, from }) => `${headers[column]} is ${field}${unit === "" ? "" : ` in ${unit}`}${field === "price" ? ` from ${from}` : ""}`);
    expect(fields(["Name", "Type", "Value [µF]", "Vmax (V)", "Qty.", "1+", "Price 100+", "Unit price @ 1000", "Colour"], ["a", "Capacitor", "0.1", "63", "5", "0.1", "0.05", "0.02", "blue"])).toEqual([
      "Name is id", "Type is kind", "Value [µF] is value in µF", "Vmax (V) is rating in V", "Qty. is quantity", "1+ is price from 1", "Price 100+ is price from 100", "Unit price @ 1000 is price from 1000",
    ]);
    expect(fields(["Type"], ["TL072"])).toEqual(["Type is type"]);
    expect(fields(["Type"], ["metal film"])).toEqual(["Type is technology"]);
    expect(fields(["Tolerance"], ["5"], ["1"])).toEqual(["Tolerance is tolerance in %"]);
    expect(fields(["Tolerance"], ["0.05"])).toEqual(["Tolerance is tolerance"]);
    expect(fields(["Inductance (mH)", "DCR [mΩ]"], ["10", "1200"])[1]).toBe("DCR [mΩ] is windingR in mΩ");
    expect(fields(["Track", "Taper"], ["10k", "linear"])).toEqual(["Taper is technology"]);
    expect(fields(["TCR"], ["50"])).toEqual(["TCR is temperatureCoefficient in ppm"]);
    expect(guessMapping(["Price (EUR)", "Capacitance (nF)"], []).defaults).toEqual({ kind: "capacitor", currency: "EUR" });
  });
});

test("a made name says what the part is, and gives way to one that is taken", () => {
  expect(makeId(resistor("", { rating: 0.6, package: "axial" }))).toBe("R-4k7-METALFILM-1%-0.6W-AXIAL");
  expect(makeId(capacitor("", { value: 2.2e-3, technology: "electrolytic", tolerance: null }))).toBe("C-2200u-ELECTROLYTIC-63V");
  expect(makeId({ ...resistor(""), kind: "op-amp", value: null, type: "TL072", technology: "", tolerance: null, rating: null, package: "DIP-8" })).toBe("U-TL072-DIP8");
  const taken = new Set(["a", "a-2", "x".repeat(100)]);
  expect(freeId("a", (id) => taken.has(id))).toBe("a-3");
  expect(freeId("x".repeat(100), (id) => taken.has(id))).toBe(`${"x".repeat(98)}-2`);
});

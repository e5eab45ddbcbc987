import { describe, expect, test } from "vitest";
import type { DrawerLine } from "../../../core/contract/drawer-schemas.ts";
import { COLUMNS, nextEditable, readCost, readCount, readRating, readToleranceField, readValue } from "../../../renderer/drawer/columns.ts";
import { FIELDS, lineFrom, pricesText, readPrices } from "../../../renderer/drawer/fields.ts";
import { costText, counted, lineName, percentText, valueCode, valueText } from "../../../renderer/drawer/line-text.ts";
import { ALL_CHOSEN, chosenCount, chosenIds, isChosen, NOTHING_CHOSEN, toggled, withLines } from "../../../renderer/drawer/selection.ts";
import { LineWindows, WINDOW } from "../../../renderer/drawer/windows.ts";

const LINE: DrawerLine = {
  id: "C-100N", kind: "capacitor", value: 1e-7, type: null, tolerance: 0.05, rating: 63, technology: "film", temperatureCoefficient: 1e-4, windingR: null, package: "pitch 5 mm", location: "box 3",
  prices: [{ from: 1, unitCost: 0.12 }, { from: 100, unitCost: 0.0905 }], currency: "EUR", supplier: "Quay", orderCode: "Q-1", notes: "", quantity: 20, reserved: 5, retired: false,
};

describe("what cells say", () => {
  test("every column of a capacitor", () => {
    expect(COLUMNS.map((column) => column.text(LINE))).toEqual(["C-100N", "capacitor", "100n", "5 %", "63 V", "film", "pitch 5 mm", "20", "5", "15", "box 3", "0.12 EUR", "Quay"]);
  });

  test("values in trade notation, whole for those who hear them; op amps by type", () => {
    expect(valueCode({ kind: "resistor", value: 4700, type: null })).toBe("4k7");
    expect(valueText({ kind: "resistor", value: 4700, type: null })).toBe("4.7 kΩ");
    expect(valueCode({ kind: "inductor", value: 1.8, type: null })).toBe("1H8");
    expect(valueCode({ kind: "op-amp", value: null, type: "TL072" })).toBe("TL072");
    expect(lineName({ ...LINE, technology: "" })).toBe("100n 5 %");
  });

  test("prices keep the digits that count, counts their thousands, changes their sign", () => {
    expect(costText(0.0905, "EUR")).toBe("0.0905 EUR");
    expect(costText(3, "")).toBe("3.00");
    expect(costText(null, "EUR")).toBe("–");
    expect(counted(1, "line")).toBe("1 line");
    expect(counted(12_345, "line")).toBe("12 345 lines");
    expect([percentText(0.0412), percentText(-0.004), percentText(0.0001), percentText(0.128)]).toEqual(["+4.1 %", "−0.4 %", "0 %", "+13 %"]);
  });
});

describe("what typed cells ask for", () => {
  test("a value in the unit of the kind", () => {
    expect(readValue("4k7", "resistor")).toEqual({ ok: true, fields: { value: 4700 } });
    expect(readValue("2,2n", "capacitor")).toEqual({ ok: true, fields: { value: 2.2e-9 } });
    expect(readValue("NE5532", "op-amp")).toEqual({ ok: true, fields: { type: "NE5532" } });
    expect(readValue("-3", "resistor").ok).toBe(false);
    expect(readValue("", "op-amp").ok).toBe(false);
  });

  test.each([
    ["63", "capacitor", 63], ["63 V", "capacitor", 63], ["1kV", "capacitor", 1000], ["1/4 W", "resistor", 0.25], ["250m", "resistor", 0.25], ["0,6W", "potentiometer", 0.6],
  ] as const)("the rating %s of a %s", (text, kind, rating) => {
    expect(readRating(text, kind)).toEqual({ ok: true, fields: { rating } });
  });

  test("ratings of the wrong sort, or none where there is none", () => {
    expect(readRating("63 V", "resistor").ok).toBe(false);
    expect(readRating("0", "resistor").ok).toBe(false);
    expect(readRating("5", "op-amp").ok).toBe(false);
    expect(readRating(" ", "capacitor")).toEqual({ ok: true, fields: { rating: null } });
  });

  test("a tolerance, where a bare number means percent", () => {
    expect(readToleranceField("5")).toEqual({ ok: true, fields: { tolerance: 0.05 } });
    expect(readToleranceField("")).toEqual({ ok: true, fields: { tolerance: null } });
    expect(readToleranceField("lots").ok).toBe(false);
  });

  test("the cost of one, with the prices of larger quantities kept", () => {
    expect(readCost("0,15 usd", LINE)).toEqual({ ok: true, fields: { prices: [{ from: 1, unitCost: 0.15 }, { from: 100, unitCost: 0.0905 }], currency: "USD" } });
    expect(readCost("", LINE)).toEqual({ ok: true, fields: { prices: [] } });
    expect(readCost("cheap", LINE).ok).toBe(false);
  });

  test("pieces are whole", () => {
    expect(readCount("1 200")).toEqual({ ok: true, count: 1200 });
    for (const text of ["", "-1", "2.5", "many"]) expect(readCount(text).ok).toBe(false);
  });

  test("every editable cell takes back what it shows, unchanged", () => {
    for (const column of COLUMNS) {
      if (!column.edit) continue;
      const read = column.edit.read(column.edit.text(LINE), LINE);
      expect(read.ok, column.key).toBe(true);
      if (read.ok && "fields" in read) expect({ ...LINE, ...read.fields }, column.key).toEqual(LINE);
      if (read.ok && "found" in read) expect(read.found).toBe(LINE.quantity);
    }
  });

  test("Tab goes on to what can be edited, and ends there", () => {
    const keys = [];
    for (let at = nextEditable(-1, 1); at >= 0; at = nextEditable(at, 1)) keys.push(COLUMNS[at].key);
    expect(keys).toEqual(["value", "tolerance", "rating", "technology", "package", "quantity", "location", "unitCost", "supplier"]);
    expect(nextEditable(2, -1)).toBe(-1);
  });
});

describe("fields", () => {
  test("each takes back what it shows", () => {
    for (const field of FIELDS) {
      const read = field.read(field.text(LINE), LINE);
      expect(read, field.key).toMatchObject({ ok: true });
      if (read.ok) expect({ ...LINE, ...read.fields }, field.key).toEqual(LINE);
    }
  });

  test("prices by quantity", () => {
    expect(pricesText(LINE.prices)).toBe("0.12; 100: 0.0905");
    expect(readPrices("0,12; 100: 0,09")).toEqual({ ok: true, fields: { prices: [{ from: 1, unitCost: 0.12 }, { from: 100, unitCost: 0.09 }] } });
    for (const text of ["100: 0.09", "0.1; 0.2", "0.1; 50: 0.09; 20: 0.08", "free"]) expect(readPrices(text).ok, text).toBe(false);
  });

  test("a new line is made of its texts, and each wrong one is named", () => {
    const good = lineFrom("capacitor", " C-1 ", { value: "100n", tolerance: "5", rating: "63", prices: "0.1", temperatureCoefficient: "-30 ppm" });
    expect(good.problems.size).toBe(0);
    expect(good.line).toMatchObject({ id: "C-1", kind: "capacitor", value: 1e-7, tolerance: 0.05, rating: 63, prices: [{ from: 1, unitCost: 0.1 }], temperatureCoefficient: -3e-5 });
    expect([...lineFrom("resistor", "", { value: "x", currency: "euro" }).problems.keys()]).toEqual(["value", "currency", "id"]);
  });
});

describe("choosing lines", () => {
  const list = Array.from({ length: 2500 }, (_, i) => ({ id: `L${i}` }));
  const fetch = async (offset: number, limit: number) => ({ total: list.length, lines: list.slice(offset, offset + limit) });

  test("some, or all but some", async () => {
    const some = toggled(toggled(NOTHING_CHOSEN, "L1"), "L2");
    expect([isChosen(some, "L1"), isChosen(some, "L3"), chosenCount(some, 2500)]).toEqual([true, false, 2]);
    expect(await chosenIds(some, fetch)).toEqual(["L1", "L2"]);
    const most = toggled(ALL_CHOSEN, "L7");
    expect([isChosen(most, "L7"), isChosen(most, "L8"), chosenCount(most, 2500)]).toEqual([false, true, 2499]);
    const ids = await chosenIds(most, fetch);
    expect(ids).toHaveLength(2499);
    expect(ids).not.toContain("L7");
    expect(chosenCount(withLines(most, ["L7"], true), 2500)).toBe(2500);
  });
});

describe("windows on a long list", () => {
  function windows(delay: (offset: number) => Promise<void> = async () => undefined) {
    const asked: number[] = [];
    let prefix = "a";
    const failures: unknown[] = [];
    const lines = new LineWindows(
      async (offset, limit) => {
        asked.push(offset);
        const mark = prefix;
        await delay(offset);
        if (mark === "broken") throw new Error("broken");
        return { total: 1000, lines: Array.from({ length: Math.min(limit, 1000 - offset) }, (_, i) => ({ ...LINE, id: `${mark}${offset + i}` })) };
      },
      () => undefined,
      (error) => failures.push(error),
    );
    return { lines, asked, failures, name: (next: string) => (prefix = next) };
  }
  const settle = (): Promise<void> => new Promise((resolve) => setTimeout(resolve));

  test("only what is wanted is asked for, and once", async () => {
    const { lines, asked } = windows();
    lines.want(0, 30);
    lines.want(10, 40);
    await settle();
    expect(asked).toEqual([0]);
    expect([lines.total, lines.at(0)?.id, lines.at(WINDOW)]).toEqual([1000, "a0", undefined]);
    lines.want(WINDOW - 5, WINDOW + 5);
    lines.want(990, 5000);
    await settle();
    expect(asked).toEqual([0, WINDOW, 800]);
    expect(lines.at(999)?.id).toBe("a999");
  });

  test("after a change the old lines stay until the new ones are there", async () => {
    const { lines, name } = windows();
    lines.want(0, 0);
    await settle();
    name("b");
    lines.refresh();
    expect(lines.at(5)?.id).toBe("a5");
    lines.want(0, 0);
    await settle();
    expect(lines.at(5)?.id).toBe("b5");
  });

  test("an answer to an earlier question is not mixed in", async () => {
    const releases: (() => void)[] = [];
    const { lines, name } = windows(() => new Promise((resolve) => releases.push(() => resolve())));
    lines.want(0, 0);
    name("b");
    lines.restart();
    lines.want(0, 0);
    releases[1]();
    await settle();
    releases[0]();
    await settle();
    expect(lines.at(0)?.id).toBe("b0");
  });

  test("a failure is told, and the next wish asks again", async () => {
    const { lines, failures, asked, name } = windows();
    name("broken");
    lines.want(0, 0);
    await settle();
    expect(failures).toHaveLength(1);
    name("a");
    lines.want(0, 0);
    await settle();
    expect([asked.length, lines.at(0)?.id]).toEqual([2, "a0"]);
  });
});

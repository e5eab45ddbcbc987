import { mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import fc from "fast-check";
import { afterAll, beforeAll, describe, expect, test, vi } from "vitest";
import { openDrawer, type DrawerStore } from "../../app/store/drawer-store.ts";
import { EVERY_LINE, FACETS, SORT_COLUMNS, type CandidateQuery, type DrawerLine, type LineFilter } from "../../core/contract/drawer-schemas.ts";
import { unitCost } from "../../core/drawer/stock.ts";
import { importText } from "../helpers/drawer.ts";

// Real files, flushed: a busy disk takes its time.
vi.setConfig({ testTimeout: 30_000 });

const STARTER = readFileSync(new URL("../../assets/drawer/starter.csv", import.meta.url));
const BY_ID = { by: "id", descending: false } as const;

let folder = "";
let drawer: DrawerStore;
let all: readonly DrawerLine[];
beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), "bandwright-query-"));
  drawer = await openDrawer({ path: join(folder, "drawer.sqlite"), now: () => new Date(0) });
  await importText(drawer, STARTER);
  drawer.retireLines(["R-10R-CF25"], true);
  drawer.move([{ line: "L-1H-FC", kind: "reserved", count: drawer.find("L-1H-FC")?.quantity ?? 0, reference: "Channel", note: "" }]);
  all = [...drawer.eachLine()];
});
afterAll(() => {
  drawer.close();
  rmSync(folder, { recursive: true, force: true });
});

function find(filter: Partial<LineFilter>): readonly DrawerLine[] {
  const { total, lines } = drawer.lines({ ...EVERY_LINE, ...filter }, BY_ID, 0, 1000);
  expect(lines).toHaveLength(total);
  return lines;
}

function ids(text: string): readonly string[] {
  return find({ text }).map((line) => line.id);
}

describe("what is typed to find lines", () => {
  test.each([
    ["4k7 metal", ["R-4K7-MF25", "R-4K7-MF60"]],
    ["4.7 kΩ carbon", ["R-4K7-CF25"]],
    ["4,7k 1%", ["R-4K7-MF25", "R-4K7-MF60"]],
    ["4700 0.6 W", ["R-4K7-MF60"]],
    ["10u 63 V", ["C-10U-EL63"]],
    ["100n 2.5 %", ["C-100N-PP"]],
    ["0.1u polyprop", ["C-100N-PP"]],
    ["100nF 50V", ["C-100N-X7R"]],
    ["tl07 dip", ["U-TL072", "U-TL074"]],
    ["op amp so-8 tidewater", ["U-NE5532-SO", "U-TL072-SO"]],
    ["tw-1429", ["U-NE5532-SO"]],
    ["centre detent 50k", ["P-50K-SL60"]],
    ["100mH", ["L-100MH-FC"]],
    ["1M 5%", ["R-1M-CF25"]],
    ["nonesuch", []],
    ['"quote* AND (', []],
  ] as readonly (readonly [string, readonly string[]])[])("“%s”", (text, expected) => {
    expect(ids(text)).toEqual(expected);
  });

  test("signs alone ask for nothing", () => {
    expect(find({ text: ' - * " ( ' })).toHaveLength(find({}).length);
  });
});

test("windows follow one another without a gap, whatever they are sorted by; lines without a value come last", () => {
  const key: Partial<Record<(typeof SORT_COLUMNS)[number], (line: DrawerLine) => string | number | null>> = {
    value: (line) => line.value, tolerance: (line) => line.tolerance, rating: (line) => line.rating, quantity: (line) => line.quantity, available: (line) => line.quantity - line.reserved,
    unitCost: (line) => unitCost(line, 1), temperatureCoefficient: (line) => line.temperatureCoefficient, technology: (line) => line.technology.toLowerCase(), location: (line) => line.location.toLowerCase(), supplier: (line) => line.supplier.toLowerCase(),
  };
  for (const by of SORT_COLUMNS) {
    for (const descending of [false, true]) {
      const lines: DrawerLine[] = [];
      let total = 1;
      while (lines.length < total) {
        const window = drawer.lines(EVERY_LINE, { by, descending }, lines.length, 100);
        total = window.total;
        lines.push(...window.lines);
        if (window.lines.length === 0) break;
      }
      expect(new Set(lines.map((line) => line.id)).size, by).toBe(428);
      const of = key[by];
      if (of === undefined) continue;
      const groups = by === "value" ? Map.groupBy(lines, (line) => line.kind) : new Map([["all", lines]]);
      for (const group of groups.values()) {
        const values = group.map(of);
        const known = values.filter((value) => value !== null);
        expect(values.slice(0, known.length), by).toEqual(known);
        const sorted = known.toSorted((a, b) => (a < b ? -1 : a > b ? 1 : 0));
        expect(known, by).toEqual(descending ? sorted.toReversed() : sorted);
      }
    }
  }
});

/** The same filter, done by hand on all lines; texts are for the table above. */
function fits(line: DrawerLine, filter: LineFilter, leaveOut?: (typeof FACETS)[number]): boolean {
  const has = (choices: readonly (string | number | null)[], value: string | number | null, facet: string): boolean => facet === leaveOut || choices.length === 0 || choices.includes(value);
  return (
    (filter.withRetired || !line.retired) && has(filter.kind, line.kind, "kind") && has(filter.technology, line.technology, "technology") && has(filter.package, line.package, "package") &&
    has(filter.supplier, line.supplier, "supplier") && has(filter.location, line.location, "location") && has(filter.tolerance, line.tolerance, "tolerance") &&
    (filter.valueFrom === null || (line.value !== null && line.value >= filter.valueFrom)) && (filter.valueTo === null || (line.value !== null && line.value <= filter.valueTo)) &&
    (!filter.onlyAvailable || line.quantity > line.reserved) && (filter.heldBy === null || (line.id === "L-1H-FC" && filter.heldBy === "Channel"))
  );
}

test("filters, facets and values agree with the same done by hand", () => {
  const choice = <T extends string>(...values: T[]): fc.Arbitrary<T[]> => fc.oneof({ weight: 3, arbitrary: fc.constant<T[]>([]) }, { weight: 2, arbitrary: fc.subarray(values) });
  const filters: fc.Arbitrary<LineFilter> = fc.record({
    text: fc.constant(""),
    kind: choice("resistor", "capacitor", "inductor", "op-amp", "potentiometer"),
    technology: choice("metal film", "film (polyester)", "X7R", "electrolytic"),
    package: choice("DIP-8", "pitch 5 mm", "axial 2.5 x 6.8"),
    supplier: choice("Bench box", "Harbour Components (invented)"),
    location: choice("film", "ceramic", "resistors 3"),
    tolerance: fc.oneof({ weight: 2, arbitrary: fc.constant<(number | null)[]>([]) }, fc.subarray([0.01, 0.05, 0.1, null])),
    valueFrom: fc.option(fc.constantFrom(1e-8, 100, 4700)),
    valueTo: fc.option(fc.constantFrom(1e-7, 1000, 1e5)),
    onlyAvailable: fc.boolean(),
    heldBy: fc.oneof({ weight: 5, arbitrary: fc.constant(null) }, fc.constantFrom("Channel", "Nobody")),
    withRetired: fc.boolean(),
  });
  fc.assert(
    fc.property(filters, (filter) => {
      const expected = all.filter((line) => fits(line, filter));
      expect(find(filter).map((line) => line.id).sort()).toEqual(expected.map((line) => line.id).sort());
      const facets = drawer.facets(filter);
      for (const facet of FACETS) {
        const counts = new Map<string | number | null, number>();
        for (const line of all) if (fits(line, filter, facet)) counts.set(line[facet], (counts.get(line[facet]) ?? 0) + 1);
        expect(new Map<string | number | null, number>(facets[facet].map(({ value, count }) => [value, count]))).toEqual(counts);
      }
      const valued = expected.filter((line) => line.value !== null);
      expect(drawer.values(filter).reduce((sum, { lines }) => sum + lines, 0)).toBe(valued.length);
      expect(drawer.values(filter).reduce((sum, { quantity }) => sum + quantity, 0)).toBe(valued.reduce((sum, line) => sum + line.quantity, 0));
    }),
    { numRuns: 150 },
  );
});

describe("candidates for a part", () => {
  const query = (own: Partial<CandidateQuery>): readonly string[] =>
    drawer.candidates({ kind: "resistor", value: 4700, within: 0.05, type: null, technology: [], ratingFrom: null, toleranceTo: null, availableFrom: 0, limit: 100, ...own }).map((line) => line.id);

  test("are those of about its value, the nearest first, both ends included", () => {
    expect(query({})).toEqual(["R-4K7-CF25", "R-4K7-MF25", "R-4K7-MF60"]);
    expect(query({ value: 4935, within: 0.05 })).toEqual(["R-5K1-MF25", "R-4K7-CF25", "R-4K7-MF25", "R-4K7-MF60"]);
    expect(query({ within: 0.1 })).toEqual(["R-4K7-CF25", "R-4K7-MF25", "R-4K7-MF60", "R-5K1-MF25", "R-4K3-MF25"]);
    expect(query({ value: 10, within: 0 })).toEqual(["R-10R-MF25", "R-10R-MF60"]);
    expect(query({ within: 0.1, limit: 2 })).toHaveLength(2);
  });

  test("fit what else is asked of them", () => {
    expect(query({ toleranceTo: 0.01, ratingFrom: 0.5 })).toEqual(["R-4K7-MF60"]);
    expect(query({ technology: ["carbon film"] })).toEqual(["R-4K7-CF25"]);
    expect(query({ availableFrom: 100_000 })).toEqual([]);
    expect(query({ kind: "inductor", value: 1, availableFrom: 0 })).toEqual(["L-1H-FC"]);
    expect(query({ kind: "inductor", value: 1, availableFrom: 1 })).toEqual([]);
    expect(query({ kind: "op-amp", value: null, type: "tl072" })).toEqual(["U-TL072", "U-TL072-SO"]);
    expect(query({ kind: "op-amp", value: null })).toHaveLength(12);
  });
});

test("a window's total follows changes, one's own and another program's", async () => {
  const other = await openDrawer({ path: drawer.path, now: () => new Date(0) });
  const total = (): number => drawer.lines({ ...EVERY_LINE, location: ["coils"] }, BY_ID, 0, 1).total;
  expect(total()).toBe(7);
  other.editLines(["L-10MH-FC"], { location: "lent out" });
  expect(total()).toBe(6);
  other.close();
  drawer.editLines(["L-10MH-FC"], { location: "coils" });
  expect(total()).toBe(7);
});

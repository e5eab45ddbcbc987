import * as fc from "fast-check";
import { describe, expect, test } from "vitest";
import { E_SERIES, nearestPreferred, nextPreferred, seriesValues, type ESeries } from "../../core/e-series.ts";
import { runs } from "../fixtures/runs.ts";

const series = fc.constantFrom<ESeries>(...E_SERIES);
const value = fc.tuple(fc.integer({ min: 1000, max: 9999 }), fc.integer({ min: -15, max: 4 })).map(([m, e]) => Number(`${m}e${e}`));

/** Every value of a series about a value, from its list alone. */
const around = (x: number, s: ESeries): number[] => [-1, 0, 1].flatMap((d) => seriesValues(s).map((v) => Number(`${v}e${Math.floor(Math.log10(x)) + d}`)));

describe("preferred values", () => {
  test("next: the first of the series past a value, either way", () => {
    fc.assert(
      fc.property(value, series, (x, s) => {
        expect(nextPreferred(x, s, 1)).toBe(Math.min(...around(x, s).filter((v) => v > x * (1 + 1e-9))));
        expect(nextPreferred(x, s, -1)).toBe(Math.max(...around(x, s).filter((v) => v < x * (1 - 1e-9))));
      }),
      runs(2000),
    );
  });

  test("nearest: by ratio, and a preferred value is its own nearest", () => {
    fc.assert(
      fc.property(value, series, (x, s) => {
        const distance = (v: number): number => Math.abs(Math.log(v / x));
        const best = Math.min(...around(x, s).map(distance));
        expect(distance(nearestPreferred(x, s))).toBeLessThan(best + 2e-6);
      }),
      runs(2000),
    );
    for (const s of E_SERIES) for (const v of seriesValues(s)) for (const decade of [-12, -7, 0, 3, 6]) expect(nearestPreferred(Number(`${v}e${decade}`), s)).toBe(Number(`${v}e${decade}`));
  });

  test("up and down again comes back, through every decade", () => {
    for (const s of E_SERIES) {
      for (const v of seriesValues(s)) {
        for (const decade of [-12, 0, 5]) {
          const x = Number(`${v}e${decade}`);
          expect(nextPreferred(nextPreferred(x, s, 1), s, -1)).toBe(x);
        }
      }
    }
    expect(nextPreferred(9100, 24, 1)).toBe(10e3);
    expect(nextPreferred(10e3, 24, -1)).toBe(9100);
    expect(nextPreferred(4800, 24, 1)).toBe(5100);
    expect(nextPreferred(2.2e-9, 12, 1)).toBe(2.7e-9);
  });
});

import * as fc from "fast-check";
import { describe, expect, test } from "vitest";
import { runs } from "../../fixtures/runs.ts";
import {
  frequencyAt, frequencyLabels, frequencyOfSheetX, frequencyRules, moveSpan, paddedSpan, pixelOf, sheetXOf, zoomSpan, type Ruling,
} from "../../../core/geometry/ruling.ts";

const widthOf = (text: string): number => text.length * 6.5;

const LIMITS = { from: 10, to: 40e3 };

const ruling = fc
  .record({ left: fc.integer({ min: 0, max: 300 }), width: fc.integer({ min: 120, max: 4000 }), from: fc.double({ min: 5, max: 8000, noNaN: true }), ratio: fc.double({ min: 1.25, max: 10_000, noNaN: true }) })
  .map(({ left, width, from, ratio }): Ruling => ({ left, right: left + width, from, to: from * ratio }));

describe("frequency ruling", () => {
  test("a frequency and its pixel lead back to each other", () => {
    fc.assert(
      fc.property(ruling, fc.double({ min: 0, max: 1, noNaN: true }), (r, share) => {
        const frequency = r.from * (r.to / r.from) ** share;
        expect(frequencyAt(r, pixelOf(r, frequency)) / frequency).toBeCloseTo(1, 9);
      }),
      runs(200),
    );
  });

  test("places in files lead back to their frequency, with 10 Hz at 0", () => {
    expect(sheetXOf(10)).toBe(0);
    expect(sheetXOf(1000)).toBeCloseTo(600, 9);
    fc.assert(fc.property(fc.double({ min: 1, max: 1e5, noNaN: true }), (f) => {
      expect(frequencyOfSheetX(sheetXOf(f)) / f).toBeCloseTo(1, 9);
    }), runs(200));
  });

  test("rules ascend and stay inside", () => {
    fc.assert(
      fc.property(ruling, (r) => {
        const xs = frequencyRules(r).map((rule) => rule.x);
        expect(xs).toEqual([...xs].sort((a, b) => a - b));
        for (const x of xs) {
          expect(x).toBeGreaterThan(r.left - 0.01);
          expect(x).toBeLessThan(r.right + 0.01);
        }
      }),
      runs(200),
    );
  });

  test("labels ascend and never overlap, however far one zooms", () => {
    fc.assert(
      fc.property(ruling, (r) => {
        const labels = frequencyLabels(r, widthOf, 6);
        for (let i = 1; i < labels.length; i++) {
          const [a, b] = [labels[i - 1], labels[i]];
          expect(b.x - widthOf(b.text) / 2 - (a.x + widthOf(a.text) / 2)).toBeGreaterThanOrEqual(6 - 1e-6);
        }
      }),
      runs(200),
    );
  });

  test("the audio range on a usual screen is labelled 20, 50, 100 … 20 k", () => {
    const labels = frequencyLabels({ left: 200, right: 960, from: 20, to: 20e3 }, (text) => text.length * 6);
    expect(labels.map((label) => label.text)).toEqual(["20", "50", "100", "200", "500", "1 k", "2 k", "5 k", "10 k", "20 k"]);
  });

  test("a close look shows the preferred frequencies of ISO 266 third octaves", () => {
    const labels = frequencyLabels({ left: 0, right: 800, from: 900, to: 9000 }, (text) => text.length * 6);
    expect(labels.map((label) => label.text)).toEqual(["1 k", "1.25 k", "1.6 k", "2 k", "2.5 k", "3.15 k", "4 k", "5 k", "6.3 k", "8 k"]);
  });
});

describe("zoom and pan", () => {
  test("zooming keeps the frequency under the pointer where it is, away from the limits", () => {
    const span = { from: 200, to: 2000 };
    const next = zoomSpan(span, LIMITS, 1.5, 700);
    const share = (s: { from: number; to: number }): number => Math.log(700 / s.from) / Math.log(s.to / s.from);
    expect(share(next)).toBeCloseTo(share(span), 9);
    expect(Math.log(next.to / next.from)).toBeCloseTo(Math.log(10) / 1.5, 9);
  });

  test("no zoom or pan leaves the limits", () => {
    const step = fc.record({ factor: fc.double({ min: 0.05, max: 20, noNaN: true }), share: fc.double({ min: 0, max: 1, noNaN: true }), isPan: fc.boolean() });
    fc.assert(
      fc.property(fc.array(step, { maxLength: 12 }), (steps) => {
        let span = { ...LIMITS };
        for (const { factor, share, isPan } of steps) {
          const about = span.from * (span.to / span.from) ** share;
          span = isPan ? moveSpan(span, LIMITS, factor) : zoomSpan(span, LIMITS, factor, about);
          expect(span.from).toBeGreaterThanOrEqual(LIMITS.from * (1 - 1e-9));
          expect(span.to).toBeLessThanOrEqual(LIMITS.to * (1 + 1e-9));
          expect(span.to / span.from).toBeGreaterThan(1.24);
        }
      }),
      runs(200),
    );
  });

  test("padding leaves so many pixels free at both ends", () => {
    const padded = paddedSpan(LIMITS, 30, 900);
    const r = { left: 0, right: 900, ...padded };
    expect(pixelOf(r, LIMITS.from)).toBeCloseTo(30, 6);
    expect(pixelOf(r, LIMITS.to)).toBeCloseTo(870, 6);
  });
});

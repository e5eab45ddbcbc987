import * as fc from "fast-check";
import { describe, expect, test } from "vitest";
import { runs } from "../../fixtures/runs.ts";
import { levelSpan, levelTicks, levelY, lowsBelow } from "../../../core/geometry/levels.ts";
import { readCurve } from "../../../core/geometry/reading.ts";

describe("level axis", () => {
  test("holds the peaks and the curve, and keeps still for small changes", () => {
    const span = levelSpan([11.2, -11.9], [Float64Array.of(0, 3, -2)]);
    expect(span).toEqual({ top: 15, bottom: -15 });
    expect(levelSpan([11.3, -11.8], [Float64Array.of(0, 4, -2)])).toEqual(span);
    expect(levelSpan([], [Float64Array.of(17.2)]).top).toBe(18);
  });

  test("a roll-off far below does not flatten the rest", () => {
    const span = levelSpan([], [Float64Array.of(-120, 0)]);
    expect(span.bottom).toBeGreaterThan(-65);
    // What the axis does not hold is told where it leaves.
    const curve = { frequency: Float64Array.of(10, 20, 30, 40, 50, 60, 70), gain: Float64Array.of(-200, -120, -130, 0, 3, -70, -64) };
    expect(lowsBelow(span, curve, { from: 15, to: 70 })).toEqual([{ frequency: 30, gain: -130 }, { frequency: 60, gain: -70 }]);
  });

  test("holds the whole curve of three stages at full cut", () => {
    const curve = { frequency: Float64Array.of(20, 25, 31.5), gain: Float64Array.of(-43.2, -42.9, -40.1) };
    const span = levelSpan([-15, 15], [curve.gain]);
    expect(span.bottom).toBeLessThan(-43.2);
    expect(lowsBelow(span, curve, { from: 20, to: 20e3 })).toEqual([]);
  });

  test("ticks are multiples of a 1-2-5 step, ascending, apart, with 0 among them", () => {
    fc.assert(
      fc.property(fc.integer({ min: 12, max: 60 }), fc.integer({ min: 12, max: 60 }), fc.integer({ min: 100, max: 600 }), (top, below, height) => {
        const span = { top, bottom: -below };
        const ticks = levelTicks(span, height);
        expect(ticks).toContain(0);
        for (let i = 1; i < ticks.length; i++) {
          const step = ticks[i] - ticks[i - 1];
          expect([1, 2, 5, 10, 20, 50]).toContain(step);
          expect(levelY(span, 0, height, ticks[i - 1]) - levelY(span, 0, height, ticks[i])).toBeGreaterThanOrEqual(24 - 1e-9);
        }
      }),
      runs(200),
    );
  });
});

describe("reading a curve", () => {
  const curve = { frequency: Float64Array.of(10, 100, 1000), gain: Float64Array.of(0, 6, 2), phase: Float64Array.of(0, 90, -90) };

  test("interpolates over log frequency", () => {
    expect(readCurve(curve, 100)).toEqual({ gain: 6, phase: 90 });
    expect(readCurve(curve, Math.sqrt(1e5))!.gain).toBeCloseTo(4, 9);
    expect(readCurve(curve, 1000)).toEqual({ gain: 2, phase: -90 });
  });

  test("reads nothing outside the curve", () => {
    expect(readCurve(curve, 9)).toBeNull();
    expect(readCurve(curve, 1001)).toBeNull();
  });
});

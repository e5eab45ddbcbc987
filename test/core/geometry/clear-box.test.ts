import { describe, expect, test } from "vitest";
import { boxWithin, clearestBox, type PlotLine } from "../../../core/geometry/clear-box.ts";
import { valueAt } from "../../../core/geometry/reading.ts";
import { pixelOf, type Ruling } from "../../../core/geometry/ruling.ts";
import type { Box } from "../../../core/geometry/units.ts";

const plot: Box = { left: 100, right: 700, top: 0, bottom: 300 };
const ruling: Ruling = { left: 100, right: 700, from: 20, to: 20e3 };
const span = { top: 15, bottom: -15 };

/** A line through a few points, Hz and dB. */
function line(...points: readonly (readonly [number, number])[]): PlotLine {
  return { frequency: Float64Array.from(points, ([f]) => f), column: Float64Array.from(points, ([, g]) => g), span };
}

const flat = line([20, 0], [20e3, 0]);

describe("a place for words on a plot", () => {
  const at = (left: number, top: number): Box => ({ left, top, right: left + 120, bottom: top + 20 });

  test("is the first that hides no line", () => {
    expect(clearestBox(ruling, plot, [flat], [], [at(200, 140), at(200, 100), at(200, 10)])).toEqual(at(200, 100));
    expect(clearestBox(ruling, plot, [], [], [at(200, 140), at(200, 100)])).toEqual(at(200, 140));
  });

  test("sees a line that crosses it between two looks", () => {
    const steep = line([20, -15], [999, -15], [1001, 15], [20e3, 15]);
    const x = pixelOf(ruling, 1000);
    expect(clearestBox(ruling, plot, [steep], [], [at(x - 57, 100), at(x + 30, 100)])).toEqual(at(x + 30, 100));
  });

  test("lies over no other words, and over as little of a line as can be where it cannot but hide some", () => {
    expect(clearestBox(ruling, plot, [flat], [at(250, 95)], [at(200, 100), at(500, 100)])).toEqual(at(500, 100));
    const high = line([20, 0], [pixelFrequency(260), 0], [pixelFrequency(270), -14], [20e3, -14]);
    expect(clearestBox(ruling, plot, [high], [], [at(150, 140), at(230, 140)])).toEqual(at(230, 140));
    expect(clearestBox(ruling, plot, [flat], [at(150, 100)], [at(160, 100), at(300, 140)])).toEqual(at(300, 140));
  });

  test("outside its points a line hides behind nothing", () => {
    expect(clearestBox(ruling, plot, [line([1000, 0], [20e3, 0])], [], [at(110, 140), at(110, 10)])).toEqual(at(110, 140));
  });

  test("is moved inside its frame", () => {
    expect(boxWithin(650, -20, 100, 20, plot)).toEqual({ left: 600, right: 700, top: 0, bottom: 20 });
    expect(boxWithin(0, 290, 100, 20, plot)).toEqual({ left: 100, right: 200, top: 280, bottom: 300 });
  });
});

function pixelFrequency(x: number): number {
  return ruling.from * (ruling.to / ruling.from) ** ((x - ruling.left) / (ruling.right - ruling.left));
}

test("a column is read between its points over the logarithm of the frequency", () => {
  const [frequency, column] = [Float64Array.of(10, 100, 1000), Float64Array.of(0, 10, -10)];
  expect(valueAt(frequency, column, Math.sqrt(1000))).toBeCloseTo(5, 12);
  expect(valueAt(frequency, column, 1000)).toBe(-10);
  expect(valueAt(frequency, column, 10)).toBe(0);
  expect([valueAt(frequency, column, 9.9), valueAt(frequency, column, 1001), valueAt(new Float64Array(0), new Float64Array(0), 5), valueAt(frequency, column, NaN)]).toEqual([null, null, null, null]);
});

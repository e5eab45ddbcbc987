/** Where words on a plot hide nothing of its lines. */
import { levelY, type LevelSpan } from "./levels.ts";
import { valueAt } from "./reading.ts";
import { frequencyAt, type Ruling } from "./ruling.ts";
import { overlaps, type Box } from "./units.ts";

/** A line of a plot: its points, and the axis on which it is drawn. */
export interface PlotLine {
  readonly frequency: Float64Array;
  readonly column: Float64Array;
  readonly span: LevelSpan;
}

/** Pixels from one look to the next along a box. */
const STEP = 4;
/** Pixels that words keep to a line. */
const CLEAR = 2;

/** How many looks along a box find a line in it. */
function hiddenLooks(ruling: Ruling, plot: Box, lines: readonly PlotLine[], box: Box): number {
  let looks = 0;
  const height = plot.bottom - plot.top;
  for (const { frequency, column, span } of lines) {
    let before: number | null = null;
    for (let x = box.left; x <= box.right; x += STEP) {
      const value = valueAt(frequency, column, frequencyAt(ruling, x));
      const y = value === null ? null : levelY(span, plot.top, height, value);
      // Between two looks a steep line may cross the whole box.
      if (y !== null && Math.min(y, before ?? y) < box.bottom + CLEAR && Math.max(y, before ?? y) > box.top - CLEAR) looks++;
      before = y;
    }
  }
  return looks;
}

/**
 * The first of some boxes that hides neither a line nor other words, else the one that hides least of the lines and none
 * of the words, if there is one.
 */
export function clearestBox(ruling: Ruling, plot: Box, lines: readonly PlotLine[], words: readonly Box[], boxes: readonly Box[]): Box {
  let [best, least] = [boxes[0], Infinity];
  for (const box of boxes) {
    const cost = hiddenLooks(ruling, plot, lines, box) + (words.some((other) => overlaps(other, box)) ? 1000 : 0);
    if (cost < least) [best, least] = [box, cost];
    if (cost === 0) break;
  }
  return best;
}

/** A box of some size, moved inside another. */
export function boxWithin(left: number, top: number, width: number, height: number, within: Box): Box {
  const x = Math.max(within.left, Math.min(within.right - width, left));
  const y = Math.max(within.top, Math.min(within.bottom - height, top));
  return { left: x, top: y, right: x + width, bottom: y + height };
}

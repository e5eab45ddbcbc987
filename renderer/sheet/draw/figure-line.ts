import { LINE } from "../../../core/geometry/frame.ts";
import type { BandPlace, Detail } from "../../../core/geometry/band-place.ts";

type Line = "label" | "staggered" | "peak" | "cut" | "centre" | "quality" | "now";

const LINES: Record<Detail, Partial<Record<Line, number>>> = {
  full: { label: 0, peak: 1, cut: 2, centre: 3, quality: 4, now: 5 },
  medium: { label: 0, peak: 1, centre: 2, quality: 3, now: 4 },
  short: { label: 0, peak: 1, now: 2 },
  slim: { label: 0, staggered: 1, peak: 2, now: 3 },
};

/** Middle of a line of a band's figures, px. */
export function figureLine(place: Pick<BandPlace, "figuresTop" | "detail">, line: Line): number {
  return place.figuresTop + (LINES[place.detail][line] ?? 0) * LINE + LINE / 2;
}

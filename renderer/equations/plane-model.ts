import type { RootRow } from "./roots-model.ts";

/** The s-plane unrolled: across, the logarithm of a root's distance from the origin; up, its angle from the negative real axis. */
export interface Plane {
  readonly width: number;
  readonly height: number;
  readonly left: number;
  readonly right: number;
  readonly top: number;
  readonly bottom: number;
  /** Where roots at the origin stand; null where there are none. */
  readonly originX: number | null;
  readonly decades: readonly { readonly x: number; readonly frequency: number }[];
  readonly levels: readonly { readonly y: number; readonly label: string; readonly note: string }[];
  /** The imaginary axis. */
  readonly edgeY: number;
  readonly marks: readonly PlaneMark[];
}

export interface PlaneMark {
  readonly row: RootRow;
  readonly x: number;
  readonly y: number;
  /** How many roots this mark stands for: those at the origin fall on each other. */
  readonly count: number;
}

const MARGIN = { left: 104, right: 24, top: 16, bottom: 56 };
const ORIGIN_GUTTER = 44;
/** Room above the imaginary axis while nothing stands there, degrees. */
const QUIET_TOP = 102;

/** Real roots crowd one line, poles and zeros on each other: half the distance between their two lanes. */
const LANE = 8;

const LEVELS: readonly (readonly [damping: number, label: string, note: string])[] = [
  [1, "ζ 1", "real"], [0.707, "ζ 0.71", "Q 0.71"], [0.5, "ζ 0.5", "Q 1"], [0.25, "ζ 0.25", "Q 2"], [0, "ζ 0", "edge"], [-0.5, "ζ −0.5", ""], [-1, "ζ −1", "real"],
];

/** Places roots in a picture of the given size. Rows must hold at least one root away from the origin. */
export function planeOf(rows: readonly RootRow[], width: number, height: number): Plane {
  const away = rows.filter((row) => row.frequency > 0);
  const hasOrigin = away.length < rows.length;
  const logs = away.map((row) => Math.log10(row.frequency));
  const from = Math.floor(Math.min(...logs) - 0.1);
  const to = Math.ceil(Math.max(...logs) + 0.1);
  const plotLeft = MARGIN.left + (hasOrigin ? ORIGIN_GUTTER : 0);
  const right = width - MARGIN.right;
  const bottom = height - MARGIN.bottom;
  const angleOf = (damping: number): number => (Math.acos(Math.max(-1, Math.min(1, damping))) * 180) / Math.PI;
  const most = away.some((row) => row.damping! < -1e-9) ? 180 : QUIET_TOP;
  const xOf = (log: number): number => plotLeft + ((log - from) / (to - from)) * (right - plotLeft);
  const yOf = (damping: number): number => bottom - (angleOf(damping) / most) * (bottom - MARGIN.top);
  const laneOf = (row: RootRow): number => (row.isPair ? 0 : row.kind === "pole" ? -LANE : LANE);
  const originX = hasOrigin ? MARGIN.left + ORIGIN_GUTTER / 2 : null;
  const marks = away.map((row): PlaneMark => ({ row, x: xOf(Math.log10(row.frequency)), y: yOf(row.damping!) + laneOf(row), count: 1 }));
  for (const kind of ["pole", "zero"] as const) {
    const atOrigin = rows.filter((row) => row.frequency === 0 && row.kind === kind);
    if (originX !== null && atOrigin.length > 0) marks.unshift({ row: atOrigin[0], x: originX, y: bottom + laneOf(atOrigin[0]), count: atOrigin.length });
  }
  return {
    width, height, left: MARGIN.left, right, top: MARGIN.top, bottom, originX,
    decades: Array.from({ length: to - from + 1 }, (_, i) => ({ x: xOf(from + i), frequency: 10 ** (from + i) })),
    levels: LEVELS.filter(([damping]) => angleOf(damping) <= most).map(([damping, label, note]) => ({ y: yOf(damping), label, note })),
    edgeY: yOf(0),
    // From left to right, as the arrow keys walk.
    marks: marks.toSorted((a, b) => a.x - b.x || b.y - a.y),
  };
}

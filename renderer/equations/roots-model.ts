import { rootFigures } from "../../core/analysis/poles.ts";
import { smallestMargin } from "../../core/analysis/stability.ts";
import { formatFigure } from "../../core/units.ts";
import type { Stability } from "../worker/protocol.ts";

/** A pole or a zero; a complex pair is one row. */
export interface RootRow {
  readonly key: string;
  readonly kind: "pole" | "zero";
  readonly re: number;
  /** 0 or above; below the row stands its mirror image, where above. */
  readonly im: number;
  readonly isPair: boolean;
  /** |s|/2π, Hz. */
  readonly frequency: number;
  /** Of pairs only. */
  readonly q: number | null;
  /** −Re s/|s|: 1 for a real root that dies away, 0 at the edge, below 0 where it grows; null at the origin. */
  readonly damping: number | null;
  /** Poles only: the block to which it belongs most. */
  readonly block: string | null;
  /** A pole in the right half plane. */
  readonly isUnstable: boolean;
}

/** Poles, then zeros, each ascending in frequency. */
export function rootRows({ poles, zeros, unstable }: Pick<Stability, "poles" | "zeros" | "unstable">): RootRow[] {
  const isUnstable = (re: number, im: number): boolean => unstable.some((pole) => pole.re === re && pole.im === im);
  const row = (kind: RootRow["kind"], root: { readonly re: number; readonly im: number }, index: number, block: string | null): RootRow => {
    const { frequency, q } = rootFigures(root);
    const size = Math.hypot(root.re, root.im);
    return {
      key: `${kind} ${index}`, kind, re: root.re, im: root.im, isPair: root.im !== 0, frequency, q: root.im === 0 ? null : q, damping: size === 0 ? null : -root.re / size, block,
      isUnstable: kind === "pole" && isUnstable(root.re, root.im),
    };
  };
  // Of a pair the half below the axis says nothing new.
  return [
    ...poles.filter(({ im }) => im >= 0).map((pole, index) => row("pole", pole, index, pole.block)),
    ...zeros.filter(({ im }) => im >= 0).map((zero, index) => row("zero", zero, index, null)),
  ];
}

export type RootColumn = "kind" | "frequency" | "q" | "damping" | "re" | "im" | "block";

export interface Sorting {
  readonly column: RootColumn;
  readonly isDescending: boolean;
}

/** Rows in another order; what has no value in the column stands last either way. */
export function sortedRows(rows: readonly RootRow[], { column, isDescending }: Sorting, nameOf: (id: string) => string): RootRow[] {
  const valueOf = (row: RootRow): number | string | null => (column === "block" ? (row.block === null ? null : nameOf(row.block)) : row[column]);
  const way = isDescending ? -1 : 1;
  return rows.toSorted((a, b) => {
    const [left, right] = [valueOf(a), valueOf(b)];
    if (left === null || right === null) return Number(left === null) - Number(right === null);
    const order = typeof left === "string" ? left.localeCompare(String(right), undefined, { numeric: true }) : left - Number(right);
    return way * order || a.frequency - b.frequency;
  });
}

/** A part of s in rad/s, four digits. */
export function radText(value: number): string {
  if (value === 0) return "0";
  const size = Math.abs(value);
  const text = size >= 1e6 || size < 1e-2 ? size.toExponential(3) : String(Number(size.toPrecision(4)));
  return `${value < 0 ? "−" : ""}${text.replace("e+", "e").replace("e-", "e−")}`;
}

/** `12.3 kHz`, `0 Hz` at the origin. */
export function rootFrequencyText({ frequency }: Pick<RootRow, "frequency">): string {
  return frequency === 0 ? "0 Hz" : formatFigure(frequency, "frequency");
}

export function qText({ q }: Pick<RootRow, "q">): string {
  return q === null ? "–" : formatFigure(q, "plain").replace("-", "−");
}

export function dampingText({ damping }: Pick<RootRow, "damping">): string {
  return damping === null ? "–" : damping.toFixed(3).replace("-", "−");
}

/** A root in words, for tooltips and screen readers. */
export function rootText(row: RootRow, nameOf: (id: string) => string): string {
  const what = `${row.isPair ? "pair of " : ""}${row.kind}${row.isPair ? "s" : ""}`;
  const width = row.isPair ? `, Q ${qText(row)}` : row.frequency === 0 ? "" : `, real, ζ ${dampingText(row)}`;
  const where = row.block === null ? "" : `, ${nameOf(row.block)}`;
  return `${what} at ${rootFrequencyText(row)}${width}${where}${row.isUnstable ? ", unstable" : ""}`;
}

/** `2e-10` as people write it. */
export function withinText(value: number): string {
  const [digits, power] = value.toExponential(0).split("e");
  return `${digits}·10${Array.from(String(Number(power)), (c) => SUPERSCRIPT[c]).join("")} dB`;
}

const SUPERSCRIPT: Readonly<Record<string, string>> = { "-": "⁻", "0": "⁰", "1": "¹", "2": "²", "3": "³", "4": "⁴", "5": "⁵", "6": "⁶", "7": "⁷", "8": "⁸", "9": "⁹" };

export interface LoopRow {
  readonly source: string;
  readonly block: string;
  readonly phaseMargin: string;
  readonly crossover: string;
  readonly gainMargin: string;
  readonly phaseCrossing: string;
  readonly isSmallest: boolean;
}

/** The loops, smallest phase margin first; those that never cross stand last. */
export function loopRows(loops: Stability["loops"]): LoopRow[] {
  const least = smallestMargin(loops);
  const hertz = (value: number | null): string => (value === null ? "–" : formatFigure(value, "frequency"));
  return loops
    .toSorted((a, b) => (a.phaseMargin ?? Infinity) - (b.phaseMargin ?? Infinity))
    .map(({ source, block, phaseMargin, crossover, gainMargin, phaseCrossing }) => ({
      source, block,
      phaseMargin: phaseMargin === null ? "never passes 1" : `${phaseMargin.toFixed(0).replace("-", "−")}°`,
      crossover: hertz(crossover),
      gainMargin: gainMargin === null ? "never turns" : `${gainMargin.toFixed(1).replace("-", "−")} dB`,
      phaseCrossing: hertz(phaseCrossing),
      isSmallest: source === least?.source,
    }));
}

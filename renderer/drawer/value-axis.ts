import type { OwnedValue } from "../../core/contract/drawer-schemas.ts";
import { seriesValues, type ESeries } from "../../core/e-series.ts";

/** A mark of the axis: a preferred value, or one of its own. */
export interface AxisMark {
  readonly value: number;
  readonly quantity: number;
  readonly lines: number;
  /** The smallest series that has it; null for a value of its own. */
  readonly series: 12 | 24 | null;
}

export interface Axis {
  /** Whole decades, SI. */
  readonly from: number;
  readonly to: number;
  readonly decades: readonly number[];
  readonly marks: readonly AxisMark[];
  readonly most: number;
}

/** A value is on a series if it is this near to one of its values, as a ratio. */
const SAME = 1e-3;
const USUAL: Readonly<Record<"resistance" | "capacitance" | "inductance", readonly [number, number]>> = { resistance: [10, 1e6], capacitance: [1e-11, 1e-4], inductance: [1e-5, 10] };

function seriesOf(value: number, series: ESeries): boolean {
  const mantissa = value / 10 ** Math.floor(Math.log10(value) + 1e-9);
  return seriesValues(series).some((v) => Math.abs(mantissa / v - 1) < SAME || Math.abs(mantissa / (v * 10) - 1) < SAME);
}

/**
 * The axis of a kind: every value that is owned, and between the first and the last of them every value of E12 and E24
 * that is not (quantity 0). Spans the decades in use, at least those that are usual for the kind.
 */
export function axisOf(owned: readonly OwnedValue[], quantity: "resistance" | "capacitance" | "inductance"): Axis {
  const values = owned.filter((o) => o.value > 0 && Number.isFinite(o.value));
  const exponents = values.map((o) => Math.floor(Math.log10(o.value) + 1e-9));
  const [least, last] = USUAL[quantity].map((v) => Math.round(Math.log10(v)));
  const first = Math.min(least, ...exponents);
  const end = Math.max(last, ...exponents.map((e) => e + 1));
  const decades = Array.from({ length: end - first + 1 }, (_, i) => Number(`1e${first + i}`));
  const marks: AxisMark[] = [];
  for (const { value, lines, quantity: pieces } of values) {
    const series = seriesOf(value, 12) ? 12 : seriesOf(value, 24) ? 24 : null;
    marks.push({ value, lines, quantity: pieces, series });
  }
  const [low, high] = [Math.min(...values.map((o) => o.value)), Math.max(...values.map((o) => o.value))];
  const has = (value: number): boolean => values.some((o) => Math.abs(o.value / value - 1) < SAME);
  for (const decade of decades) {
    for (const mantissa of seriesValues(24)) {
      const value = Number(`${mantissa}e${Math.round(Math.log10(decade))}`);
      if (value > low * (1 - SAME) && value < high * (1 + SAME) && !has(value)) marks.push({ value, lines: 0, quantity: 0, series: seriesOf(value, 12) ? 12 : 24 });
    }
  }
  marks.sort((a, b) => a.value - b.value);
  return { from: decades[0], to: decades.at(-1)!, decades, marks, most: Math.max(1, ...marks.map((m) => m.quantity)) };
}

/** Where a value stands on the axis, 0 … 1. */
export function placeOn(axis: Pick<Axis, "from" | "to">, value: number): number {
  return Math.log(value / axis.from) / Math.log(axis.to / axis.from);
}

/** The neighbourhood that a click on a value means: from halfway to the E12 value below to halfway to the one above. */
export function neighbourhood(value: number): { readonly from: number; readonly to: number } {
  const half = 10 ** (1 / 12);
  return { from: Number((value / half).toPrecision(4)), to: Number((value * half).toPrecision(4)) };
}

/** The axis in a sentence, for those who do not see it. */
export function axisText(axis: Axis, name: string, format: (value: number) => string): string {
  const owned = axis.marks.filter((m) => m.quantity > 0);
  if (owned.length === 0) return `No ${name} in the drawer.`;
  const empty = axis.marks.filter((m) => m.quantity === 0 && m.series === 12);
  const gaps = empty.length === 0 ? "No E12 value is missing between them." : `${empty.length} E12 values between them have none: ${empty.slice(0, 24).map((m) => format(m.value)).join(", ")}${empty.length > 24 ? " and more" : ""}.`;
  return `${owned.length} values of ${name}, from ${format(owned[0].value)} to ${format(owned.at(-1)!.value)}. ${gaps}`;
}

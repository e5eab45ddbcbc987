import type { StockKind, StockLine } from "../../core/drawer/stock.ts";
import { QUANTITY_OF, RATING_UNIT } from "../../core/drawer/check-line.ts";
import { formatCode, formatValue } from "../../core/units.ts";

/** What stands in a cell where nothing is known. */
export const NONE = "–";

export const KIND_NAMES: Readonly<Record<StockKind, { readonly one: string; readonly many: string }>> = {
  resistor: { one: "resistor", many: "Resistors" },
  capacitor: { one: "capacitor", many: "Capacitors" },
  inductor: { one: "inductor", many: "Inductors" },
  potentiometer: { one: "potentiometer", many: "Potentiometers" },
  "op-amp": { one: "op amp", many: "Op amps" },
};

/** `4k7`, `100n`, `TL072`: the value in trade notation, or an op amp's type. */
export function valueCode(line: Pick<StockLine, "kind" | "value" | "type">): string {
  const quantity = QUANTITY_OF[line.kind];
  if (quantity === null) return line.type ?? NONE;
  return line.value === null ? NONE : formatCode(line.value, quantity, 6);
}

/** `4.7 kΩ`: the value with its unit, as a screen reader should say it. */
export function valueText(line: Pick<StockLine, "kind" | "value" | "type">): string {
  const quantity = QUANTITY_OF[line.kind];
  if (quantity === null) return line.type ?? NONE;
  return line.value === null ? NONE : formatValue(line.value, quantity, { significant: "exact" });
}

/** `5 %` */
export function toleranceText(tolerance: number | null): string {
  return tolerance === null ? NONE : formatValue(tolerance, "ratio");
}

/** `63 V`, `0.25 W`; nothing where the kind has no rating. */
export function ratingText(line: Pick<StockLine, "kind" | "rating">): string {
  const unit = RATING_UNIT[line.kind];
  return unit === null || line.rating === null ? NONE : `${Number(line.rating.toPrecision(4))} ${unit}`;
}

/** `0.12 EUR`: at least two decimals, as many as four where the price needs them. */
export function costText(amount: number | null, currency: string): string {
  if (amount === null) return NONE;
  const exact = String(Number(amount.toFixed(4)));
  const decimals = Math.max(2, exact.split(".")[1]?.length ?? 0);
  return `${amount.toFixed(decimals)}${currency === "" ? "" : ` ${currency}`}`;
}

/** `6n8 film 5 %`: what a line is in few words, for lists and the sheet. */
export function lineName(line: Pick<StockLine, "kind" | "value" | "type" | "technology" | "tolerance">): string {
  return [valueCode(line), line.technology, line.tolerance === null ? "" : toleranceText(line.tolerance)].filter((part) => part !== "" && part !== NONE).join(" ");
}

/** `1 line`, `12 lines`: a count with its noun. */
export function counted(count: number, one: string, many = `${one}s`): string {
  return `${count.toLocaleString("en").replaceAll(",", " ")} ${count === 1 ? one : many}`;
}

/** `+4.1 %`, `−0.3 %`; one decimal where it is small. */
export function percentText(fraction: number): string {
  const percent = fraction * 100;
  const text = Math.abs(percent).toFixed(Math.abs(percent) < 10 ? 1 : 0);
  return `${Number(text) === 0 ? "" : percent > 0 ? "+" : "−"}${Number(text) === 0 ? "0" : text} %`;
}

/** A moment as people read it, in the system's own order. */
export function momentText(iso: string): string {
  const date = new Date(iso);
  return Number.isNaN(date.getTime()) ? iso : date.toLocaleString(undefined, { dateStyle: "medium", timeStyle: "short" });
}

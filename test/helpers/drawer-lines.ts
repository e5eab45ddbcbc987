import { seriesValues } from "../../core/e-series.ts";
import type { StockedLine, StockKind } from "../../core/drawer/stock.ts";

/** A line of the drawer with what a test cares for; plenty there, well rated, 10 ct. */
export function lineOf(id: string, kind: StockKind, valueOrType: number | string, more: Partial<StockedLine> = {}): StockedLine {
  return {
    id, kind,
    value: typeof valueOrType === "number" ? valueOrType : null,
    type: typeof valueOrType === "string" ? valueOrType : null,
    tolerance: kind === "op-amp" ? null : 0.05,
    rating: kind === "capacitor" ? 63 : kind === "resistor" ? 0.25 : null,
    technology: kind === "capacitor" ? "film" : kind === "resistor" ? "metal film" : "",
    temperatureCoefficient: null, windingR: null, package: "", location: "", prices: [{ from: 1, unitCost: 0.1 }], currency: "EUR", supplier: "", orderCode: "", notes: "",
    quantity: 100, reserved: 0,
    ...more,
  };
}

/** A well-stocked drawer: E24 resistors, E12 film capacitors up to 10 µF, larger electrolytics, tracks and dual op amps. */
export function fullDrawer(quantity = 100): StockedLine[] {
  const decades = (from: number, to: number): number[] => Array.from({ length: to - from + 1 }, (_, i) => from + i);
  const resistors = decades(0, 6).flatMap((d) => seriesValues(24).map((m) => lineOf(`R-${m}E${d}`, "resistor", Number(`${m}e${d}`), { tolerance: 0.01, quantity, prices: [{ from: 1, unitCost: 0.04 }, { from: 100, unitCost: 0.02 }] })));
  const films = decades(-11, -6).flatMap((d) => seriesValues(12).map((m) => lineOf(`C-${m}E${d}`, "capacitor", Number(`${m}e${d}`), { quantity })));
  const wet = [10e-6, 22e-6, 47e-6, 100e-6].map((c) => lineOf(`E-${c}`, "capacitor", c, { technology: "electrolytic", rating: 25, tolerance: 0.2, quantity }));
  const tracks = [10e3, 20e3, 50e3].map((r) => lineOf(`P-${r}`, "potentiometer", r, { tolerance: 0.2, quantity }));
  const amps = ["TL072", "TL074", "TL062", "NE5532"].map((type) => lineOf(type, "op-amp", type, { quantity }));
  return [...resistors, ...films, ...wet, ...tracks, ...amps];
}

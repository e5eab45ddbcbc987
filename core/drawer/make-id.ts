import { formatCode } from "../units.ts";
import { QUANTITY_OF } from "./check-line.ts";
import type { StockLine } from "./stock.ts";

const LETTER = { resistor: "R", capacitor: "C", inductor: "L", potentiometer: "P", "op-amp": "U" } as const;

/**
 * A name for a line that came without one, made of what it is: `R-4K7-METALFILM-1`. The same part gets the same name
 * every time, so that a table taken in again updates its own lines.
 */
export function makeId(line: Pick<StockLine, "kind" | "value" | "type" | "technology" | "tolerance" | "rating" | "package">): string {
  const quantity = QUANTITY_OF[line.kind];
  const value = line.value === null || quantity === null ? (line.type ?? "") : valueCode(line.value, quantity);
  const parts = [LETTER[line.kind], value, words(line.technology), line.tolerance === null ? "" : `${Number((line.tolerance * 100).toPrecision(3))}%`, ratingText(line), words(line.package)];
  return parts.filter((part) => part !== "").join("-").slice(0, 100);
}

/** The trade writes 2200u rather than 2m2. */
function valueCode(value: number, quantity: "resistance" | "capacitance" | "inductance"): string {
  if (quantity === "capacitance" && value >= 1e-3) return `${Number((value * 1e6).toPrecision(6))}u`;
  return formatCode(value, quantity, 6);
}

/** The same, but not one that is taken: a number is added. */
export function freeId(id: string, isTaken: (id: string) => boolean): string {
  if (!isTaken(id)) return id;
  for (let number = 2; ; number += 1) {
    const tail = `-${number}`;
    const candidate = id.slice(0, 100 - tail.length) + tail;
    if (!isTaken(candidate)) return candidate;
  }
}

function words(text: string): string {
  return text.toUpperCase().replaceAll(/[^\p{L}\p{N}.]+/gu, "");
}

function ratingText({ kind, rating }: Pick<StockLine, "kind" | "rating">): string {
  if (rating === null) return "";
  return `${Number(rating.toPrecision(3))}${kind === "capacitor" ? "V" : "W"}`;
}

import { readMoney, type Cell } from "./cells.ts";
import type { Money, StockLine } from "./stock.ts";

/** The most that a unit may cost: `15 EUR`, `€15`, or a bare amount where the lines have their prices in one currency. */
export function readCeiling(text: string, lines: readonly Pick<StockLine, "prices" | "currency">[]): Cell<Money> {
  const read = readMoney(text.trim().toUpperCase());
  if (!read.ok) return { ok: false, message: `must be an amount such as 15 or “15 EUR”, got “${text}”` };
  if (read.value.currency !== "") return read;
  const currencies = [...new Set(lines.filter((l) => l.prices.length > 0 && l.currency !== "").map((l) => l.currency))];
  if (currencies.length === 1) return { ok: true, value: { ...read.value, currency: currencies[0] } };
  return { ok: false, message: `name the currency, such as “15 EUR”: the drawer has prices in ${currencies.join(", ") || "none"}` };
}

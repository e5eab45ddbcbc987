import type { Bill } from "../../core/drawer/bill.ts";
import { guardFormula } from "../../core/drawer/formula-guard.ts";
import { moneysText, moneyText } from "./swap-text.ts";
import { lineName } from "./line-text.ts";

/** The shopping list as text, a block a supplier, to be pasted into a message. */
export function shoppingText(bill: Pick<Bill, "shopping" | "units">, name: string): string {
  const head = `Shopping list: ${name}, ${bill.units} ${bill.units === 1 ? "unit" : "units"}`;
  const groups = bill.shopping.map((group) => {
    const rows = group.items.map((item) => `  ${item.buy} × ${item.line.id}${item.line.orderCode === "" ? "" : ` (order code ${item.line.orderCode})`}, ${lineName(item.line)}: ${moneyText(item.cost)}`);
    return [group.supplier === "" ? "No supplier named" : group.supplier, ...rows, `  together ${moneysText(group.cost)}`].join("\n");
  });
  return [head, ...groups].join("\n\n");
}

/** The shopping list as a table: one row an item. */
export function shoppingCsv(bill: Pick<Bill, "shopping">): string {
  const rows = bill.shopping.flatMap((group) =>
    group.items.map(({ line, short, buy, unitCost, cost }) => [group.supplier, line.orderCode, line.id, lineName(line), String(short), String(buy), unitCost === null ? "" : String(unitCost.amount), cost === null ? "" : String(Number(cost.amount.toFixed(6))), cost?.currency ?? ""]),
  );
  return [["supplier", "order code", "line", "part", "missing", "buy", "unit cost", "cost", "currency"], ...rows].map((row) => row.map(cell).join(",")).join("\r\n") + "\r\n";
}

/** A cell as RFC 4180 has it; one that a spreadsheet would take for a formula is kept a text. */
function cell(text: string): string {
  const plain = guardFormula(text);
  return /[",\r\n]/.test(plain) ? `"${plain.replaceAll('"', '""')}"` : plain;
}

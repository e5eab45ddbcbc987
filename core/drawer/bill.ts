import type { Project } from "../model/project.ts";
import type { Board } from "../net/board.ts";
import { compareText } from "./candidates.ts";
import { amplifiersIn, boardRoles, type BoardRole } from "./roles.ts";
import { availableOf, leftAfter, unitCost, type Money, type StockedLine, type StockKind } from "./stock.ts";

/** What a number of units takes of one line. */
export interface BillRow {
  readonly line: StockedLine;
  /** Names of the roles, `block.role`; twice where two pieces of the line make one value. */
  readonly roles: readonly string[];
  /** Pieces a unit; packages for op amps. */
  readonly perUnit: number;
  readonly total: number;
  /** Free pieces before the build. */
  readonly available: number;
  /** Pieces missing. */
  readonly short: number;
  /** Stock left after this build; 0 where some are missing. */
  readonly left: number;
  /** Price of a piece at the total, and of all; null where unknown. */
  readonly unitCost: Money | null;
  readonly cost: Money | null;
}

/** Parts of a unit that no line of the drawer is named for. */
export interface UnassignedRow {
  readonly kind: StockKind;
  /** SI; null for op amps. */
  readonly value: number | null;
  /** Op amps: type. */
  readonly type: string | null;
  /** A line that the project names and the drawer does not have. */
  readonly missing: string | null;
  readonly roles: readonly string[];
  readonly perUnit: number;
  readonly total: number;
}

export interface ShoppingItem {
  readonly line: StockedLine;
  readonly short: number;
  /** Pieces to buy: more than are short where the next price break makes them cheaper. */
  readonly buy: number;
  readonly unitCost: Money | null;
  readonly cost: Money | null;
  /** What buying exactly the missing pieces would cost, where buying more is cheaper. */
  readonly insteadOf: Money | null;
}

export interface ShoppingGroup {
  /** Empty where the lines name none. */
  readonly supplier: string;
  readonly items: readonly ShoppingItem[];
  readonly cost: readonly Money[];
}

export interface Bill {
  readonly units: number;
  readonly rows: readonly BillRow[];
  readonly unassigned: readonly UnassignedRow[];
  /** One sum a currency, never added across; lines without a price are in `unpriced`. */
  readonly costPerUnit: readonly Money[];
  readonly cost: readonly Money[];
  readonly unpriced: readonly string[];
  /** Pieces a unit takes of each line: what the drawer reserves. */
  readonly reserve: readonly { readonly line: string; readonly count: number }[];
  readonly shopping: readonly ShoppingGroup[];
  /** Whether everything is assigned and there. */
  readonly isReady: boolean;
}

/** What a number of units of a board takes from the drawer, what is missing, and what it costs. @param lines as the build sees them: `freeForBuild` */
export function buildBill(board: Board, lines: readonly StockedLine[], units: number): Bill {
  const roles = boardRoles(board);
  const { counted, unassigned } = countLines(roles, lines);
  const rows = [...counted].map(([line, { names, perUnit }]): BillRow => {
    const total = perUnit * units;
    const left = leftAfter(line, perUnit, units);
    const each = unitCost(line, total);
    return {
      line, roles: names, perUnit, total, available: availableOf(line),
      short: Math.max(0, -left), left: Math.max(0, left),
      unitCost: each === null ? null : { amount: each, currency: line.currency },
      cost: each === null ? null : { amount: each * total, currency: line.currency },
    };
  });
  rows.sort((a, b) => KIND_ORDER[a.line.kind] - KIND_ORDER[b.line.kind] || (a.line.value ?? 0) - (b.line.value ?? 0) || compareText(a.line.id, b.line.id));
  const cost = sumMoney(rows.map((r) => r.cost));
  return {
    units, rows, cost, unassigned: unassignedRows(unassigned, units),
    costPerUnit: cost.map(({ currency, amount }) => ({ currency, amount: amount / units })),
    unpriced: rows.filter((r) => r.cost === null).map((r) => r.line.id),
    reserve: rows.map((r) => ({ line: r.line.id, count: r.perUnit })),
    shopping: shoppingList(rows),
    isReady: unassigned.length === 0 && rows.every((r) => r.short === 0),
  };
}

const KIND_ORDER: Readonly<Record<StockKind, number>> = { resistor: 0, capacitor: 1, inductor: 2, potentiometer: 3, "op-amp": 4 };

interface Unassigned {
  readonly role: BoardRole;
  readonly value: number | null;
  readonly missing: string | null;
}

/** Pieces (packages for op amps) that one unit takes of each line, with the roles that take them. */
export function countLines(roles: readonly BoardRole[], lines: readonly StockedLine[]): { readonly counted: ReadonlyMap<StockedLine, { readonly names: string[]; readonly perUnit: number }>; readonly unassigned: readonly Unassigned[] } {
  const byId = new Map(lines.map((l) => [l.id, l]));
  const names = new Map<StockedLine, string[]>();
  const unassigned: Unassigned[] = [];
  const take = (role: BoardRole, id: string | null, value: number | null): void => {
    const line = id === null ? undefined : byId.get(id);
    if (!line) unassigned.push({ role, value, missing: id });
    else if (names.has(line)) names.get(line)!.push(role.name);
    else names.set(line, [role.name]);
  };
  for (const role of roles) {
    const { second } = role.part ?? {};
    take(role, role.stock, second ? second.firstValue : role.value);
    if (second) take(role, second.stock ?? null, second.value);
  }
  const counted = new Map([...names].map(([line, own]) => [line, { names: own, perUnit: line.kind === "op-amp" && line.type !== null ? Math.ceil(own.length / amplifiersIn(line.type)) : own.length }]));
  return { counted, unassigned };
}

function unassignedRows(parts: readonly Unassigned[], units: number): UnassignedRow[] {
  const groups = new Map<string, Unassigned[]>();
  for (const part of parts) {
    const key = JSON.stringify([part.role.kind, part.value, part.role.type, part.missing]);
    groups.set(key, [...(groups.get(key) ?? []), part]);
  }
  return [...groups.values()]
    .map((group): UnassignedRow => {
      const [{ role, value, missing }] = group;
      const perUnit = role.type === null ? group.length : Math.ceil(group.length / amplifiersIn(role.type));
      return { kind: role.kind, value, type: role.type, missing, roles: group.map((p) => p.role.name), perUnit, total: perUnit * units };
    })
    .toSorted((a, b) => KIND_ORDER[a.kind] - KIND_ORDER[b.kind] || (a.value ?? 0) - (b.value ?? 0) || compareText(a.type ?? "", b.type ?? "") || compareText(a.missing ?? "", b.missing ?? ""));
}

/** How many to buy so that at least `short` come at the least cost: exactly those, or up to a cheaper price break. */
export function cheapestPurchase(line: Pick<StockedLine, "prices" | "currency">, short: number): Pick<ShoppingItem, "buy" | "unitCost" | "cost" | "insteadOf"> {
  const exact = unitCost(line, short);
  if (exact === null) return { buy: short, unitCost: null, cost: null, insteadOf: null };
  let [buy, each] = [short, exact];
  for (const { from, unitCost: price } of line.prices) if (from > short && from * price < buy * each) [buy, each] = [from, price];
  const money = (amount: number): Money => ({ amount, currency: line.currency });
  return { buy, unitCost: money(each), cost: money(buy * each), insteadOf: buy === short ? null : money(short * exact) };
}

function shoppingList(rows: readonly BillRow[]): ShoppingGroup[] {
  const groups = new Map<string, ShoppingItem[]>();
  for (const { line, short } of rows) {
    if (short === 0) continue;
    const item = { line, short, ...cheapestPurchase(line, short) };
    groups.set(line.supplier, [...(groups.get(line.supplier) ?? []), item]);
  }
  return [...groups]
    .map(([supplier, items]) => ({ supplier, items, cost: sumMoney(items.map((i) => i.cost)) }))
    .toSorted((a, b) => Number(a.supplier === "") - Number(b.supplier === "") || compareText(a.supplier, b.supplier));
}

/** Units that the pieces there are enough for. */
export function unitsThere({ rows }: Pick<Bill, "rows">): number {
  return Math.min(...rows.map((r) => Math.floor(r.available / r.perUnit)));
}

/** Sums by currency, in the order of their codes. */
export function sumMoney(amounts: readonly (Money | null)[]): Money[] {
  const sums = new Map<string, number>();
  for (const money of amounts) if (money) sums.set(money.currency, (sums.get(money.currency) ?? 0) + money.amount);
  return [...sums].map(([currency, amount]) => ({ currency, amount })).toSorted((a, b) => compareText(a.currency, b.currency));
}

/** The name under which a project's builds are reserved. */
export function buildReference(project: Pick<Project, "name">): string {
  return project.name.trim().slice(0, 200) || "Untitled board";
}

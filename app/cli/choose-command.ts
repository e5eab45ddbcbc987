import { stat } from "node:fs/promises";
import { resolve } from "node:path";
import type { Command } from "commander";
import type { Candidate, Money } from "../../core/drawer/candidates.ts";
import type { StockedLine } from "../../core/drawer/stock.ts";
import { formatValue, parseValue } from "../../core/units.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { serializeProject } from "../../core/model/serialize.ts";
import type { Project } from "../../core/model/project.ts";
import { ownDrawerPath } from "../services/drawer-path.ts";
import { writeFailure } from "../services/system-error.ts";
import { writeWhole } from "../services/write-whole.ts";
import type { DrawerStore } from "../store/drawer-store.ts";
import { CommandFailure, EXIT } from "./failure.ts";
import { withDrawer as withOpenDrawer } from "./stock-drawer.ts";

/** What the commands that choose parts have in common: which drawer, and JSON. */
export interface ChooseOpts {
  readonly drawer?: string;
  readonly json?: true;
}

/** Adds the options that every command on the drawer takes. */
export function withDrawerOptions(command: Command): Command {
  return command.option("--drawer <PATH>", "drawer file; your own where not given").option("--json", "as JSON");
}

/**
 * Runs work on the drawer and closes it. A drawer that is not there is bad input: a command that reads makes no file.
 * @throws CommandFailure
 */
export async function withDrawer<T>(opts: ChooseOpts, work: (store: DrawerStore) => T | Promise<T>): Promise<T> {
  const path = opts.drawer === undefined ? ownDrawerPath() : resolve(opts.drawer);
  if ((await stat(path).catch(() => null)) === null) throw new CommandFailure(`there is no drawer at ${path}: “bandwright stock import” makes one${opts.drawer === undefined ? ", or name another with --drawer" : ""}`);
  return await withOpenDrawer(opts, work);
}

/** Writes a project whole or not at all. @throws CommandFailure (exit 1) where the system would not */
export async function writeProject(path: string, project: Project): Promise<void> {
  const text = serializeProject(project);
  // What could not be opened again is not written either.
  restoreProject(text);
  try {
    await writeWhole(resolve(path), text);
  } catch (error) {
    throw new CommandFailure(writeFailure(path, error).message, EXIT.failed);
  }
}

/** A whole number above 0. @throws CommandFailure */
export function readCount(text: string, option: string, most = 100_000): number {
  const count = Number(text);
  if (!/^\d+$/.test(text.trim()) || count < 1 || count > most) throw new CommandFailure(`${option}: must be a whole number from 1 to ${most}, got “${text}”`);
  return count;
}

/** A fraction such as `20%` or `0.2`. @throws CommandFailure */
export function readFraction(text: string, option: string): number {
  const parsed = parseValue(text, "ratio");
  if (!parsed.ok || parsed.value < 0 || parsed.value > 10) throw new CommandFailure(`${option}: must be a fraction such as 20% or 0.2, got “${text}”`);
  return parsed.value;
}

/** An amount such as `15`, `15 EUR` or `12,50EUR`; without a currency that of the drawer, where it knows but one. @throws CommandFailure */
export function readMoney(text: string, option: string, lines: readonly StockedLine[]): Money {
  const match = /^\s*(\d+(?:[.,]\d+)?)\s*([A-Za-z]{3})?\s*$/.exec(text);
  if (!match) throw new CommandFailure(`${option}: must be an amount such as 15 or “15 EUR”, got “${text}”`);
  const currencies = [...new Set(lines.filter((l) => l.prices.length > 0).map((l) => l.currency))];
  const currency = match[2]?.toUpperCase() ?? (currencies.length === 1 ? currencies[0] : undefined);
  if (currency === undefined) throw new CommandFailure(`${option}: name the currency, such as “15 EUR”: the drawer has prices in ${currencies.join(", ") || "none"}`);
  return { amount: Number(match[1].replace(",", ".")), currency };
}

/** `1.25 EUR`; small amounts with as many digits as they need. */
export function moneyText(money: Money | null): string {
  if (money === null) return "–";
  const cents = money.amount.toFixed(2);
  return `${Math.abs(Number(cents) - money.amount) < 1e-9 ? cents : money.amount.toFixed(4)} ${money.currency}`;
}

/** Sums in several currencies, side by side. */
export function sumText(sums: readonly Money[]): string {
  return sums.length === 0 ? "no prices known" : sums.map((m) => `${m.amount.toFixed(2)} ${m.currency}`).join(" and ");
}

/** The lines of a candidate: `A + B` in series, `A ‖ B` in parallel. */
export function linesText(candidate: Pick<Candidate, "lines" | "joined">): string {
  return candidate.lines.map((l) => l.id).join(candidate.joined === "series" ? " + " : " ‖ ");
}

/** A part's value in the unit of its kind; op amps by type. */
export function stockText(kind: StockedLine["kind"], value: number | null, type: string | null): string {
  if (value === null) return type ?? "–";
  return formatValue(value, kind === "capacitor" ? "capacitance" : kind === "inductor" ? "inductance" : "resistance", { significant: 4 });
}

/** `+1.2 %`, with a true minus. */
export function percentText(fraction: number | null, digits = 2): string {
  if (fraction === null) return "–";
  const text = Math.abs(fraction * 100).toFixed(digits);
  return `${Number(text) === 0 ? "" : fraction > 0 ? "+" : "−"}${text} %`;
}

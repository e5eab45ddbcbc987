import { readFile, stat } from "node:fs/promises";
import { resolve } from "node:path";
import { buildReference } from "../../core/drawer/bill.ts";
import type { Candidate } from "../../core/drawer/candidates.ts";
import { QUANTITY_OF } from "../../core/drawer/check-line.ts";
import { RATING_CAUTION, needsRatingCaution, type Problem } from "../../core/drawer/stress.ts";
import { freeForBuild, type Money, type StockedLine } from "../../core/drawer/stock.ts";
import { formatValue, parseValue } from "../../core/units.ts";
import { PROJECT_FORMAT, type Project } from "../../core/model/project.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { serializeProject } from "../../core/model/serialize.ts";
import { MAX_PROJECT_BYTES } from "../services/projects.ts";
import { writeFailure } from "../services/system-error.ts";
import { writeWhole } from "../services/write-whole.ts";
import type { DrawerStore } from "../store/drawer-store.ts";
import { CommandFailure, EXIT } from "./failure.ts";

/** Every line in use, as a build of this project sees it: what the project holds itself is there for it. */
export function linesFor(store: DrawerStore, project: Project): readonly StockedLine[] {
  return freeForBuild(store.allLines(), store.heldBy(buildReference(project)));
}

/** What is said of every `-o`. */
export const OUTPUT_HELP = "where to write the board. A project that is there, FILE itself too, is replaced; any other file is left alone";

/** Looks at what a board would be written over, before any work is done. @throws CommandFailure where that is no project */
export async function requireOutput(path: string): Promise<void> {
  const there = await stat(path).catch(() => null);
  if (there === null || (there.isFile() && there.size === 0)) return;
  if (!there.isFile()) throw new CommandFailure(`-o: ${path} is ${there.isDirectory() ? "a folder" : "not an ordinary file"}: name a file to write the board to`);
  if (there.size > MAX_PROJECT_BYTES || !(await isProjectFile(path))) throw new CommandFailure(`-o: ${path} is there already and is no project, so nothing was written over it: choose another name, or remove the file first`);
}

/** Whether a file says that it is a project, of whatever version and however faulty. */
async function isProjectFile(path: string): Promise<boolean> {
  try {
    const value: unknown = JSON.parse(new TextDecoder("utf-8", { fatal: true }).decode(await readFile(path)));
    return typeof value === "object" && value !== null && "format" in value && value.format === PROJECT_FORMAT;
  } catch {
    return false;
  }
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

/** Says on a terminal what is under way, for as long as it is. */
export function underWay<T>(what: string, work: () => T): T {
  if (!process.stderr.isTTY) return work();
  const text = `${what} …`;
  process.stderr.write(text);
  try {
    return work();
  } finally {
    process.stderr.write(`\r${" ".repeat(text.length)}\r`);
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

/** `1.25 EUR`; small amounts with as many digits as they need. */
export function moneyText(money: Money | null): string {
  if (money === null) return "–";
  const cents = money.amount.toFixed(2);
  return `${Math.abs(Number(cents) - money.amount) < 1e-9 ? cents : money.amount.toFixed(4)} ${money.currency}`.trim();
}

/** Sums in several currencies, side by side. */
export function sumText(sums: readonly Money[]): string {
  return sums.length === 0 ? "no prices known" : sums.map((m) => `${m.amount.toFixed(2)} ${m.currency}`.trim()).join(" and ");
}

/** The lines of a candidate: `A + B` in series, `A ‖ B` in parallel. */
export function linesText(candidate: Pick<Candidate, "lines" | "joined">): string {
  return candidate.lines.map((l) => l.id).join(candidate.joined === "series" ? " + " : " ‖ ");
}

/** A part's value in the unit of its kind; op amps by type. */
export function stockText(kind: StockedLine["kind"], value: number | null, type: string | null): string {
  const quantity = QUANTITY_OF[kind];
  return value === null || quantity === null ? (type ?? "–") : formatValue(value, quantity, { significant: 4 });
}

/** `+1.2 %`, with a true minus. */
export function percentText(fraction: number | null, digits = 2): string {
  if (fraction === null) return "–";
  const text = Math.abs(fraction * 100).toFixed(digits);
  return `${Number(text) === 0 ? "" : fraction > 0 ? "+" : "−"}${text} %`;
}

/** Writes what is to be said of lines in their places, `where` before each; what is said of several places alike is said once. */
export function printProblems(found: readonly { readonly where: string; readonly line: string; readonly problem: Problem }[]): void {
  if (found.length === 0) return;
  const said = new Map<string, Map<string, string[]>>();
  for (const { where, line, problem } of found) {
    const text = `${problem.level === "fault" ? "does not do: " : ""}${problem.message}`;
    const places = said.get(text) ?? new Map<string, string[]>();
    said.set(text, places.set(line, [...(places.get(line) ?? []), where]));
  }
  const placesText = (places: ReadonlyMap<string, string[]>): string => [...places].map(([line, where]) => `${where.join(", ")}, ${line}`).join("; ");
  process.stdout.write(`\n${[...said].map(([text, places]) => `${placesText(places)}: ${text}`).join("\n")}\n`);
  if (needsRatingCaution(found.map((one) => one.problem))) process.stdout.write(`${RATING_CAUTION}\n`);
}

import { readFile } from "node:fs/promises";
import { Command } from "commander";
import { FaultError, faultText } from "../../core/errors.ts";
import { instability, troubleText, type Trouble } from "../../core/analysis/summary.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { resolveBoard, type Board } from "../../core/net/board.ts";
import { compileBoard, type CompiledBoard } from "../../core/net/star.ts";
import type { ValueOpts } from "../../core/net/values.ts";
import { parseValue } from "../../core/units.ts";
import { CommandFailure } from "./failure.ts";

export interface SliderOpts {
  readonly set?: readonly string[];
  readonly all?: string;
  readonly measured?: true;
}

export interface LoadedBoard {
  readonly board: Board;
  readonly compiled: CompiledBoard;
  /** Slider positions and kind of values of this run, as every analysis takes them. */
  readonly run: Required<Pick<ValueOpts, "positions" | "isMeasured">>;
  /** In which loop the board oscillates in this run, so that no figure of it means anything; undefined where it is at peace or nobody can tell. */
  readonly unstable: string | undefined;
  /** The same, or that nobody can tell; null where it is at peace. */
  readonly trouble: Trouble | null;
}

/** A command on a project file, with the slider options that everything takes that computes a response. */
export function boardCommand(name: string, about: string, example: string): Command {
  return new Command(name)
    .description(about)
    .argument("<FILE>", "project file (.bandwright)")
    .option("--set <ID=POS...>", "slider positions for this run: 0 is full cut, 0.5 centre, 1 full boost (repeatable)")
    .option("--all <POS>", "the position of every other slider for this run")
    .addHelpText("after", `\nExample:\n  bandwright ${example}`);
}

/** The same, which may take the measured values of parts for its own. */
export function analysisCommand(name: string, about: string, example: string): Command {
  return boardCommand(name, about, example).option("--measured", "take the measured value of a part where it has one");
}

/**
 * Reads, checks and compiles a project file. Warnings go to stderr, and so does word of a board that oscillates.
 * @throws CommandFailure with every fault, one a line
 */
export async function loadBoard(file: string, opts: SliderOpts): Promise<LoadedBoard> {
  let text: string;
  try {
    text = new TextDecoder("utf-8", { fatal: true, ignoreBOM: true }).decode(await readFile(file));
  } catch (error) {
    throw new CommandFailure(`${file === "" ? "FILE “”" : file}: ${readProblem(error)}`);
  }
  try {
    const { project, warnings } = restoreProject(text);
    const board = resolveBoard(project);
    for (const warning of [...warnings, ...board.warnings]) process.stderr.write(`${file}: warning: ${faultText(warning)}\n`);
    const run = { positions: sliderPositions(board, opts), isMeasured: opts.measured === true };
    const trouble = instability(board, run);
    if (trouble) process.stderr.write(`${file}: ${troubleText(trouble)}\n`);
    return { board, run, compiled: compileBoard(board, run), unstable: trouble?.is === "unstable" ? trouble.text : undefined, trouble };
  } catch (error) {
    if (error instanceof FaultError) throw new CommandFailure(error.faults.map((fault) => `${file}: ${faultText(fault)}`).join("\n"));
    throw error;
  }
}

function readProblem(error: unknown): string {
  const code = error instanceof Error && "code" in error ? String(error.code) : "";
  const known: Record<string, string> = {
    ENOENT: "there is no such file",
    EISDIR: "this is a folder, not a project file",
    EACCES: "this file may not be read (no permission)",
    ERR_ENCODING_INVALID_ENCODED_DATA: "this is not UTF-8 text, so it is not a project file",
  };
  return known[code] ?? (error instanceof Error ? error.message : String(error));
}

function sliderPositions(board: Board, opts: SliderOpts): Record<string, number> {
  const bands = board.chain.flatMap((item) => item.bands);
  const read = (text: string, option: string): number => {
    const parsed = parseValue(text, "ratio");
    if (!parsed.ok || parsed.value < 0 || parsed.value > 1) throw new CommandFailure(`${option}: the position must be from 0 (full cut) to 1 (full boost), got “${text}”`);
    return parsed.value;
  };
  const all = opts.all === undefined ? undefined : read(opts.all, "--all");
  const positions = Object.fromEntries(bands.map((band) => [band.id, all ?? band.slider!.position]));
  for (const entry of opts.set ?? []) {
    const at = entry.lastIndexOf("=");
    if (at <= 0) throw new CommandFailure(`--set: must be ID=POS, such as b1k=0.75, got “${entry}”. Put the file before --set`);
    const id = entry.slice(0, at);
    if (!Object.hasOwn(positions, id)) throw new CommandFailure(`--set: there is no band “${id}” on a bus of this board: its bands are ${bands.map((b) => b.id).join(", ") || "none"}`);
    positions[id] = read(entry.slice(at + 1), `--set ${id}`);
  }
  return positions;
}

/** A frequency option in trade notation, Hz. @throws CommandFailure */
export function readFrequency(text: string, option: string): number {
  const parsed = parseValue(text, "frequency");
  if (!parsed.ok || parsed.value <= 0) throw new CommandFailure(`${option}: must be a frequency above 0 in Hz, such as 20 or 1k, got “${text}”`);
  return parsed.value;
}

/** Stands after a figure of a board that oscillates. */
export const MEANINGLESS = "?";

/** The key that marks a JSON result of a board that oscillates; none where it is at peace. */
export function unstableKey(unstable: string | undefined): { readonly unstable?: string } {
  return unstable === undefined ? {} : { unstable };
}

/** Ends what was printed for people of a board that oscillates; says nothing where it is at peace. */
export function printMeaningless(unstable: string | undefined, prefix = ""): void {
  if (unstable !== undefined) process.stdout.write(`\n${prefix}What is worked out above means nothing: ${unstable}\n`);
}

/** JSON for other programs: stable, indented, and without NaN or Infinity. @throws CommandFailure (exit 1) where a number is not finite */
export function printJson(value: unknown): void {
  process.stdout.write(`${finiteJson(value)}\n`);
}

/** A result as JSON text; a command that shows it to people calls this too, so that neither form has NaN in it. @throws CommandFailure */
export function finiteJson(value: unknown): string {
  return JSON.stringify(
    value,
    (key, inner: unknown) => {
      if (typeof inner === "number" && !Number.isFinite(inner)) throw new CommandFailure(`no finite result for “${key}”: some value of the board is out of any practical range`, 1);
      return inner;
    },
    2,
  );
}

/** Columns of text: those that hold figures to the right, words and the first column to the left. */
export function printTable(head: readonly string[], rows: readonly (readonly string[])[]): void {
  const widths = head.map((title, column) => Math.max(title.length, ...rows.map((row) => row[column].length)));
  const isFigures = head.map((_, column) => column > 0 && rows.every((row) => /^([+−-]?[\d.]|–|$)/.test(row[column])));
  const line = (cells: readonly string[]): string => cells.map((cell, column) => (isFigures[column] ? cell.padStart(widths[column]) : cell.padEnd(widths[column]))).join("  ").trimEnd();
  process.stdout.write(`${[head, ...rows].map(line).join("\n")}\n`);
}

import type { Command } from "commander";
import { readCeiling } from "../../core/drawer/ceiling.ts";
import { fillBoard, type FillResult } from "../../core/drawer/fill.ts";
import { boardCommand, loadBoard, printJson, printMeaningless, printTable, unstableKey, type SliderOpts } from "./board-command.ts";
import { linesFor, linesText, OUTPUT_HELP, percentText, printProblems, readCount, readFraction, requireOutput, stockText, sumText, underWay, writeProject } from "./choose-command.ts";
import { CommandFailure, EXIT } from "./failure.ts";
import { read, withDrawer, withDrawerOptions, type DrawerOption } from "./stock-drawer.ts";

interface FillCommandOpts extends SliderOpts, DrawerOption {
  readonly output: string;
  readonly units: string;
  readonly window: string;
  readonly ceiling?: string;
  readonly keep?: true;
}

/** `fill FILE -o OUT`: a stock line for every part, so that the response changes least. */
export function fillCommand(): Command {
  return withDrawerOptions(
    boardCommand("fill", "fill the whole board from the drawer, so that its response changes least", "fill channel.bandwright --units 2 --ceiling 30EUR -o built.bandwright")
      .requiredOption("-o, --output <FILE>", OUTPUT_HELP)
      .option("--units <N>", "units to build: pieces have to be there for each", "1")
      .option("--window <FRACTION>", "how far a value may be off", "20%")
      .option("--ceiling <COST>", "most that the parts of one unit may cost")
      .option("--keep", "parts that name a line with enough pieces keep it, unless it does not do there"),
    "has to be there",
  ).action(async (file: string, opts: FillCommandOpts) => {
    const units = readCount(opts.units, "--units");
    const window = readFraction(opts.window, "--window");
    const { board, run: { positions }, unstable } = await loadBoard(file, opts);
    await requireOutput(opts.output);
    const lines = await withDrawer(opts, "has to be there", (store) => linesFor(store, board.project));
    const ceiling = opts.ceiling === undefined ? undefined : read("--ceiling", opts.ceiling, (text) => readCeiling(text, lines));
    const result = underWay(`filling the board from ${lines.length} lines`, () => fillBoard(board, lines, { positions, units, window, keep: opts.keep === true, ...(ceiling === undefined ? {} : { ceiling }) }));
    if (!result.isWithinCeiling) throw new CommandFailure(`the cheapest parts that fit come to ${sumText(result.cost)} a unit: more than the ceiling. Nothing was written`, EXIT.failed);
    if (result.placed.length === 0) throw new CommandFailure(`${unplacedText(result)}\nnothing of the drawer goes into this board. Nothing was written`, EXIT.failed);
    await writeProject(opts.output, result.project);
    if (opts.json) printJson({ ...fillJson(result), ...unstableKey(unstable) });
    else {
      printFill(result);
      printMeaningless(unstable);
    }
    if (result.unplaced.length > 0) process.stderr.write(`${unplacedText(result)}\n`);
  });
}

/** Roles without a line, by the reason. */
function unplacedText({ unplaced }: FillResult): string {
  const roles = new Map<string, string[]>();
  for (const { role, reason } of unplaced) roles.set(reason, [...(roles.get(reason) ?? []), role.name]);
  return [...roles].map(([reason, names]) => `${names.join(", ")} ${names.length === 1 ? "keeps its value" : "keep their values"} without a line: ${reason}`).join("\n");
}

function fillJson(r: FillResult): object {
  return {
    error: r.error, worst: r.worst, isExhaustive: r.isExhaustive, cost: r.cost,
    placed: r.placed.map((p) => ({ role: p.role.name, lines: p.candidate?.lines.map((l) => l.id) ?? [p.line.id], joined: p.candidate?.joined ?? null, wanted: p.role.value, value: p.candidate?.value ?? p.role.value, type: p.line.type, deviation: p.candidate?.deviation ?? 0, left: p.left, problems: p.problems })),
    unplaced: r.unplaced.map((u) => ({ role: u.role.name, wanted: u.role.value, type: u.role.type, reason: u.reason })),
  };
}

function printFill(r: FillResult): void {
  printTable(
    ["role", "wanted", "line", "value", "off", "left"],
    r.placed.map(({ role, line, candidate, left }) => [role.name, stockText(role.kind, role.value, role.type), candidate === null ? line.id : linesText(candidate), stockText(line.kind, candidate === null ? role.value : candidate.value, line.type), candidate === null ? "–" : percentText(candidate.deviation), String(left)]),
  );
  printProblems(r.placed.flatMap((p) => p.problems.map((problem) => ({ where: p.role.name, line: p.line.id, problem }))));
  process.stdout.write(`\n${r.placed.length} placed, ${r.unplaced.length} not; response error ${r.error.toFixed(3)} dB, ${r.worst.toFixed(2)} dB at worst; ${sumText(r.cost)} a unit\n`);
}

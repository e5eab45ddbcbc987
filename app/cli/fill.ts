import type { Command } from "commander";
import { fillBoard, type FillResult } from "../../core/drawer/fill.ts";
import { RATING_CAUTION } from "../../core/drawer/stress.ts";
import { boardCommand, loadBoard, printJson, printTable, type SliderOpts } from "./board-command.ts";
import { linesText, percentText, readCount, readFraction, readMoney, stockText, sumText, withDrawer, withDrawerOptions, writeProject, type ChooseOpts } from "./choose-command.ts";
import { CommandFailure, EXIT } from "./failure.ts";

interface FillCommandOpts extends SliderOpts, ChooseOpts {
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
      .requiredOption("-o, --output <FILE>", "where to write the board")
      .option("--units <N>", "units to build: pieces have to be there for each", "1")
      .option("--window <FRACTION>", "how far a value may be off", "20%")
      .option("--ceiling <COST>", "most that the parts of one unit may cost")
      .option("--keep", "parts that name a line with enough pieces keep it"),
  ).action(async (file: string, opts: FillCommandOpts) => {
    const units = readCount(opts.units, "--units");
    const window = readFraction(opts.window, "--window");
    const { board, run: { positions, isMeasured } } = await loadBoard(file, opts);
    if (isMeasured) throw new CommandFailure("--measured: filling aims at the board's design values, and puts other pieces in");
    const lines = await withDrawer(opts, (store) => store.allLines());
    const ceiling = opts.ceiling === undefined ? undefined : readMoney(opts.ceiling, "--ceiling", lines);
    const result = fillBoard(board, lines, { positions, units, window, keep: opts.keep === true, ...(ceiling === undefined ? {} : { ceiling }) });
    if (!result.isWithinCeiling) throw new CommandFailure(`the cheapest parts that fit come to ${sumText(result.cost)} a unit: more than the ceiling. Nothing was written`, EXIT.failed);
    await writeProject(opts.output, result.project);
    if (opts.json) printJson(fillJson(result));
    else printFill(result);
    for (const { role, reason } of result.unplaced) process.stderr.write(`${role.name} keeps its value without a line: ${reason}\n`);
  });
}

function fillJson(r: FillResult): unknown {
  return {
    error: r.error, worst: r.worst, isExhaustive: r.isExhaustive, cost: r.cost,
    placed: r.placed.map((p) => ({ role: p.role.name, lines: p.candidate?.lines.map((l) => l.id) ?? [p.line.id], joined: p.candidate?.joined ?? null, wanted: p.role.value, value: p.candidate?.value ?? p.role.value, type: p.line.type, deviation: p.candidate?.deviation ?? 0, problems: p.problems })),
    unplaced: r.unplaced.map((u) => ({ role: u.role.name, wanted: u.role.value, type: u.role.type, reason: u.reason })),
  };
}

function printFill(r: FillResult): void {
  printTable(
    ["role", "wanted", "line", "value", "off"],
    r.placed.map(({ role, line, candidate }) => [role.name, stockText(role.kind, role.value, role.type), candidate === null ? line.id : linesText(candidate), stockText(line.kind, candidate === null ? role.value : candidate.value, line.type), candidate === null ? "–" : percentText(candidate.deviation)]),
  );
  const notes = r.placed.flatMap((p) => p.problems.map((q) => `${p.role.name}, ${p.line.id}: ${q.message}`));
  if (notes.length > 0) process.stdout.write(`\n${notes.join("\n")}\n${RATING_CAUTION}\n`);
  process.stdout.write(`\n${r.placed.length} placed, ${r.unplaced.length} not; response error ${r.error.toFixed(3)} dB, ${r.worst.toFixed(2)} dB at worst; ${sumText(r.cost)} a unit\n`);
}

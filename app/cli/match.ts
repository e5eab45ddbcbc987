import type { Command } from "commander";
import { matchPieces, type MatchResult } from "../../core/drawer/match.ts";
import { boardCommand, loadBoard, printJson, printMeaningless, printTable, unstableKey, type SliderOpts } from "./board-command.ts";
import { OUTPUT_HELP, percentText, readCount, requireOutput, stockText, underWay, writeProject } from "./choose-command.ts";
import { CommandFailure, EXIT } from "./failure.ts";
import { withDrawer, withDrawerOptions, type DrawerOption } from "./stock-drawer.ts";

interface MatchCommandOpts extends SliderOpts, DrawerOption {
  readonly output: string;
  readonly deals: string;
  readonly seed: string;
}

/** `match FILE -o OUT`: measured pieces, dealt to the roles where they do most good. */
export function matchCommand(): Command {
  return withDrawerOptions(
    boardCommand("match", "deal the measured pieces of the drawer to the roles that name their line, so that the board comes nearest its design", "match channel.bandwright -o matched.bandwright")
      .requiredOption("-o, --output <FILE>", OUTPUT_HELP)
      .option("--deals <N>", "random deals to compare with", "200")
      .option("--seed <N>", "seed of the random deals", "1"),
    "has to be there",
  ).action(async (file: string, opts: MatchCommandOpts) => {
    const deals = readCount(opts.deals, "--deals", 10_000);
    const seed = readCount(opts.seed, "--seed", 2 ** 32 - 1);
    const { board, run: { positions }, unstable } = await loadBoard(file, opts);
    await requireOutput(opts.output);
    const pieces = await withDrawer(opts, "has to be there", (store) => store.allPieces());
    const result = underWay(`dealing ${pieces.length} pieces`, () => matchPieces(board, pieces, { positions, deals, seed }));
    if (result.matched.length === 0) throw new CommandFailure("no part of the board names a stock line of which pieces have been measured. Nothing was written", EXIT.failed);
    await writeProject(opts.output, result.project);
    if (opts.json) printJson({ ...matchJson(result), ...unstableKey(unstable) });
    else {
      printMatch(result);
      printMeaningless(unstable);
    }
  });
}

function matchJson(r: MatchResult): object {
  return {
    error: r.error, random: r.random,
    matched: r.matched.map((m) => ({ role: m.role.name, line: m.piece.line, piece: m.piece.id, mark: m.piece.mark, nominal: m.role.value, measured: m.piece.value, deviation: m.deviation })),
    unmatched: r.unmatched.map((u) => ({ role: u.role.name, reason: u.reason })),
  };
}

function printMatch(r: MatchResult): void {
  printTable(
    ["role", "line", "piece", "measured", "off"],
    r.matched.map((m) => [m.role.name, m.piece.line, m.piece.mark === "" ? `no. ${m.piece.id}` : m.piece.mark, stockText(m.role.kind, m.piece.value, null), percentText(m.deviation)]),
  );
  process.stdout.write(`\nresponse error ${r.error.toFixed(4)} dB against the design`);
  if (r.random) process.stdout.write(`; ${r.random.deals} random deals: median ${r.random.median.toFixed(4)} dB, best ${r.random.best.toFixed(4)} dB`);
  process.stdout.write(`\n${r.unmatched.length} parts go without a measured piece\n`);
}

import type { Command } from "commander";
import { boardSummary } from "../../core/analysis/summary.ts";
import { analysisCommand, loadBoard, type SliderOpts } from "./board-command.ts";

/** `check FILE`: a one-line summary, or the faults. */
export function checkCommand(): Command {
  return analysisCommand("check", "check a project file: a one-line summary, or every fault (exit 2)", "check channel.bandwright").action(async (file: string, opts: SliderOpts) => {
    const { board, run, trouble } = await loadBoard(file, opts);
    process.stdout.write(`${boardSummary(board, run, trouble)}\n`);
  });
}

import type { Command } from "commander";
import { blockReportText, boardReport, blockIds } from "../../core/analysis/equation-report.ts";
import { endsText, judgedEnds } from "../../core/analysis/summary.ts";
import type { Board } from "../../core/net/board.ts";
import { analysisCommand, loadBoard, printJson, printMeaningless, readFrequency, unstableKey, type SliderOpts } from "./board-command.ts";
import { CommandFailure } from "./failure.ts";

interface EquationsOpts extends SliderOpts {
  readonly block?: string;
  readonly at?: string;
  readonly tex?: true;
  readonly json?: true;
}

/** `equations FILE`: laws and node equations, with values put in. */
export function equationsCommand(): Command {
  return analysisCommand("equations", "design laws and node equations of a board, with its values put in", "equations channel.bandwright --block b1k --at 1k")
    .option("--block <ID>", "one block only")
    .option("--at <HZ>", "put the numbers of this frequency in")
    .option("--tex", "as LaTeX (needs amsmath)")
    .option("--json", "as JSON")
    .action(async (file: string, opts: EquationsOpts) => {
      const at = opts.at === undefined ? undefined : readFrequency(opts.at, "--at");
      const { board, run, unstable } = await loadBoard(file, opts);
      const ids = blockIds(board);
      if (opts.block !== undefined && !ids.includes(opts.block)) throw new CommandFailure(`--block: there is no block “${opts.block}” with a part in this board: it has ${ids.join(", ")}`);
      const blocks = opts.block === undefined ? ids : [opts.block];
      const report = boardReport(board, { ...run, style: opts.tex ? "tex" : "text", frequency: at, blocks });
      const judgement = judgedEnds(board, run, bandIds(board).filter((id) => blocks.includes(id)));
      const { ends } = judgement;
      const endTrouble = unstable === undefined ? endsText(judgement) : undefined;
      if (endTrouble !== undefined) process.stderr.write(`${file}: ${endTrouble}\n`);
      if (opts.json) {
        printJson({ ...report, ...unstableKey(unstable), ...(ends.length > 0 ? { unstableEnds: ends } : {}) });
        return;
      }
      const trouble = unstable ?? (ends.length > 0 ? `${endTrouble}, where figures are read` : undefined);
      process.stdout.write(`${report.blocks.map((block) => blockReportText(block, opts.tex ? "tex" : "text")).join("\n\n")}\n`);
      printMeaningless(trouble, opts.tex ? "% " : "");
    });
}

function bandIds(board: Board): string[] {
  return board.chain.flatMap((item) => item.bands.map((band) => band.id));
}

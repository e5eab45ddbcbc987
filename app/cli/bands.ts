import type { Command } from "commander";
import { bandFigures, type BandPeak } from "../../core/analysis/bands.ts";
import { endsText, judgedEnds } from "../../core/analysis/summary.ts";
import { formatFigure, type Quantity } from "../../core/units.ts";
import { analysisCommand, finiteJson, loadBoard, MEANINGLESS, printJson, printTable, unstableKey, type SliderOpts } from "./board-command.ts";

/** `bands FILE`: band figures, one row a band. */
export function bandsCommand(): Command {
  return analysisCommand("bands", "band figures, one row a band: each with its own slider at an end and all others at 0.5, whatever the positions of the file or of --set and --all", "bands channel.bandwright --json")
    .option("--json", "as JSON")
    .action(async (file: string, opts: SliderOpts & { readonly json?: true }) => {
      const { board, run, unstable } = await loadBoard(file, opts);
      const bands = bandFigures(board, run);
      const judgement = judgedEnds(board, run);
      const { ends } = judgement;
      const endTrouble = unstable === undefined ? endsText(judgement) : undefined;
      const isVoid = (id: string, end: "boost" | "cut"): boolean => unstable !== undefined || ends.some((e) => e.id === id && e.end === end);
      if (endTrouble !== undefined) process.stderr.write(`${file}: ${endTrouble}\n`);
      if (opts.json) {
        const marked = (id: string, end: "boost" | "cut", figures: BandPeak) => (isVoid(id, end) ? { ...figures, unstable: true } : figures);
        printJson({ bands: bands.map((b) => ({ ...b, boost: marked(b.id, "boost", b.boost), cut: marked(b.id, "cut", b.cut) })), ...unstableKey(unstable) });
        return;
      }
      finiteJson(bands);
      const value = (x: number | null, quantity: Quantity): string => (x === null ? "–" : formatFigure(x, quantity));
      const peak = ({ peak: db, frequency, q }: BandPeak, mark: string): string[] => [db.toFixed(2) + mark, value(frequency, "frequency") + mark, value(q, "plain") + mark];
      const mark = (id: string, end: "boost" | "cut"): string => (isVoid(id, end) ? MEANINGLESS : "");
      printTable(
        ["band", "L", "f0", "leg Q", "isolated dB", "boost dB", "at", "Q", "cut dB", "at", "Q", "lost dB"],
        bands.map((b) => {
          const [boost, cut] = [mark(b.id, "boost"), mark(b.id, "cut")];
          return [b.label, value(b.inductance, "inductance"), value(b.resonance, "frequency"), value(b.legQ, "plain"), b.isolatedBoost.toFixed(2), ...peak(b.boost, boost), ...peak(b.cut, cut), b.interactionLoss.toFixed(2) + boost];
        }),
      );
      const trouble = unstable ?? (ends.length > 0 ? endTrouble : undefined);
      if (trouble !== undefined) process.stdout.write(`\n${MEANINGLESS} means nothing: ${trouble}\n`);
    });
}

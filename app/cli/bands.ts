import type { Command } from "commander";
import { bandFigures, type BandPeak } from "../../core/analysis/bands.ts";
import { formatFigure, type Quantity } from "../../core/units.ts";
import { analysisCommand, finiteJson, loadBoard, printJson, printTable, type SliderOpts } from "./board-command.ts";

/** `bands FILE`: band figures, one row a band. */
export function bandsCommand(): Command {
  return analysisCommand("bands", "band figures, one row a band: each with its own slider at an end and all others at 0.5, whatever the positions of the file or of --set and --all", "bands channel.bandwright --json")
    .option("--json", "as JSON")
    .action(async (file: string, opts: SliderOpts & { readonly json?: true }) => {
      const { board, run } = await loadBoard(file, opts);
      const bands = bandFigures(board, run);
      if (opts.json) {
        printJson({ bands });
        return;
      }
      finiteJson(bands);
      const value = (x: number | null, quantity: Quantity): string => (x === null ? "–" : formatFigure(x, quantity));
      const peak = ({ peak: db, frequency, q }: BandPeak): string[] => [db.toFixed(2), value(frequency, "frequency"), value(q, "plain")];
      printTable(
        ["band", "L", "f0", "leg Q", "isolated dB", "boost dB", "at", "Q", "cut dB", "at", "Q", "lost dB"],
        bands.map((b) => [b.label, value(b.inductance, "inductance"), value(b.resonance, "frequency"), value(b.legQ, "plain"), b.isolatedBoost.toFixed(2), ...peak(b.boost), ...peak(b.cut), b.interactionLoss.toFixed(2)]),
      );
    });
}

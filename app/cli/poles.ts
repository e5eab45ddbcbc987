import type { Command } from "commander";
import { polesAndZeros, rootFigures, type Root } from "../../core/analysis/poles.ts";
import { formatFigure } from "../../core/units.ts";
import { analysisCommand, finiteJson, loadBoard, printJson, printTable, unstableKey, type SliderOpts } from "./board-command.ts";

/** `poles FILE`: poles and zeros of the whole board. */
export function polesCommand(): Command {
  return analysisCommand("poles", "poles and zeros of the whole board, inductors and op amps included", "poles channel.bandwright --set b1k=1 --json")
    .option("--json", "as JSON: poles and zeros as { re, im } in rad/s")
    .action(async (file: string, opts: SliderOpts & { readonly json?: true }) => {
      const { board, run, unstable } = await loadBoard(file, opts);
      const { poles, zeros, reproducedWithin } = polesAndZeros(board, run);
      if (opts.json) {
        const root = ({ re, im }: Root): Root => ({ re, im });
        printJson({ poles: poles.map(root), zeros: zeros.map(root), ...unstableKey(unstable) });
        return;
      }
      finiteJson({ poles, zeros, reproducedWithin });
      const row = (kind: string, root: Root, block: string): string[] => {
        const { frequency, q } = rootFigures(root);
        const number = (x: number): string => (x === 0 ? "0" : x.toPrecision(6));
        return [kind, number(root.re), number(root.im), formatFigure(frequency, "frequency"), q === null || root.im === 0 ? "–" : q.toPrecision(3), block];
      };
      printTable(["", "re rad/s", "im rad/s", "frequency", "Q", "block"], [...poles.map((p) => row("pole", p, p.block)), ...zeros.map((z) => row("zero", z, ""))]);
      process.stdout.write(`\n${poles.length} poles, ${zeros.length} zeros; together they give the response back within ${reproducedWithin.toExponential(0)} dB from 10 Hz to 100 kHz\n`);
      if (unstable !== undefined) process.stdout.write(`${unstable}\n`);
    });
}

import type { Command } from "commander";
import { Option } from "commander";
import { stringify } from "csv-stringify/sync";
import { logFrequencies, respond } from "../../core/analysis/response.ts";
import { analysisCommand, loadBoard, MEANINGLESS, printJson, printTable, readFrequency, unstableKey, type SliderOpts } from "./board-command.ts";
import { CommandFailure } from "./failure.ts";

interface RespondOpts extends SliderOpts {
  readonly from: string;
  readonly to: string;
  readonly points: string;
  readonly json?: true;
  readonly csv?: true;
}

const MOST_POINTS = 1_000_000;

/** `respond FILE`: gain, phase and group delay at log-spaced frequencies. */
export function respondCommand(): Command {
  return analysisCommand("respond", "response at log-spaced frequencies, both ends included", "respond channel.bandwright --all 0.5 --set b1k=1 --from 20 --to 20k --points 61 --csv")
    .option("--from <HZ>", "lowest frequency", "10")
    .option("--to <HZ>", "highest frequency", "40000")
    .option("--points <N>", "how many frequencies, 2 or more", "481")
    .addOption(new Option("--json", "as JSON: frequency in Hz, gain in dB, phase in degrees, groupDelay in s").conflicts("csv"))
    .addOption(new Option("--csv", "as comma-separated values, same columns").conflicts("json"))
    .action(async (file: string, opts: RespondOpts) => {
      const [from, to, points] = [readFrequency(opts.from, "--from"), readFrequency(opts.to, "--to"), Number(opts.points)];
      if (from >= to) throw new CommandFailure(`--from ${opts.from} must lie below --to ${opts.to}`);
      if (!Number.isInteger(points) || points < 2 || points > MOST_POINTS) throw new CommandFailure(`--points: must be a whole number from 2 to ${MOST_POINTS}, got “${opts.points}”`);
      const { compiled, unstable } = await loadBoard(file, opts);
      const response = respond(compiled, logFrequencies(from, to, points));
      const { frequency, gain, phase, groupDelay } = response;
      const bad = gain.findIndex((g, i) => !Number.isFinite(g) || !Number.isFinite(phase[i]) || !Number.isFinite(groupDelay[i]));
      if (bad >= 0) throw new CommandFailure(`there is no finite response at ${frequency[bad].toPrecision(4)} Hz: some value of the board is out of any practical range`, 1);
      if (opts.json) {
        printJson({ frequency: [...frequency], gain: [...gain], phase: [...phase], groupDelay: [...groupDelay], ...unstableKey(unstable) });
        return;
      }
      if (opts.csv) {
        const mark = unstable === undefined ? [] : ["meaningless"];
        const rows = Array.from(frequency, (f, i) => [f, gain[i], phase[i], groupDelay[i], ...mark]);
        process.stdout.write(stringify(rows, { header: true, columns: ["frequency", "gain", "phase", "groupDelay", ...(unstable === undefined ? [] : ["unstable"])] }));
        return;
      }
      const mark = unstable === undefined ? "" : MEANINGLESS;
      printTable(
        ["Hz", "dB", "degrees", "delay µs"],
        Array.from(frequency, (f, i) => [f.toPrecision(5), `${gain[i].toFixed(3)}${mark}`, `${phase[i].toFixed(2)}${mark}`, `${(groupDelay[i] * 1e6).toFixed(2)}${mark}`]),
      );
      if (unstable !== undefined) process.stdout.write(`\n${MEANINGLESS} means nothing: ${unstable}\n`);
    });
}

import type { Command } from "commander";
import { boardRoles, findRole, partsElsewhere, type BoardRole } from "../../core/drawer/roles.ts";
import { rankSwaps, type Swap } from "../../core/drawer/swap.ts";
import { hasFault } from "../../core/drawer/place-problems.ts";
import { whyNothing } from "../../core/drawer/why-nothing.ts";
import { applyPatch } from "../../core/model/patch.ts";
import { formatDb } from "../../core/units.ts";
import { analysisCommand, loadBoard, printJson, printMeaningless, printTable, unstableKey, type SliderOpts } from "./board-command.ts";
import { linesFor, linesText, moneyText, OUTPUT_HELP, percentText, printProblems, readCount, readFraction, requireOutput, stockText, underWay, writeProject } from "./choose-command.ts";
import { CommandFailure } from "./failure.ts";
import { withDrawer, withDrawerOptions, type DrawerOption } from "./stock-drawer.ts";

interface SwapCommandOpts extends SliderOpts, DrawerOption {
  readonly role: string;
  readonly pairs?: true;
  readonly units: string;
  readonly window: string;
  readonly most: string;
  readonly take?: string;
  readonly output?: string;
}

/** `swap FILE --role ROLE`: parts of the drawer for one role, ranked by what they do to the board. */
export function swapCommand(): Command {
  return withDrawerOptions(
    analysisCommand("swap", "parts of the drawer for one role, ranked by what they do to the whole board", "swap channel.bandwright --role b1k.seriesC --pairs --take 1 -o other.bandwright")
      .requiredOption("--role <ROLE>", "role as block.role, such as b1k.seriesC, b1k.slider, b1k.opAmp or reference.upperR")
      .option("--pairs", "two pieces in series or parallel too")
      .option("--units <N>", "units to build: pieces have to be there for each", "1")
      .option("--window <FRACTION>", "how far the value may be off", "20%")
      .option("--most <N>", "how many to try, nearest first", "50")
      .option("--take <N>", "put number N of the list into the board and write it to -o")
      .option("-o, --output <FILE>", OUTPUT_HELP),
    "has to be there",
  ).action(async (file: string, opts: SwapCommandOpts) => {
    const units = readCount(opts.units, "--units");
    const window = readFraction(opts.window, "--window");
    const most = readCount(opts.most, "--most", 10_000);
    const take = opts.take === undefined ? undefined : readCount(opts.take, "--take");
    if ((take === undefined) !== (opts.output === undefined)) throw new CommandFailure("--take and -o go together: which number of the list, and where to write the board");
    const { board, run, unstable } = await loadBoard(file, opts);
    const role = findRole(board, opts.role);
    if (!role) throw new CommandFailure(`--role: the board has no part “${opts.role}”: it has ${boardRoles(board).map((r) => r.name).join(", ")}`);
    if (opts.output !== undefined) await requireOutput(opts.output);
    const lines = await withDrawer(opts, "has to be there", (store) => linesFor(store, board.project));
    const swap = underWay(`trying parts of ${lines.length} lines`, () => rankSwaps(board, role, lines, { ...run, units, window, most, pairs: opts.pairs === true }));
    const taken = take === undefined ? undefined : swap.candidates[take - 1];
    if (take !== undefined && !taken) throw new CommandFailure(`--take: the list has ${swap.candidates.length} entries, so there is no number ${take}`);
    if (taken && hasFault(taken)) throw new CommandFailure(`--take: number ${take}, ${linesText(taken)}, does not do: ${taken.problems.filter((p) => p.level === "fault").map((p) => p.message).join("; ")}`);
    if (taken && opts.output !== undefined) await writeProject(opts.output, applyPatch(board.project, taken.patch));
    if (opts.json) printJson({ ...swapJson(swap), taken: take ?? null, ...unstableKey(unstable) });
    else {
      printSwap(swap, role);
      printMeaningless(unstable);
    }
    if (swap.candidates.length === 0) process.stderr.write(`nothing in the drawer fits: ${whyNothing(board.project, role, lines, { units, window, elsewhere: partsElsewhere(board, role) })}\n`);
    if (taken) process.stderr.write(`${opts.output}: ${role.name} is now ${taken.lines.map((l) => l.id).join(" and ")}\n`);
  });
}

function swapJson({ role, before, stress, candidates }: Swap): object {
  return {
    role: { name: role.name, label: role.label, kind: role.kind, value: role.value, type: role.type, stock: role.stock },
    before, stress,
    candidates: candidates.map((c, i) => ({
      number: i + 1, lines: c.lines.map((l) => l.id), joined: c.joined, value: c.value, type: c.lines[0].type, tolerance: c.tolerance, deviation: c.deviation,
      change: c.change, changes: c.changes, asItStands: c.asItStands, atFullBoost: c.atFullBoost, worst: c.worst,
      cost: c.cost, left: c.left, isInPlace: c.isInPlace, problems: c.problems,
    })),
  };
}

function printSwap({ candidates, stress }: Swap, role: BoardRole): void {
  process.stdout.write(`${role.label} (${role.name}), now ${stockText(role.kind, role.value, role.type)}${role.stock === null ? "" : `, ${role.stock}`}\n`);
  if (stress && role.kind === "capacitor") {
    const way = stress.positive === null ? "no steady voltage to keep a polarised one the right way round" : `+ to ${stress.positive}`;
    process.stdout.write(`bears ${Math.max(Math.abs(stress.low), Math.abs(stress.high)).toPrecision(3)} V steady and up to ${stress.peak.toPrecision(3)} V of signal; ${way}\n`);
  }
  if (candidates.length === 0) return;
  process.stdout.write("\n");
  printTable(
    ["line", "no.", "value", "off", "tolerance", "peak", "centre", "Q", "as set", "full boost", "cost", "left"],
    candidates.map((c, i) => [
      `${linesText(c)}${c.isInPlace ? " (in place)" : ""}`, String(i + 1), stockText(role.kind, c.value, c.lines[0].type), c.value === null ? "–" : percentText(c.deviation), c.tolerance === null ? "–" : `${Number((c.tolerance * 100).toPrecision(3))} %`,
      formatDb(c.change.peak, 2), percentText(c.change.centre), percentText(c.change.q), `${c.asItStands.toFixed(2)} dB`, `${c.atFullBoost.toFixed(2)} dB`, moneyText(c.cost), String(c.left),
    ]),
  );
  printProblems(candidates.flatMap((c, i) => c.problems.map((problem) => ({ where: `no. ${i + 1}`, line: linesText(c), problem }))));
}

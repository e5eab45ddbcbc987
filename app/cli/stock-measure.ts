import type { Command } from "commander";
import { readValue } from "../../core/drawer/cells.ts";
import { QUANTITY_OF } from "../../core/drawer/check-line.ts";
import { nextMark } from "../../core/drawer/piece-mark.ts";
import type { StockLine, StockPiece } from "../../core/drawer/stock.ts";
import { formatValue } from "../../core/units.ts";
import type { DrawerStore } from "../store/drawer-store.ts";
import { printJson, printTable, readFrequency } from "./board-command.ts";
import { percentText } from "./choose-command.ts";
import { CommandFailure } from "./failure.ts";
import { drawerCommand, read, withDrawer, type DrawerOption } from "./stock-drawer.ts";

interface MeasureOpts extends DrawerOption {
  readonly mark?: string;
  readonly at?: string;
  readonly remove?: readonly string[];
}

/** Where a meter measures as a rule, Hz. */
const USUAL_FREQUENCY = 1000;

/** `stock measure ID VALUE…`: single pieces as the user's meter has them, for `match`. */
export function stockMeasureCommand(): Command {
  return drawerCommand("measure", "keep what your meter says of single pieces of a line, for `match` to deal; without a value, show what is kept", "measure C-100N-PET 99.1n 101.7n 98.4n")
    .argument("<ID>", "the line")
    .argument("[VALUES...]", "one for each piece, in trade notation; they are marked 1, 2, 3 and so on")
    .option("--mark <TEXT>", "what is written on the piece, where one value is given: one that is marked so gets the new value")
    .option("--at <HZ>", "frequency of the meter, or dc; 1 kHz for capacitors and inductors, dc for resistors where not given")
    .option("--remove <MARK...>", "forget the pieces of these marks")
    .action(async (id: string, values: readonly string[], opts: MeasureOpts) => {
      if (opts.mark !== undefined && values.length !== 1) throw new CommandFailure("--mark: goes with one value");
      if (opts.remove !== undefined && values.length > 0) throw new CommandFailure("--remove: goes without values");
      const { line, step, pieces } = await withDrawer(opts, "made where there is none", (store) => {
        const { line: found, pieces: before } = store.line(id);
        const done = opts.remove === undefined ? keep(store, found, before, values, opts) : remove(store, id, before, opts.remove);
        return { line: found, step: done, pieces: store.pieces(id) };
      });
      if (opts.json) printJson({ step, pieces });
      else printPieces(line, pieces);
    });
}

/** @returns the step, null where there was nothing to keep */
function keep(store: DrawerStore, line: StockLine, before: readonly StockPiece[], values: readonly string[], opts: MeasureOpts): number | null {
  const quantity = QUANTITY_OF[line.kind];
  if (values.length === 0) return null;
  if (quantity === null) throw new CommandFailure(`${line.id}: op amps are not measured one by one`);
  const frequency = opts.at === undefined ? (quantity === "resistance" ? null : USUAL_FREQUENCY) : opts.at.toLowerCase() === "dc" ? null : readFrequency(opts.at, "--at");
  const first = Number(nextMark(before));
  const pieces = values.map((text, index) => {
    const mark = opts.mark ?? String(first + index);
    return { id: before.find((piece) => piece.mark === mark)?.id ?? null, line: line.id, mark, value: read("VALUES", text, (one) => readValue(one, "", quantity)), frequency };
  });
  return store.putPieces(pieces).step;
}

function remove(store: DrawerStore, id: string, before: readonly StockPiece[], marks: readonly string[]): number | null {
  const ids = marks.map((mark) => before.find((piece) => piece.mark === mark)?.id);
  const missing = marks.filter((_, index) => ids[index] === undefined);
  if (missing.length > 0) throw new CommandFailure(`--remove: ${id} has no piece marked ${missing.join(", ")}: it has ${before.map((piece) => piece.mark).join(", ") || "none"}`);
  return store.removePieces([...new Set(ids.filter((one) => one !== undefined))]).step;
}

function printPieces(line: StockLine, pieces: readonly StockPiece[]): void {
  const quantity = QUANTITY_OF[line.kind];
  if (pieces.length === 0 || quantity === null || line.value === null) {
    process.stderr.write(`${line.id}: no piece has been measured\n`);
    return;
  }
  const { value } = line;
  printTable(
    ["piece", "measured", "off", "at"],
    pieces.map((piece) => [piece.mark === "" ? `no. ${piece.id}` : piece.mark, formatValue(piece.value, quantity, { significant: 5 }), percentText(piece.value / value - 1), piece.frequency === null ? "dc" : formatValue(piece.frequency, "frequency")]),
  );
}

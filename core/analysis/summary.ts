import type { Board } from "../net/board.ts";
import { compileBoard } from "../net/star.ts";
import type { ValueOpts } from "../net/values.ts";
import { bandFigures } from "./bands.ts";
import { unstablePoles, unstableText } from "./poles.ts";
import { logFrequencies, ResponseSweep } from "./response.ts";
import { loopMargins, smallestMargin } from "./stability.ts";

export interface Flatness {
  /** Largest departure from the gain at 1 kHz, dB, over the range. */
  readonly within: number;
  readonly from: number;
  readonly to: number;
}

/** How flat the board is with every slider centred, against its gain at 1 kHz. 20 Hz to 20 kHz unless said otherwise. */
export function flatness(board: Board, opts: ValueOpts = {}, from = 20, to = 20e3): Flatness {
  const compiled = compileBoard(board, opts);
  const centred = new Float64Array(compiled.bands.length).fill(0.5);
  const reference = new ResponseSweep(compiled, new Float64Array([1000])).run(centred).gain[0];
  const { gain } = new ResponseSweep(compiled, logFrequencies(from, to, 241)).run(centred);
  return { within: gain.reduce((most, g) => Math.max(most, Math.abs(g - reference)), 0), from, to };
}

/** `8 bands on 1 bus, ±15 V`. */
export function boardSize(board: Board): string {
  const buses = board.chain.filter((item) => item.block.kind === "boost-cut-stage").length;
  const bands = board.chain.reduce((sum, item) => sum + item.bands.length, 0);
  const { supply } = board.project;
  const volts = supply.kind === "single" ? `${supply.voltage} V single` : supply.positive === supply.negative ? `±${supply.positive} V` : `+${supply.positive}/−${supply.negative} V`;
  const count = (n: number, one: string, many: string): string => `${n} ${n === 1 ? one : many}`;
  return `${count(bands, "band", "bands")} on ${count(buses, "bus", "buses")}, ${volts}`;
}

/** One line that says what a board does: size, boost in circuit, flatness, and whether its loops are at peace. */
export function boardSummary(board: Board, opts: ValueOpts = {}): string {
  const peaks = bandFigures(board, opts).map((f) => f.boost.peak);
  const boosts = peaks.length === 0 ? "" : `; boost in circuit ${Math.min(...peaks).toFixed(1)} to ${Math.max(...peaks).toFixed(1)} dB`;
  const flat = flatness(board, opts);
  return `${board.project.name}: ${boardSize(board)}${boosts}; flat within ${Number(flat.within.toPrecision(2))} dB from 20 Hz to 20 kHz with sliders centred; ${stabilityText(board, opts)}`;
}

/** `smallest phase margin 57° (b6k3)`, or that the board is unstable. */
export function stabilityText(board: Board, opts: ValueOpts = {}): string {
  const unstable = unstablePoles(board, opts);
  if (unstable.length > 0) return unstableText(unstable);
  const least = smallestMargin(loopMargins(board, opts));
  return least ? `smallest phase margin ${least.phaseMargin.toFixed(0)}° (${least.block})` : "ideal op amps, so no loop to judge";
}

import type { Board } from "../net/board.ts";
import { expandBoard } from "../net/expand.ts";
import { compileBoard } from "../net/star.ts";
import type { ValueOpts } from "../net/values.ts";
import { bandFigures } from "./bands.ts";
import { unstablePoles, unstableText } from "./poles.ts";
import { logFrequencies, ResponseSweep } from "./response.ts";
import { loopMargins, smallestMargin, type LoopMargin } from "./stability.ts";
import { unstableEnds, type UnstableEnd } from "./unstable-ends.ts";

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

/**
 * One line that says what a board does: size, boost in circuit (where it does not oscillate), flatness, and whether its
 * loops are at peace.
 * @param trouble as worked out already
 * @throws RangeError where it has no finite response
 */
export function boardSummary(board: Board, opts: ValueOpts = {}, trouble = instability(board, opts)): string {
  const judgement = judgedEnds(board, opts);
  const isVoid = (id: string): boolean => judgement.ends.some((e) => e.id === id && e.end === "boost");
  const peaks = bandFigures(board, opts).filter((f) => !isVoid(f.id)).map((f) => f.boost.peak);
  const boosts = peaks.length === 0 ? "" : `; boost in circuit ${Math.min(...peaks).toFixed(1)} to ${Math.max(...peaks).toFixed(1)} dB`;
  const flat = flatness(board, opts);
  if (![...peaks, flat.within].every(Number.isFinite)) throw new RangeError("there is no finite response: some value of the board is out of any practical range");
  return `${board.project.name}: ${boardSize(board)}${boosts}; flat within ${Number(flat.within.toPrecision(2))} dB from 20 Hz to 20 kHz with sliders centred; ${stabilityText(board, opts, trouble, judgement)}`;
}

/** Boards of more nodes than this are not looked at for stability: the work grows with the cube, and these would take minutes. */
const MOST_NODES = 320;

/** That a board oscillates, or why nobody can tell. */
export type Trouble = { readonly is: "unstable" | "unknown"; readonly text: string };

/** Whether a board oscillates; null where it is at peace. */
export function instability(board: Board, opts: ValueOpts = {}): Trouble | null {
  return judged(board, opts, (): Trouble | null => {
    const unstable = unstablePoles(board, opts);
    return unstable.length > 0 ? { is: "unstable", text: unstableText(unstable) } : null;
  });
}

export function troubleText({ is, text }: Trouble): string {
  return is === "unstable" ? text : `whether the board oscillates is not known: ${text}`;
}

/** Slider ends of more bands than this are not looked at: each costs a solve of the whole board. */
const MOST_END_BANDS = 40;

/** The slider ends at which a board oscillates (see `unstableEnds`), as far as somebody has looked. */
export interface JudgedEnds {
  readonly ends: readonly UnstableEnd[];
  /** Why nobody has; undefined where somebody has. */
  readonly unknown?: string;
}

/** Looks at the slider ends of a board. @param only bands to look at; all where left off */
export function judgedEnds(board: Board, opts: ValueOpts = {}, only?: readonly string[]): JudgedEnds {
  const bands = only?.length ?? board.chain.reduce((sum, item) => sum + item.bands.length, 0);
  const unlooked = (why: string): JudgedEnds => ({ ends: [], unknown: `whether the board oscillates at an end of a slider is not known: ${why}` });
  if (bands > MOST_END_BANDS) return unlooked(`it has ${bands} bands, and more than ${MOST_END_BANDS} would take too long`);
  const judgement = judged(board, opts, (): JudgedEnds => ({ ends: unstableEnds(board, opts, only) }));
  return "ends" in judgement ? judgement : unlooked(judgement.text);
}

/** What there is to say of the slider ends; undefined where all is well. */
export function endsText({ ends, unknown }: JudgedEnds): string | undefined {
  return ends.length === 0 ? unknown : `unstable with ${ends.map(({ id, end }) => `${id} at full ${end}`).join(", ")}`;
}

/** `smallest phase margin 57° (b6k3)`, with the slider ends at which it oscillates, or that it oscillates as it stands. @param trouble as worked out already */
export function stabilityText(board: Board, opts: ValueOpts = {}, trouble = instability(board, opts), judgement?: JudgedEnds): string {
  if (trouble) return troubleText(trouble);
  const margins = judged(board, opts, () => marginText(loopMargins(board, opts)));
  if (typeof margins !== "string") return troubleText(margins);
  const ends = endsText(judgement ?? judgedEnds(board, opts));
  return ends === undefined ? margins : `${margins}; ${ends}`;
}

function marginText(margins: readonly LoopMargin[]): string {
  if (margins.length === 0) return "ideal op amps, so no loop to judge";
  const least = smallestMargin(margins);
  return least ? `smallest phase margin ${least.phaseMargin.toFixed(0)}° (${least.block})` : "no loop gain reaches 1";
}

function judged<T>(board: Board, opts: ValueOpts, judge: () => T): T | Trouble {
  const unknown = (text: string): Trouble => ({ is: "unknown", text });
  const nodes = expandBoard(board, opts).nodeCount;
  if (nodes > MOST_NODES) return unknown(`it has ${nodes} nodes, and more than ${MOST_NODES} would take too long`);
  try {
    return judge();
  } catch (error) {
    if (error instanceof RangeError) return unknown(error.message);
    throw error;
  }
}

import type { OpAmpModel } from "../model/project.ts";
import type { Board } from "../net/board.ts";
import { expandBoard } from "../net/expand.ts";
import { describeNetlist, type Descriptor } from "../net/nodal.ts";
import type { Netlist } from "../net/netlist.ts";
import type { ValueOpts } from "../net/values.ts";
import { ComplexLu } from "../num/complex-lu.ts";
import { findRoot } from "../num/roots.ts";

/** The loop of one op amp, closed by the board as loaded. Null where the loop gain never crosses. */
export interface LoopMargin {
  /** `block.opAmp`. */
  readonly source: string;
  readonly block: string;
  /**
   * Degrees that the loop gain's angle stays short of ±180° where its size is 1; the smallest, if it crosses more than once.
   * Negative where the angle, followed from low frequencies, has gone past.
   */
  readonly phaseMargin: number | null;
  /** Hz, where the phase margin is taken. */
  readonly crossover: number | null;
  /** dB between the loop gain's size and 1 where its angle is ±180°; the smallest. */
  readonly gainMargin: number | null;
  readonly phaseCrossing: number | null;
}

const [FROM, TO, PER_DECADE] = [100, 10e9, 10];

/**
 * Loop gain of every real op amp as its return ratio T (H. W. Bode, "Network Analysis and Feedback Amplifier Design", 1945,
 * chapter 4): the op amp's internal source made independent and set to 1 V, T is minus what its own gain makes of the
 * voltage that comes back to its inputs, all other op amps at work. Phase and gain margins follow. Ideal op amps have no
 * loop to speak of and are left out.
 */
export function loopMargins(board: Board, opts: ValueOpts = {}): LoopMargin[] {
  const loops = new Loops(expandBoard(board, opts));
  const count = loops.sources.length;
  if (count === 0) return [];
  const points = Math.round(Math.log10(TO / FROM) * PER_DECADE) + 1;
  const ln = Float64Array.from({ length: points }, (_, i) => Math.log(FROM) + (i / PER_DECADE) * Math.LN10);
  const gain = Array.from({ length: count }, () => ({ re: new Float64Array(points), im: new Float64Array(points) }));
  for (let i = 0; i < points; i++) {
    loops.tune(Math.exp(ln[i]));
    for (let k = 0; k < count; k++) [gain[k].re[i], gain[k].im[i]] = loops.gain(k);
  }
  return loops.sources.map((source, k): LoopMargin => {
    const { re, im } = gain[k];
    const at = (x: number): readonly [number, number] => {
      loops.tune(Math.exp(x));
      return loops.gain(k);
    };
    const lnSize = (x: number): number => Math.log(Math.hypot(...at(x)));
    let angle = Math.atan2(im[0], re[0]);
    let phaseMargin: number | null = null;
    let crossover: number | null = null;
    let gainMargin: number | null = null;
    let phaseCrossing: number | null = null;
    for (let i = 1; i < points; i++) {
      const before = Math.log(Math.hypot(re[i - 1], im[i - 1]));
      const after = Math.log(Math.hypot(re[i], im[i]));
      if (before > 0 !== after > 0) {
        const x = findRoot(lnSize, ln[i - 1], ln[i], 1e-9, before, after);
        const [tr, ti] = at(x);
        const margin = 180 - Math.abs(angle + turnBetween(at, ln[i - 1], x, [re[i - 1], im[i - 1]], [tr, ti])) * (180 / Math.PI);
        if (phaseMargin === null || margin < phaseMargin) [phaseMargin, crossover] = [margin, Math.exp(x)];
      }
      if (im[i - 1] > 0 !== im[i] > 0 && (re[i - 1] < 0 || re[i] < 0)) {
        const x = findRoot((y) => at(y)[1], ln[i - 1], ln[i], 1e-9, im[i - 1], im[i]);
        const [tr] = at(x);
        const margin = -20 * Math.log10(Math.abs(tr));
        if (tr < 0 && (gainMargin === null || Math.abs(margin) < Math.abs(gainMargin))) [gainMargin, phaseCrossing] = [margin, Math.exp(x)];
      }
      angle += turnBetween(at, ln[i - 1], ln[i], [re[i - 1], im[i - 1]], [re[i], im[i]]);
    }
    return { source, block: source.slice(0, source.lastIndexOf(".")), phaseMargin, crossover, gainMargin, phaseCrossing };
  });
}

/** How far a curve's angle turns between two of its points, radians; halved until no step leaves doubt about the way round. */
function turnBetween(at: (x: number) => readonly [number, number], from: number, to: number, start: readonly [number, number], end: readonly [number, number], depth = 0): number {
  const turn = Math.atan2(end[1] * start[0] - end[0] * start[1], end[0] * start[0] + end[1] * start[1]);
  if (Math.abs(turn) < 1 || depth === 12) return turn;
  const middle = (from + to) / 2;
  const between = at(middle);
  return turnBetween(at, from, middle, start, between, depth + 1) + turnBetween(at, middle, to, between, end, depth + 1);
}

/** The smallest phase margin of a board; undefined where no loop crosses. */
export function smallestMargin(margins: readonly LoopMargin[]): (LoopMargin & { readonly phaseMargin: number }) | undefined {
  const crossing = margins.filter((m): m is LoopMargin & { readonly phaseMargin: number } => m.phaseMargin !== null);
  return crossing.length === 0 ? undefined : crossing.reduce((least, m) => (m.phaseMargin < least.phaseMargin ? m : least));
}

/** The node equations factored at one frequency at a time, and every op amp's return ratio from them. */
class Loops {
  readonly sources: string[] = [];
  readonly #form: Descriptor;
  readonly #lu: ComplexLu;
  readonly #amps: { readonly row: number; readonly plus: number; readonly minus: number; readonly out: number; readonly model: OpAmpModel }[] = [];
  #frequency = 0;
  readonly #re: Float64Array;
  readonly #im: Float64Array;

  constructor(netlist: Netlist) {
    this.#form = describeNetlist(netlist);
    this.#lu = new ComplexLu(this.#form.size);
    this.#re = new Float64Array(this.#form.size);
    this.#im = new Float64Array(this.#form.size);
    for (const element of netlist.elements) {
      if (element.type !== "opAmp" || element.model === "ideal") continue;
      this.sources.push(element.source);
      this.#amps.push({ row: this.#form.unknowns.indexOf(`I(${element.source})`), plus: element.plus - 1, minus: element.minus - 1, out: element.out - 1, model: element.model });
    }
  }

  tune(frequency: number): void {
    const { size, conductance, storage } = this.#form;
    const omega = 2 * Math.PI * frequency;
    this.#frequency = frequency;
    this.#lu.re.set(conductance);
    for (let i = 0; i < size * size; i++) this.#lu.im[i] = omega * storage[i];
    if (!this.#lu.factor()) throw new RangeError(`the node equations have no unique solution at ${frequency.toPrecision(4)} Hz`);
  }

  /**
   * T of one op amp at the tuned frequency. Its equation reads e·(v_out + outputR·I) − (v+ − v−) = 0. Driven by 1 on its right
   * side the answer x has v+ − v− = −T/(1 + T) and, read off the equation itself, e·(v_out + outputR·I) = 1/(1 + T): their
   * ratio is T, without the cancellation of 1 − T/(1 + T).
   */
  gain(index: number): readonly [number, number] {
    const { row, plus, minus, out, model } = this.#amps[index];
    const [re, im] = [this.#re.fill(0), this.#im.fill(0)];
    re[row] = 1;
    this.#lu.solve(re, im);
    const dr = (plus < 0 ? 0 : re[plus]) - (minus < 0 ? 0 : re[minus]);
    const di = (plus < 0 ? 0 : im[plus]) - (minus < 0 ? 0 : im[minus]);
    // e·(v_out + outputR·I) from its own terms: 1 + (v+ − v−) would lose the digits that a large T needs.
    const e = { re: 1 / model.openLoopGain, im: this.#frequency / model.gainBandwidth };
    const internalRe = (out < 0 ? 0 : re[out]) + model.outputR * re[row];
    const internalIm = (out < 0 ? 0 : im[out]) + model.outputR * im[row];
    const sr = e.re * internalRe - e.im * internalIm;
    const si = e.re * internalIm + e.im * internalRe;
    const norm = sr * sr + si * si;
    return [-(dr * sr + di * si) / norm, -(di * sr - dr * si) / norm];
  }
}

import type { OpAmpModel } from "../model/project.ts";
import type { Board } from "../net/board.ts";
import { expandBoard } from "../net/expand.ts";
import { describeNetlist, type Descriptor } from "../net/nodal.ts";
import type { Netlist } from "../net/netlist.ts";
import type { ValueOpts } from "../net/values.ts";
import { ComplexLu } from "../num/complex-lu.ts";
import { findRoot } from "../num/roots.ts";
import { lawResults } from "./laws.ts";
import { unstablePoles } from "./poles.ts";

/** The loop of one op amp, closed by the board as loaded. Null where the loop gain never crosses. */
export interface LoopMargin {
  /** `block.opAmp`. */
  readonly source: string;
  readonly block: string;
  /**
   * Degrees that the loop gain's angle stays short of ±180° where its size is 1; the smallest, if it crosses more than once.
   * Negative on a board that oscillates where the angle, followed from low frequencies, has gone past.
   */
  readonly phaseMargin: number | null;
  /** Hz, where the phase margin is taken. */
  readonly crossover: number | null;
  /** dB between the loop gain's size and 1 where its angle is ±180°; the smallest. */
  readonly gainMargin: number | null;
  readonly phaseCrossing: number | null;
}

/** Hz. Crossings lie in the upper range; the lower one is there to count the angle from where no leg has turned it yet. */
const [LOWEST, FROM, TO] = [1e-4, 100, 10e9];
const [PER_DECADE_BELOW, PER_DECADE] = [2, 10];

/**
 * Loop gain of every real op amp as its return ratio T (H. W. Bode, "Network Analysis and Feedback Amplifier Design", 1945,
 * chapter 4): the op amp's internal source made independent and set to 1 V, T is minus what its own gain makes of the
 * voltage that comes back to its inputs, all other op amps at work. Phase and gain margins follow. Ideal op amps have no
 * loop to speak of and are left out.
 */
export function loopMargins(board: Board, opts: ValueOpts = {}): LoopMargin[] {
  const loops = new Loops(expandBoard(board, opts));
  if (loops.sources.length === 0) return [];
  const grid = scanGrid(board, opts);
  const samples = grid.map((ln): Sample[] => {
    loops.tune(Math.exp(ln));
    return loops.sources.map((_, k) => sampleAt(ln, loops.gain(k)));
  });
  const marginOf = (k: number, isSigned: boolean): LoopMargin => {
    const source = loops.sources[k];
    const at = (ln: number): Sample => {
      loops.tune(Math.exp(ln));
      return sampleAt(ln, loops.gain(k));
    };
    const margins = new Margins(at, isSigned);
    for (let i = 1; i < samples.length; i++) margins.step(samples[i - 1][k], samples[i][k], 0);
    const { phaseMargin, crossover, gainMargin, phaseCrossing } = margins;
    return { source, block: source.slice(0, source.lastIndexOf(".")), phaseMargin, crossover, gainMargin, phaseCrossing };
  };
  const signed = loops.sources.map((_, k) => marginOf(k, true));
  const isStable = signed.every((m) => (m.phaseMargin ?? 1) > 0) || unstablePoles(board, opts).length === 0;
  // A loop that keeps a board stable may turn past the half circle with others in it: what is left is then its distance.
  return isStable ? signed.map((m, k) => ((m.phaseMargin ?? 1) > 0 ? m : marginOf(k, false))) : signed;
}

/** ln f of the scan: even steps, and the resonances of the legs, where a loop gain can dip and be back within a step. */
function scanGrid(board: Board, opts: ValueOpts): number[] {
  const even = (from: number, to: number, perDecade: number): number[] =>
    Array.from({ length: Math.round(Math.log10(to / from) * perDecade) }, (_, i) => Math.log(from) + (i / perDecade) * Math.LN10);
  const resonances = board.chain.flatMap((item) => item.bands.map((band) => lawResults(band, item.block, opts).f0)).filter((f0) => f0 > LOWEST && f0 < TO);
  return [...even(LOWEST, FROM, PER_DECADE_BELOW), ...even(FROM, TO, PER_DECADE), Math.log(TO), ...resonances.map(Math.log)].sort((a, b) => a - b);
}

/** The loop gain at a frequency: ln f, ln |T|, and T. */
interface Sample {
  readonly ln: number;
  readonly size: number;
  readonly re: number;
  readonly im: number;
}

function sampleAt(ln: number, [re, im]: readonly [number, number]): Sample {
  return { ln, size: Math.log(Math.hypot(re, im)), re, im };
}

/** Angle from one sample to the next, radians. */
function turnOf(from: Sample, to: Sample): number {
  return Math.atan2(to.im * from.re - to.re * from.im, to.re * from.re + to.im * from.im);
}

/** Walks along a loop gain from low frequencies up, follows its angle and keeps the smallest margins. */
class Margins {
  phaseMargin: number | null = null;
  crossover: number | null = null;
  gainMargin: number | null = null;
  phaseCrossing: number | null = null;
  readonly #at: (ln: number) => Sample;
  readonly #isSigned: boolean;
  #angle: number | undefined;

  constructor(at: (ln: number) => Sample, isSigned: boolean) {
    this.#at = at;
    this.#isSigned = isSigned;
  }

  step(from: Sample, to: Sample, depth: number): void {
    this.#angle ??= Math.atan2(from.im, from.re);
    const turn = turnOf(from, to);
    // Steps that leave doubt about the way round, or about a dip in between, are halved.
    if (depth < 14 && to.ln > from.ln && (Math.abs(turn) > 0.7 || Math.abs(to.size - from.size) > 1.5)) {
      const middle = this.#at((from.ln + to.ln) / 2);
      this.step(from, middle, depth + 1);
      this.step(middle, to, depth + 1);
      return;
    }
    if (from.size > 0 !== to.size > 0) {
      const sample = this.#at(findRoot((ln) => this.#at(ln).size, from.ln, to.ln, 1e-9, from.size, to.size));
      const angle = (Math.abs(this.#angle + turnOf(from, sample)) * (180 / Math.PI)) % 360;
      const margin = this.#isSigned ? 180 - angle : Math.abs(180 - angle);
      if (this.phaseMargin === null || margin < this.phaseMargin) [this.phaseMargin, this.crossover] = [margin, Math.exp(sample.ln)];
    }
    if (from.im > 0 !== to.im > 0 && (from.re < 0 || to.re < 0)) {
      const sample = this.#at(findRoot((ln) => this.#at(ln).im, from.ln, to.ln, 1e-9, from.im, to.im));
      const margin = -20 * Math.log10(Math.abs(sample.re));
      if (sample.re < 0 && (this.gainMargin === null || Math.abs(margin) < Math.abs(this.gainMargin))) [this.gainMargin, this.phaseCrossing] = [margin, Math.exp(sample.ln)];
    }
    this.#angle += turn;
  }
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

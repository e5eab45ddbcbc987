import { Sweep, type CompiledBoard } from "../net/star.ts";
import { transferColumns, type TransferColumns } from "../net/transfer.ts";

const DEGREES = 180 / Math.PI;

/** Points spread evenly over log frequency, both ends included, Hz. `points` of 2 or more. */
export function logFrequencies(from: number, to: number, points: number): Float64Array {
  const out = new Float64Array(points);
  for (let i = 0; i < points; i++) out[i] = from * (to / from) ** (i / (points - 1));
  // The ends exactly as asked for.
  out[points - 1] = to;
  return out;
}

/** Angular frequencies, rad/s. */
export function angular(frequency: Float64Array): Float64Array {
  return frequency.map((f) => 2 * Math.PI * f);
}

/** 20·log10 |H|, dB. */
export function decibels(re: number, im: number): number {
  return 10 * Math.log10(re * re + im * im);
}

/** Gain in dB, phase in degrees without jumps, group delay in seconds. Columns, one entry a frequency (Hz). */
export interface Response {
  readonly frequency: Float64Array;
  readonly gain: Float64Array;
  readonly phase: Float64Array;
  readonly groupDelay: Float64Array;
}

/**
 * The response with everything that follows from it: v(load)/EMF at each frequency.
 * The group delay −dφ/dω = −Re(H′/H) (′ = d/ds) comes from the derivative of the network functions themselves, not from
 * differences. The phase starts at its principal value and is carried on through points in between that are close enough
 * for the group delay to settle which turn is meant, so that two points a decade apart come out right too.
 */
export function respond(board: CompiledBoard, frequency: Float64Array): Response {
  const points = frequency.length;
  const columns = evaluate(board, frequency);
  const response: Response = { frequency, gain: new Float64Array(points), phase: new Float64Array(points), groupDelay: columns.delay };
  for (let i = 0; i < points; i++) response.gain[i] = decibels(columns.re[i], columns.im[i]);
  // Between points further apart than this ratio, the phase is followed on a finer grid.
  const step = 2 ** (1 / 12);
  let phase = points > 0 ? Math.atan2(columns.im[0], columns.re[0]) : 0;
  if (points > 0) response.phase[0] = phase * DEGREES;
  for (let i = 1; i < points; i++) {
    const ratio = frequency[i] / frequency[i - 1];
    const parts = Math.max(1, Math.ceil(Math.abs(Math.log(ratio) / Math.log(step))));
    if (parts === 1) phase = follow(phase, columns, i - 1, i, frequency);
    else {
      const between = Float64Array.from({ length: parts + 1 }, (_, n) => frequency[i - 1] * ratio ** (n / parts));
      const fine = evaluate(board, between);
      for (let n = 1; n <= parts; n++) phase = follow(phase, fine, n - 1, n, between);
    }
    response.phase[i] = phase * DEGREES;
  }
  return response;
}

interface Evaluated extends TransferColumns {
  readonly delay: Float64Array;
}

function evaluate(board: CompiledBoard, frequency: Float64Array): Evaluated {
  const columns = transferColumns(frequency.length, true) as Required<TransferColumns>;
  new Sweep(board, angular(frequency)).run(board.positions, columns);
  const delay = new Float64Array(frequency.length);
  for (let i = 0; i < delay.length; i++) {
    const { re, im, slopeRe, slopeIm } = columns;
    delay[i] = -(slopeRe[i] * re[i] + slopeIm[i] * im[i]) / (re[i] * re[i] + im[i] * im[i]);
  }
  return { ...columns, delay };
}

/** The phase at point `to`, on the turn nearest to what the group delay foretells from point `from`. */
function follow(phase: number, columns: Evaluated, from: number, to: number, frequency: Float64Array): number {
  const foretold = phase - Math.PI * (columns.delay[from] + columns.delay[to]) * (frequency[to] - frequency[from]);
  const principal = Math.atan2(columns.im[to], columns.re[to]);
  return principal + 2 * Math.PI * Math.round((foretold - principal) / (2 * Math.PI));
}

/**
 * Gain and phase on fixed frequencies for ever new slider positions: what the screen runs while a knob is dragged.
 * Leg admittances are kept; the returned columns are overwritten by the next run.
 */
export class ResponseSweep {
  readonly board: CompiledBoard;
  readonly frequency: Float64Array;
  readonly #sweep: Sweep;
  readonly #columns: TransferColumns;
  readonly #gain: Float64Array;
  readonly #phase: Float64Array;

  /** @param frequency Hz, ascending and dense (12 points an octave or more): the phase is unwrapped from point to point */
  constructor(board: CompiledBoard, frequency: Float64Array) {
    this.board = board;
    this.frequency = frequency;
    this.#sweep = new Sweep(board, angular(frequency));
    this.#columns = transferColumns(frequency.length, false);
    this.#gain = new Float64Array(frequency.length);
    this.#phase = new Float64Array(frequency.length);
  }

  /** @param positions slider positions in the order of `board.bands` */
  run(positions: Float64Array): { readonly gain: Float64Array; readonly phase: Float64Array } {
    this.#sweep.run(positions, this.#columns);
    const { re, im } = this.#columns;
    let phase = 0;
    for (let i = 0; i < re.length; i++) {
      this.#gain[i] = decibels(re[i], im[i]);
      const principal = Math.atan2(im[i], re[i]);
      phase = i === 0 ? principal : principal + 2 * Math.PI * Math.round((phase - principal) / (2 * Math.PI));
      this.#phase[i] = phase * DEGREES;
    }
    return { gain: this.#gain, phase: this.#phase };
  }
}

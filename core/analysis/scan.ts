import type { Board } from "../net/board.ts";
import { compileBoard, Sweep, type CompiledBoard } from "../net/star.ts";
import { transferColumns, type TransferColumns } from "../net/transfer.ts";
import type { ValueOpts } from "../net/values.ts";
import { findLeast, findRoot } from "../num/roots.ts";
import { angular, decibels, logFrequencies } from "./response.ts";

/** What one end of a slider's travel does in circuit, the other sliders centred. */
export interface BandPeak {
  /** The response there, dB: at the peak (dip), or on the plateau of a shelf or level. */
  readonly peak: number;
  /** Hz: of the peak; for a shelf or level its half-gain corner, null where it has none. */
  readonly frequency: number | null;
  /** frequency / (upper − lower); null for shelves and where a point is missing. */
  readonly q: number | null;
  /** The −3.0103 dB points on either side of the peak, Hz; null where the response does not fall that far. */
  readonly lower: number | null;
  readonly upper: number | null;
}

const HALF_POWER_DB = 10 * Math.log10(2);
const PER_OCTAVE = 24;
/** How far below its best a board's centred response may lie where a plateau is read, dB. */
const PASSBAND_DB = 3;
/** How much of its largest effect a slider must have on its plateau, and on a hump that stands in for one. */
const SETTLED = 0.9;
const HUMP = 0.5;
/** How far from the corner such a hump may be. */
const HUMP_OCTAVES = 4;
/** On ln f. */
const TOLERANCE = 1e-12;

/** How far a scan reaches on either side of a resonance; of a shelf's corner, where what is left of the way to the plateau goes with the square of the distance. */
const REACH = { resonance: 32, corner: 1024 };

/** A scan wide enough for a board's bands. @param laws results of each band's laws */
export function scanOf(board: Board, laws: readonly Readonly<Record<string, number>>[], opts: ValueOpts): Scan {
  const spans = laws.flatMap(({ f0, fc }) => [
    { at: f0, reach: REACH.resonance },
    { at: fc, reach: REACH.corner },
  ]);
  const known = spans.filter(({ at }) => at !== undefined && Number.isFinite(at) && at > 0);
  return new Scan(compileBoard(board, opts), Math.min(1, ...known.map(({ at, reach }) => at / reach)), Math.max(1e6, ...known.map(({ at, reach }) => at * reach)));
}

/** Looks for peaks, edges and corners of one board: a coarse scan for brackets, a retuned single point for the roots. */
export class Scan {
  /** Factor on each band's admittance: 1 as it stands, 0 as if it were not there. */
  readonly weights: Float64Array;
  readonly #frequency: Float64Array;
  readonly #perOctave: number;
  readonly #grid: Sweep;
  readonly #gridOut: TransferColumns;
  readonly #point: Sweep;
  readonly #pointOut = transferColumns(1, false);
  readonly #slopeOut = transferColumns(1, true) as Required<TransferColumns>;
  readonly #positions: Float64Array;
  readonly #gain: Float64Array;
  readonly #centred: Float64Array;
  #isCentredFresh = true;

  /** @param perOctave points of the coarse scan, which finds brackets; peaks, edges and corners come from the continuous response all the same, and a plateau is flat about its point */
  constructor(board: CompiledBoard, from: number, to: number, perOctave = PER_OCTAVE) {
    const points = Math.ceil(Math.log2(to / from) * perOctave) + 1;
    this.#perOctave = perOctave;
    this.#frequency = logFrequencies(from, to, points);
    this.#grid = new Sweep(board, angular(this.#frequency));
    this.#gridOut = transferColumns(points, false);
    this.#point = new Sweep(board, new Float64Array([1]));
    this.#positions = new Float64Array(board.bands.length).fill(0.5);
    this.weights = new Float64Array(board.bands.length).fill(1);
    this.#centred = this.#sweepGain(new Float64Array(points));
    this.#gain = new Float64Array(points);
  }

  /** Puts another version of the same board in: see `Sweep.replace`. */
  replace(board: CompiledBoard): void {
    this.#grid.replace(board);
    this.#point.replace(board);
    this.#isCentredFresh = false;
  }

  #sweepGain(out: Float64Array): Float64Array {
    this.#grid.run(this.#positions, this.#gridOut, this.weights);
    for (let i = 0; i < out.length; i++) out[i] = decibels(this.#gridOut.re[i], this.#gridOut.im[i]);
    return out;
  }

  /** Gain at a frequency given as ln f, dB, with the positions as they stand. */
  #gainAt(lnF: number, positions = this.#positions): number {
    this.#point.retune(2 * Math.PI * Math.exp(lnF));
    this.#point.run(positions, this.#pointOut, this.weights);
    return decibels(this.#pointOut.re[0], this.#pointOut.im[0]);
  }

  /** d(gain)/d(ln f), dB: −(20/ln 10)·ω·Im(H′/H). */
  #slopeAt(lnF: number): number {
    const omega = 2 * Math.PI * Math.exp(lnF);
    this.#point.retune(omega);
    this.#point.run(this.#positions, this.#slopeOut, this.weights);
    const { re, im, slopeRe, slopeIm } = this.#slopeOut;
    const norm = re[0] * re[0] + im[0] * im[0];
    return (-20 / Math.LN10) * omega * ((slopeIm[0] * re[0] - slopeRe[0] * im[0]) / norm);
  }

  /** Gain at a frequency, Hz, with one slider at an end and the others centred, dB. */
  gain(band: number, position: 0 | 1, frequency: number): number {
    this.#positions[band] = position;
    const gain = this.#gainAt(Math.log(frequency));
    this.#positions[band] = 0.5;
    return gain;
  }

  /** The peak or dip of a resonant band, with its edges. @param resonance of its leg, Hz */
  resonance(band: number, position: 0 | 1, resonance: number): BandPeak {
    return this.#with(band, position, () => {
      const f = this.#frequency;
      const sign = position === 1 ? 1 : -1;
      const best = this.#summit((i) => f[i] >= resonance / 4 && f[i] <= resonance * 4, sign);
      if (best < 0) return { peak: this.#gainAt(Math.log(resonance)), frequency: null, q: null, lower: null, upper: null };
      const lnPeak = this.#top(best);
      const peak = this.#gainAt(lnPeak);
      const target = peak - sign * HALF_POWER_DB;
      const lower = this.#crossing(this.#gain, target, sign, best, -1, (x) => this.#gainAt(x));
      const upper = this.#crossing(this.#gain, target, sign, best, 1, (x) => this.#gainAt(x));
      const frequency = Math.exp(lnPeak);
      return { peak, frequency, lower, upper, q: lower === null || upper === null ? null : frequency / (upper - lower) };
    });
  }

  /**
   * Shelves and levels. The effect of the slider is the response less the response with all sliders centred, which takes
   * coupling capacitors and op amps out of the question where the band works. The plateau is where the response has a
   * maximum or minimum, or failing that changes least, among the frequencies where the effect is at least nine tenths of
   * its most and the centred board still lets the signal through (within 3 dB of its best); where there are several, the
   * one with the flattest two octaves about it. A shelf that is cut off before its corner is read on the hump that is left
   * of it, or where the board begins to pass. The corner is where the effect is half of that on the plateau, in dB.
   * `plateau` is the frequency where the plateau was read, Hz.
   * @param corner of the leg alone, Hz; undefined for a level, which has none
   * @param side on which the corner lies: 1 above (low shelf), −1 below
   */
  shelf(band: number, position: 0 | 1, side: 1 | -1, corner: number | undefined): BandPeak & { readonly plateau: number } {
    if (!this.#isCentredFresh) this.#sweepGain(this.#centred);
    this.#isCentredFresh = true;
    return this.#with(band, position, () => {
      const sign = position === 1 ? 1 : -1;
      const effect = this.#gain.map((gain, i) => sign * (gain - this.#centred[i]));
      const f = this.#frequency;
      const passes = Math.max(...this.#centred) - PASSBAND_DB;
      // Past the leg's own corner, where its capacitor or inductance no longer holds the leg back: a neighbour's skirts may be flatter still.
      const isPast = (i: number): boolean => corner === undefined || (side === 1 ? f[i] < corner : f[i] > corner);
      const settledAt = (isFit: (i: number) => boolean, share: number): number => {
        const most = effect.reduce((largest, e, i) => (isFit(i) ? Math.max(largest, e) : largest), -Infinity);
        return this.#flattest((i) => isFit(i) && effect[i] >= Math.min(most, share * most));
      };
      const lets = (i: number): boolean => this.#centred[i] >= passes;
      const isNear = (i: number): boolean => corner === undefined || Math.abs(Math.log2(f[i] / corner)) <= HUMP_OCTAVES;
      const past = settledAt((i) => lets(i) && isPast(i), SETTLED);
      // A shelf cut off by a coupling capacitor or a slow op amp before its corner has no plateau, only a hump about it.
      const hump = past >= 0 ? -1 : this.#summit((i) => isNear(i) && effect[i] > 0, sign);
      const found = past >= 0 ? past : hump >= 0 ? hump : settledAt((i) => lets(i) && isNear(i), HUMP);
      const at = found >= 0 ? found : this.#nearest(lets, corner);
      const lnPlateau = at === hump ? this.#top(at) : this.#level(at);
      const centred = new Float64Array(this.#positions.length).fill(0.5);
      const effectAt = (lnF: number): number => sign * (this.#gainAt(lnF) - this.#gainAt(lnF, centred));
      const half = effectAt(lnPlateau) / 2;
      const frequency = half > 0 ? this.#crossing(effect, half, 1, at, side, effectAt) : null;
      return { peak: this.#gainAt(lnPlateau), frequency, q: null, lower: null, upper: null, plateau: Math.exp(lnPlateau) };
    });
  }

  /** The highest (lowest) scan point, among those that qualify, that stands above (below) both its neighbours; −1 where none does. */
  #summit(isFit: (index: number) => boolean, sign: 1 | -1): number {
    const g = this.#gain;
    let best = -1;
    for (let i = 1; i < g.length - 1; i++) {
      if (isFit(i) && sign * (g[i] - g[i - 1]) >= 0 && sign * (g[i] - g[i + 1]) > 0 && (best < 0 || sign * (g[i] - g[best]) > 0)) best = i;
    }
    return best;
  }

  /** The scan point, among those that qualify, nearest to a frequency. */
  #nearest(isFit: (index: number) => boolean, frequency = 1000): number {
    const distance = this.#frequency.map((f, i) => (isFit(i) ? Math.abs(Math.log(f / frequency)) : Infinity));
    return distance.indexOf(Math.min(...distance));
  }

  /** The scan point, among those that qualify, about which the gain varies least within an octave either way; −1 where none qualifies. */
  #flattest(isFit: (index: number) => boolean): number {
    const g = this.#gain;
    let best = -1;
    let least = Infinity;
    const octave = this.#perOctave;
    for (let i = 0; i < g.length; i++) {
      if (!isFit(i)) continue;
      const around = g.subarray(Math.max(0, i - octave), i + octave + 1);
      const variation = Math.max(...around) - Math.min(...around);
      if (variation < least) [best, least] = [i, variation];
    }
    return best;
  }

  /** Where the response is level within half an octave of a scan point, or failing that where it changes least, as ln f. */
  #level(at: number): number {
    const half = Math.ceil(this.#perOctave / 2);
    const lnF = (index: number): number => Math.log(this.#frequency[Math.max(0, Math.min(this.#frequency.length - 1, index))]);
    return findLeast((x) => Math.abs(this.#slopeAt(x)), lnF(at - half), lnF(at + half), 1e-7);
  }

  /** Runs a search with one slider at an end, then centres it again. */
  #with<Found>(band: number, position: 0 | 1, search: () => Found): Found {
    this.#positions[band] = position;
    this.#sweepGain(this.#gain);
    const found = search();
    this.#positions[band] = 0.5;
    return found;
  }

  /** Where the slope is none next to a scan point that stands above (below) both its neighbours, as ln f. */
  #top(at: number): number {
    const slope = (lnF: number): number => this.#slopeAt(lnF);
    const lnF = (index: number): number => Math.log(this.#frequency[index]);
    const [before, here, after] = [this.#gain[at - 1], this.#gain[at], this.#gain[at + 1]];
    // The vertex of the parabola through the three is within a few hundredths of a step: most often the root is that near.
    const step = lnF(at) - lnF(at - 1);
    const vertex = lnF(at) + (step / 2) * ((before - after) / (before - 2 * here + after));
    const [a, b] = [vertex - step / 20, vertex + step / 20];
    const [fa, fb] = [slope(a), slope(b)];
    if (fa > 0 !== fb > 0) return findRoot(slope, a, b, TOLERANCE, fa, fb);
    const [from, to] = [lnF(at - 1), lnF(at + 1)];
    return bracketed(slope, from, to, slope(from), slope(to));
  }

  /** Where a column falls past a target on one side of its peak, as a frequency; null where it never does. */
  #crossing(column: Float64Array, target: number, sign: number, peak: number, direction: 1 | -1, exact: (lnF: number) => number): number | null {
    for (let i = peak + direction; i >= 0 && i < column.length; i += direction) {
      if (sign * (column[i] - target) >= 0) continue;
      const [inner, outer] = [i - direction, i];
      return Math.exp(bracketed((x) => exact(x) - target, Math.log(this.#frequency[inner]), Math.log(this.#frequency[outer]), column[inner] - target, column[outer] - target));
    }
    return null;
  }
}

/** A root of f between two points with these values there. */
function bracketed(f: (lnF: number) => number, a: number, b: number, fa: number, fb: number): number {
  // A curve flat to rounding has no sign change to show: its ends are as good as each other.
  if (fa > 0 === fb > 0) return Math.abs(fa) < Math.abs(fb) ? a : b;
  return findRoot(f, a, b, TOLERANCE, fa, fb);
}

import type { Board } from "../net/board.ts";
import { expandBoard } from "../net/expand.ts";
import { GROUND, type Netlist } from "../net/netlist.ts";
import { describeNetlist } from "../net/nodal.ts";
import { sliderPosition, sliderResistances, type ValueOpts } from "../net/values.ts";
import { ComplexLu } from "../num/complex-lu.ts";
import { railsOf } from "./dc.ts";
import { angular, logFrequencies } from "./response.ts";

export interface SwingOpts extends ValueOpts {
  /** Peak volts at the input EMF; without it, as much as the first op amp to clip allows. */
  readonly input?: number;
}

/** The largest signal voltage across a capacitor or resistor. */
export interface Swing {
  /** `block.role`. */
  readonly source: string;
  readonly detail?: string;
  /** V, peak. */
  readonly peak: number;
  /** Hz at which it is reached. */
  readonly frequency: number;
  /** Slider setting at which it is reached, in words. */
  readonly setting: string;
}

/** 5 Hz to 40 kHz, three points an octave. */
const FREQUENCIES = logFrequencies(5, 40_000, 40);

/** A slider at its end leaves this part of its track, so that every setting shares one matrix. */
const LEAST_TRACK = 1e-4;

interface Track {
  readonly id: string;
  readonly boost: number;
  readonly cut: number;
  readonly nodes: readonly [m: number, w: number, p: number];
  /** Where its slider stands in this run. */
  readonly position: number;
  readonly resistances: (position: number) => { readonly boost: number; readonly cut: number };
}

/**
 * The largest signal voltage across every capacitor and resistor of a board.
 *
 * The rule: a sine of any frequency from 5 Hz to 40 kHz, as large as it can be before the first op amp on the board
 * clips (its output resting midway between the rails less its swing loss, which leaves the most room), and at most half
 * of what lies between the rails, since whatever drives the board runs on some supply too; or the peak given. Sliders: as they stand,
 * all centred, all at full boost, all at full cut, and each one alone at either end with the others centred. The linear
 * response says what each part sees. Beyond clipping, voltages grow no further than the rails.
 */
export function largestSwings(board: Board, opts: SwingOpts = {}): Swing[] {
  // Sliders off their ends, where tracks would merge nodes.
  const netlist = expandBoard(board, { ...opts, positions: Object.fromEntries(board.chain.flatMap((item) => item.bands.map((b) => [b.id, 0.5]))) });
  const rails = railsOf(board);
  const { size, conductance, storage, excitation } = describeNetlist(netlist);
  const tracks = tracksOf(board, netlist, opts);
  const lu = new ComplexLu(size);
  const parts = netlist.elements.filter((e) => e.type === "capacitor" || e.type === "resistor");
  const amps = netlist.elements.filter((e) => e.type === "opAmp");
  const mostInput = (rails.high - rails.low) / 2;
  const headroom = amps.map(({ model }) => Math.max(0, mostInput - (model === "ideal" ? 0 : (model.swingLoss ?? 0))));
  const best = parts.map((part): Swing => ({ source: part.source, ...(part.detail === undefined ? {} : { detail: part.detail }), peak: 0, frequency: FREQUENCIES[0], setting: "as it stands" }));
  const [xRe, xIm, yRe, yIm] = [0, 1, 2, 3].map(() => new Float64Array(size));

  const note = (re: Float64Array, im: Float64Array, frequency: number, setting: string): void => {
    const across = (a: number, b: number): number => Math.hypot((a > 0 ? re[a - 1] : 0) - (b > 0 ? re[b - 1] : 0), (a > 0 ? im[a - 1] : 0) - (b > 0 ? im[b - 1] : 0));
    let input = opts.input ?? mostInput;
    if (opts.input === undefined) for (const [i, amp] of amps.entries()) input = Math.min(input, headroom[i] / Math.max(across(amp.out, GROUND), 1e-12));
    for (const [i, part] of parts.entries()) {
      const peak = input * across(part.a, part.b);
      if (peak > best[i].peak) best[i] = { ...best[i], peak, frequency, setting };
    }
  };
  /** The matrix at ω with every slider at a position. */
  const factor = (omega: number, positionOf: (track: Track, index: number) => number): void => {
    lu.re.set(conductance);
    for (let i = 0; i < size * size; i++) lu.im[i] = omega * storage[i];
    for (const [index, track] of tracks.entries()) {
      const { boost, cut } = track.resistances(positionOf(track, index));
      const [m, w, p] = track.nodes;
      addConductance(lu.re, size, w, m, 1 / boost - 1 / track.boost);
      addConductance(lu.re, size, w, p, 1 / cut - 1 / track.cut);
    }
    if (!lu.factor()) throw new RangeError(`the node equations have no unique solution at ${(omega / 2 / Math.PI).toPrecision(4)} Hz`);
  };
  const whole: readonly (readonly [string, (track: Track) => number])[] = [
    ["as it stands", (t) => t.position],
    ["every slider at full boost", () => 1],
    ["every slider at full cut", () => 0],
  ];
  const update = new TwoBranches(size);
  for (const [k, omega] of angular(FREQUENCIES).entries()) {
    for (const [setting, positionOf] of whole) {
      factor(omega, positionOf);
      xRe.set(excitation);
      xIm.fill(0);
      lu.solve(xRe, xIm);
      note(xRe, xIm, FREQUENCIES[k], setting);
    }
    factor(omega, () => 0.5);
    xRe.set(excitation);
    xIm.fill(0);
    lu.solve(xRe, xIm);
    note(xRe, xIm, FREQUENCIES[k], "every slider centred");
    for (const track of tracks) {
      update.prepare(lu, track.nodes);
      const centred = track.resistances(0.5);
      for (const position of [1, 0]) {
        const { boost, cut } = track.resistances(position);
        update.apply(xRe, xIm, 1 / boost - 1 / centred.boost, 1 / cut - 1 / centred.cut, yRe, yIm);
        note(yRe, yIm, FREQUENCIES[k], `${track.id} alone at full ${position === 1 ? "boost" : "cut"}`);
      }
    }
  }
  return best;
}

function tracksOf(board: Board, netlist: Netlist, opts: ValueOpts): Track[] {
  return board.chain.flatMap((item) => item.bands).flatMap((band): Track[] => {
    const find = (detail: string) => netlist.elements.find((e) => e.type === "resistor" && e.source === `${band.id}.slider` && e.detail === detail);
    const [boost, cut] = [find("boost"), find("cut")];
    if (boost?.type !== "resistor" || cut?.type !== "resistor") return [];
    const slider = band.slider!;
    const least = slider.track.value * LEAST_TRACK;
    const resistances = (position: number) => {
      const at = sliderResistances(slider, position, opts);
      return { boost: Math.max(at.boost, least), cut: Math.max(at.cut, least) };
    };
    return [{ id: band.id, boost: boost.value, cut: cut.value, nodes: [boost.a, boost.b, cut.b], position: sliderPosition(band, opts), resistances }];
  });
}

function addConductance(matrix: Float64Array, size: number, a: number, b: number, g: number): void {
  if (a > 0) matrix[(a - 1) * size + a - 1] += g;
  if (b > 0) matrix[(b - 1) * size + b - 1] += g;
  if (a > 0 && b > 0) {
    matrix[(a - 1) * size + b - 1] -= g;
    matrix[(b - 1) * size + a - 1] -= g;
  }
}

/**
 * The solution after two conductances that meet in one node have changed, from the factors of the matrix before
 * (Sherman, Morrison and Woodbury; Golub and Van Loan, "Matrix Computations", 4th ed., 2.1.4):
 * x′ = x − Z·(I + D·UᵀZ)⁻¹·D·Uᵀx, with Z = A⁻¹·U and U = [e_w − e_m, e_w − e_p].
 */
class TwoBranches {
  readonly #zRe: readonly [Float64Array, Float64Array];
  readonly #zIm: readonly [Float64Array, Float64Array];
  #nodes: readonly [number, number, number] = [0, 0, 0];

  constructor(size: number) {
    this.#zRe = [new Float64Array(size), new Float64Array(size)];
    this.#zIm = [new Float64Array(size), new Float64Array(size)];
  }

  prepare(lu: ComplexLu, nodes: readonly [m: number, w: number, p: number]): void {
    this.#nodes = nodes;
    for (const [column, other] of [nodes[0], nodes[2]].entries()) {
      const [re, im] = [this.#zRe[column], this.#zIm[column]];
      re.fill(0);
      im.fill(0);
      if (nodes[1] > 0) re[nodes[1] - 1] += 1;
      if (other > 0) re[other - 1] -= 1;
      lu.solve(re, im);
    }
  }

  apply(xRe: Float64Array, xIm: Float64Array, gBoost: number, gCut: number, outRe: Float64Array, outIm: Float64Array): void {
    const [m, w, p] = this.#nodes;
    const across = (column: Float64Array, other: number): number => (w > 0 ? column[w - 1] : 0) - (other > 0 ? column[other - 1] : 0);
    const [z1r, z2r] = this.#zRe;
    const [z1i, z2i] = this.#zIm;
    // I + D·UᵀZ = [[a, b], [c, d]], right-hand side D·Uᵀx = [s, t]
    const [ar, ai] = [1 + gBoost * across(z1r, m), gBoost * across(z1i, m)];
    const [br, bi] = [gBoost * across(z2r, m), gBoost * across(z2i, m)];
    const [cr, ci] = [gCut * across(z1r, p), gCut * across(z1i, p)];
    const [dr, di] = [1 + gCut * across(z2r, p), gCut * across(z2i, p)];
    const [sr, si] = [gBoost * across(xRe, m), gBoost * across(xIm, m)];
    const [tr, ti] = [gCut * across(xRe, p), gCut * across(xIm, p)];
    const detR = ar * dr - ai * di - (br * cr - bi * ci);
    const detI = ar * di + ai * dr - (br * ci + bi * cr);
    const norm = detR * detR + detI * detI;
    const [nur, nui] = [sr * dr - si * di - (br * tr - bi * ti), sr * di + si * dr - (br * ti + bi * tr)];
    const [nvr, nvi] = [ar * tr - ai * ti - (cr * sr - ci * si), ar * ti + ai * tr - (cr * si + ci * sr)];
    const [ur, ui] = [(nur * detR + nui * detI) / norm, (nui * detR - nur * detI) / norm];
    const [vr, vi] = [(nvr * detR + nvi * detI) / norm, (nvi * detR - nvr * detI) / norm];
    for (let i = 0; i < outRe.length; i++) {
      outRe[i] = xRe[i] - (z1r[i] * ur - z1i[i] * ui) - (z2r[i] * vr - z2i[i] * vi);
      outIm[i] = xIm[i] - (z1r[i] * ui + z1i[i] * ur) - (z2r[i] * vi + z2i[i] * vr);
    }
  }
}

/**
 * The fast solver. A bus is a star: every band's leg is eliminated to its port admittance, every stage to a two-port that
 * the stage before sees as its load, and the cost is linear in bands. Exact, not an approximation: it equals the node
 * equations (nodal.ts) to rounding. Derivation in core/blocks/boost-cut-stage/README.md.
 */
import { BLOCKS } from "../blocks/index.ts";
import type { Leg } from "../blocks/definition.ts";
import type { Block, OpAmpModel, Project } from "../model/project.ts";
import type { Board } from "./board.ts";
import { hasSlopes, type TransferColumns } from "./transfer.ts";
import { ReferenceStar } from "./star-reference.ts";
import { SlopeStar } from "./star-slopes.ts";
import { blockValues, opAmpModel, partValue, sliderPosition, sliderResistances, type ValueOpts } from "./values.ts";

/** An op amp as the reductions use it: 1/A = e0 + s·e1, output resistance, input conductance. All 0 when ideal. */
export interface AmpForm {
  readonly e0: number;
  readonly e1: number;
  readonly ro: number;
  readonly gin: number;
}

export interface BandForm {
  readonly id: string;
  readonly leg: Leg;
  /** Parts of the track at position x, ohms. */
  readonly resistances: (position: number) => { boost: number; cut: number };
  /** Index in the positions array. */
  readonly index: number;
}

export type ItemForm =
  | { readonly type: "input"; readonly sourceR: number; readonly couplingC: number; readonly loadG: number }
  | { readonly type: "buffer"; readonly amp: AmpForm; readonly driver: number }
  | { readonly type: "stage"; readonly amp: AmpForm; readonly driver: number; readonly inputG: number; readonly feedbackG: number; readonly feedbackC: number; readonly bands: readonly BandForm[] }
  | { readonly type: "output"; readonly driver: number; readonly seriesR: number; readonly couplingC: number; readonly loadR: number };

/** The single supply's divider: conductance of both arms, bypass, and its follower where it has one. */
export interface ReferenceForm {
  readonly conductance: number;
  readonly bypassC: number;
  readonly amp: AmpForm | undefined;
}

/** A board compiled to flat values: build once, run for any slider positions and frequencies. */
export interface CompiledBoard {
  /** In chain order: drivers before what they drive. */
  readonly items: readonly ItemForm[];
  readonly output: number;
  /** On the way from input to output. */
  readonly path: readonly number[];
  /** Bands in chain order; `positions` arrays follow it. */
  readonly bands: readonly BandForm[];
  /** Where the reference has an impedance of its own; undefined where it is ground (or as good as: an ideal follower). */
  readonly reference: ReferenceForm | undefined;
  /** The positions of this run, in the order of `bands`. */
  readonly positions: Float64Array;
}

function ampForm(model: OpAmpModel | "ideal"): AmpForm {
  if (model === "ideal") return { e0: 0, e1: 0, ro: 0, gin: 0 };
  return { e0: 1 / model.openLoopGain, e1: 1 / (2 * Math.PI * model.gainBandwidth), ro: model.outputR, gin: 1 / model.inputR };
}

/** Compiles a board for the fast solver. @throws FaultError where an op amp is unknown */
export function compileBoard(board: Board, opts: ValueOpts = {}): CompiledBoard {
  const { project } = board;
  const bands: BandForm[] = [];
  const positions: number[] = [];
  const items = board.chain.map(({ block, driver, bands: hung }): ItemForm => {
    const stageBands = hung.map((band) => bandForm(project, band, positions.push(sliderPosition(band, opts)) - 1, opts));
    bands.push(...stageBands);
    return itemForm(project, block, driver, stageBands, opts);
  });
  const path: number[] = [];
  for (let at = board.output; at >= 0; at = board.chain[at].driver) path.unshift(at);
  return { items, output: board.output, path, bands, reference: referenceForm(board, opts), positions: Float64Array.from(positions) };
}

function bandForm(project: Project, band: Block, index: number, opts: ValueOpts): BandForm {
  const definition = BLOCKS[band.kind];
  const amp = definition.hasOpAmp ? opAmpModel(project, band.opAmp, `blocks.${band.id}.opAmp`) : "ideal";
  const slider = band.slider!;
  return { id: band.id, index, leg: definition.leg!(blockValues(band, opts), amp), resistances: (x) => sliderResistances(slider, x, opts) };
}

function itemForm(project: Project, block: Block, driver: number, bands: readonly BandForm[], opts: ValueOpts): ItemForm {
  const values = blockValues(block, opts);
  const amp = BLOCKS[block.kind].hasOpAmp ? opAmpModel(project, block.opAmp, `blocks.${block.id}.opAmp`) : "ideal";
  switch (block.kind) {
    case "input":
      return { type: "input", sourceR: values.sourceR, couplingC: values.couplingC ?? 0, loadG: values.loadR === undefined ? 0 : 1 / values.loadR };
    case "buffer":
      return { type: "buffer", amp: ampForm(amp), driver };
    case "output":
      return { type: "output", driver, seriesR: values.seriesR, couplingC: values.couplingC ?? 0, loadR: values.loadR };
    default:
      return { type: "stage", amp: ampForm(amp), driver, inputG: 1 / values.inputR, feedbackG: 1 / values.feedbackR, feedbackC: values.feedbackC ?? 0, bands };
  }
}

/**
 * A compiled board with other parts, op amp or track in one block, everything else shared with the one it came from: what
 * trying a part in one place costs. Wiring and slider positions stay.
 * @param board of which `compiled` was made; @param block with its new values
 * @throws RangeError where the board has no block of that id; FaultError where its op amp is unknown
 */
export function recompileBlock(compiled: CompiledBoard, board: Board, block: Block, opts: ValueOpts = {}): CompiledBoard {
  const { project } = board;
  const at = board.chain.findIndex((item) => item.block.id === block.id);
  if (at >= 0) {
    const old = compiled.items[at];
    const item = itemForm(project, block, board.chain[at].driver, old.type === "stage" ? old.bands : [], opts);
    return { ...compiled, items: compiled.items.with(at, item) };
  }
  const old = compiled.bands.find((band) => band.id === block.id);
  if (!old) throw new RangeError(`the board has no block “${block.id}”`);
  const form = bandForm(project, block, old.index, opts);
  const bands = compiled.bands.with(old.index, form);
  return { ...compiled, bands, items: compiled.items.map((item) => (item.type === "stage" && item.bands.includes(old) ? { ...item, bands: item.bands.map((band) => (band === old ? form : band)) } : item)) };
}

/** A compiled board with another supply reference, everything else shared. */
export function recompileReference(compiled: CompiledBoard, project: Project, opts: ValueOpts = {}): CompiledBoard {
  return { ...compiled, reference: referenceForm({ project }, opts) };
}

function referenceForm(board: Pick<Board, "project">, opts: ValueOpts): ReferenceForm | undefined {
  const { supply } = board.project;
  if (supply.kind === "split") return undefined;
  const { upperR, lowerR, bypassC, opAmp } = supply.reference;
  const model = opAmp === undefined ? undefined : opAmpModel(board.project, opAmp, "supply.reference.opAmp");
  // A follower without output resistance holds the reference exactly.
  if (model === "ideal" || model?.outputR === 0) return undefined;
  return { conductance: 1 / partValue(upperR, opts) + 1 / partValue(lowerR, opts), bypassC: partValue(bypassC, opts), amp: model && ampForm(model) };
}

/**
 * A compiled board on a fixed set of frequencies. Leg admittances are kept from run to run, so that `run`
 * for other slider positions costs one division a band and frequency. Nothing is allocated in `run`.
 */
export class Sweep {
  #board: CompiledBoard;
  readonly omega: Float64Array;
  readonly #ones: Float64Array;
  #legRe: readonly Float64Array[] = [];
  #legIm: readonly Float64Array[] = [];
  /** Does the work where the reference has an impedance of its own. */
  #shared: ReferenceStar | undefined;
  /** Made when a slope is first asked for. */
  #sloped: SlopeStar | undefined;
  /** 1 where a band's kept admittances are of another leg or frequency: they are worked out when they are needed. */
  #stale: Uint8Array = new Uint8Array(0);
  /** Columns of the stage at work: Σ Rb·y, Σ Ra·y, Σ Ra·Rb·y/T. */
  #sums: readonly Float64Array[] = [];
  /** Load admittance at each item's out, and its gain. */
  #load: readonly (readonly [Float64Array, Float64Array])[] = [];
  #gain: readonly (readonly [Float64Array, Float64Array])[] = [];

  /** @param omega rad/s, all above 0; kept, not copied: change it through `retune` alone */
  constructor(board: CompiledBoard, omega: Float64Array) {
    this.#board = board;
    this.omega = omega;
    this.#ones = new Float64Array(board.bands.length).fill(1);
    this.#prepare();
  }

  #prepare(): void {
    const { omega } = this;
    const board = this.#board;
    const column = (): Float64Array => new Float64Array(omega.length);
    const pair = (): readonly [Float64Array, Float64Array] => [column(), column()];
    this.#shared = board.reference ? new ReferenceStar(board, omega) : undefined;
    this.#sloped = undefined;
    const isFast = board.reference === undefined;
    this.#sums = isFast ? [column(), column(), column(), column(), column(), column()] : [];
    this.#load = isFast ? board.items.map(pair) : [];
    this.#gain = isFast ? board.items.map(pair) : [];
    this.#legRe = isFast ? board.bands.map(column) : [];
    this.#legIm = isFast ? board.bands.map(column) : [];
    this.#stale = new Uint8Array(board.bands.length).fill(1);
  }

  get board(): CompiledBoard {
    return this.#board;
  }

  /**
   * Puts another version of the same board in (see `recompileBlock`): only the legs that differ are worked out anew.
   * @throws RangeError where it has other bands or another chain
   */
  replace(board: CompiledBoard): void {
    const old = this.#board;
    if (board.bands.length !== old.bands.length || board.items.length !== old.items.length) throw new RangeError("not a version of the same board");
    this.#board = board;
    // A reference that gains or loses its impedance changes the way of working.
    if ((board.reference === undefined) !== (old.reference === undefined)) {
      this.#prepare();
      return;
    }
    this.#shared?.replace(board);
    this.#sloped?.replace(board);
    for (const [index, band] of board.bands.entries()) if (band.leg !== old.bands[index].leg) this.#stale[index] = 1;
  }

  /** Moves a sweep of one point to another frequency, rad/s: what root-finding uses, without allocating. */
  retune(omega: number): void {
    this.omega[0] = omega;
    this.#shared?.retune();
    this.#sloped?.retune();
    this.#stale.fill(1);
  }

  /**
   * Fills H at every frequency for the given positions (in the order of `board.bands`).
   * With `out.slopeRe` it also fills dH/ds, by forward differentiation, at a few times the cost.
   * @param weights factor on each band's admittance, track included: 1 as it stands (the default), 0 as if it were not there
   */
  run(positions: Float64Array, out: TransferColumns, weights: Float64Array = this.#ones): void {
    if (hasSlopes(out)) {
      this.#sloped ??= new SlopeStar(this.#board, this.omega);
      this.#sloped.run(positions, out, weights);
      return;
    }
    if (this.#shared) {
      this.#shared.run(positions, out, weights);
      return;
    }
    const { items, path, bands } = this.#board;
    for (let b = 0; b < bands.length; b++) {
      if (this.#stale[b] === 1) bands[b].leg.admittance(this.omega, this.#legRe[b], this.#legIm[b]);
      this.#stale[b] = 0;
    }
    for (const [re, im] of this.#load) {
      re.fill(0);
      im.fill(0);
    }
    for (let i = items.length - 1; i >= 0; i--) {
      const item = items[i];
      if (item.type === "stage") this.#stage(i, item, positions, weights);
      else if (item.type === "buffer") this.#buffer(i, item);
      else if (item.type === "output") this.#output(i, item);
      else this.#input(i, item);
    }
    out.re.set(this.#gain[path[0]][0]);
    out.im.set(this.#gain[path[0]][1]);
    for (let step = 1; step < path.length; step++) {
      const [gr, gi] = this.#gain[path[step]];
      for (let k = 0; k < gr.length; k++) {
        const re = out.re[k] * gr[k] - out.im[k] * gi[k];
        out.im[k] = out.re[k] * gi[k] + out.im[k] * gr[k];
        out.re[k] = re;
      }
    }
  }

  #stage(index: number, item: Extract<ItemForm, { type: "stage" }>, positions: Float64Array, weights: Float64Array): void {
    const { omega } = this;
    const points = omega.length;
    const [smR, smI, spR, spI, xR, xI] = this.#sums;
    for (const column of this.#sums) column.fill(0);
    let tracks = 0;
    for (const band of item.bands) {
      const { boost: ra, cut: rb } = band.resistances(positions[band.index]);
      const t = ra + rb;
      const weight = weights[band.index];
      const product = ra * rb;
      const cross = (weight * product) / t;
      const toBoost = weight * rb;
      const toCut = weight * ra;
      tracks += weight / t;
      const yr = this.#legRe[band.index];
      const yi = this.#legIm[band.index];
      for (let k = 0; k < points; k++) {
        // y = Y/(T + Ra·Rb·Y)
        const br = yr[k];
        const bi = yi[k];
        const dr = t + product * br;
        const di = product * bi;
        const norm = 1 / (dr * dr + di * di);
        const vr = (br * dr + bi * di) * norm;
        const vi = (bi * dr - br * di) * norm;
        smR[k] += toBoost * vr;
        smI[k] += toBoost * vi;
        spR[k] += toCut * vr;
        spI[k] += toCut * vi;
        xR[k] += cross * vr;
        xI[k] += cross * vi;
      }
    }
    const { amp, inputG: gi, feedbackG: gf, feedbackC: cf } = item;
    const { e0, e1, ro, gin } = amp;
    const [loadR, loadI] = this.#load[index];
    const [upR, upI] = this.#load[item.driver];
    const [gainR, gainI] = this.#gain[index];
    for (let k = 0; k < points; k++) {
      const w = omega[k];
      const er = e0;
      const ei = w * e1;
      const fi = w * cf;
      // Ymp − gin, and gi + gin + Ypp with Ypp = Σp − Ymp
      const mr = xR[k] - tracks - gin;
      const mi = xI[k];
      const pr = gi + spR[k] - xR[k] + tracks + gin;
      const pi = spI[k] - xI[k];
      // e·β, β = ro·Yf; e·α, α = 1 + ro·(Yf + YL)
      const br = ro * (er * gf - ei * fi);
      const bi = ro * (er * fi + ei * gf);
      const ar0 = 1 + ro * (gf + loadR[k]);
      const ai0 = ro * (fi + loadI[k]);
      const ar = er * ar0 - ei * ai0;
      const ai = er * ai0 + ei * ar0;
      // The 2×2 system in v_m and v_o.
      const a11r = gf + smR[k] - (br * mr - bi * mi);
      const a11i = fi + smI[k] - (br * mi + bi * mr);
      const a12r = -gf + (ar * mr - ai * mi);
      const a12i = -fi + (ar * mi + ai * mr);
      const a21r = gi + spR[k] - (br * pr - bi * pi);
      const a21i = spI[k] - (br * pi + bi * pr);
      const a22r = ar * pr - ai * pi;
      const a22i = ar * pi + ai * pr;
      const detR = a11r * a22r - a11i * a22i - (a12r * a21r - a12i * a21i);
      const detI = a11r * a22i + a11i * a22r - (a12r * a21i + a12i * a21r);
      const norm = gi / (detR * detR + detI * detI);
      const gr = (a11r * detR + a11i * detI) * norm;
      const gI = (a11i * detR - a11r * detI) * norm;
      const vmr = -(a12r * detR + a12i * detI) * norm;
      const vmi = -(a12i * detR - a12r * detI) * norm;
      gainR[k] = gr;
      gainI[k] = gI;
      // v_p = v_m + e·(α·v_o − β·v_m); the stage takes gi·(1 − v_p) from its driver.
      const vpr = vmr + (ar * gr - ai * gI) - (br * vmr - bi * vmi);
      const vpi = vmi + (ar * gI + ai * gr) - (br * vmi + bi * vmr);
      upR[k] += gi * (1 - vpr);
      upI[k] -= gi * vpi;
    }
  }

  #buffer(index: number, item: Extract<ItemForm, { type: "buffer" }>): void {
    const { e0, e1, ro, gin } = item.amp;
    const [loadR, loadI] = this.#load[index];
    const [upR, upI] = this.#load[item.driver];
    const [gainR, gainI] = this.#gain[index];
    for (let k = 0; k < gainR.length; k++) {
      const ei = this.omega[k] * e1;
      const ar = 1 + ro * (loadR[k] + gin);
      const ai = ro * loadI[k];
      const dr = 1 + e0 * ar - ei * ai;
      const di = e0 * ai + ei * ar;
      const nr = 1 + e0 * ro * gin;
      const ni = ei * ro * gin;
      const norm = 1 / (dr * dr + di * di);
      gainR[k] = (nr * dr + ni * di) * norm;
      gainI[k] = (ni * dr - nr * di) * norm;
      upR[k] += gin * (1 - gainR[k]);
      upI[k] -= gin * gainI[k];
    }
  }

  #output(index: number, item: Extract<ItemForm, { type: "output" }>): void {
    const { seriesR, couplingC, loadR } = item;
    const [upR, upI] = this.#load[item.driver];
    const [gainR, gainI] = this.#gain[index];
    const r = seriesR + loadR;
    for (let k = 0; k < gainR.length; k++) {
      const x = couplingC === 0 ? 0 : -1 / (this.omega[k] * couplingC);
      const norm = 1 / (r * r + x * x);
      upR[k] += r * norm;
      upI[k] -= x * norm;
      gainR[k] = loadR * r * norm;
      gainI[k] = -loadR * x * norm;
    }
  }

  #input(index: number, item: Extract<ItemForm, { type: "input" }>): void {
    const { sourceR, couplingC, loadG } = item;
    const [loadR, loadI] = this.#load[index];
    const [gainR, gainI] = this.#gain[index];
    for (let k = 0; k < gainR.length; k++) {
      const x = couplingC === 0 ? 0 : -1 / (this.omega[k] * couplingC);
      const yr = loadG + loadR[k];
      const yi = loadI[k];
      const dr = 1 + sourceR * yr - x * yi;
      const di = sourceR * yi + x * yr;
      const norm = 1 / (dr * dr + di * di);
      gainR[k] = dr * norm;
      gainI[k] = -di * norm;
    }
  }
}

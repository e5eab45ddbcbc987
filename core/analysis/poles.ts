import type { Board } from "../net/board.ts";
import { expandBoard } from "../net/expand.ts";
import { describeNetlist, type Descriptor } from "../net/nodal.ts";
import { compileBoard, Sweep } from "../net/star.ts";
import { transferColumns } from "../net/transfer.ts";
import type { ValueOpts } from "../net/values.ts";
import { ComplexLu } from "../num/complex-lu.ts";
import { realEigenvalues } from "../num/real-eigen.ts";
import { angular, logFrequencies } from "./response.ts";

/** A natural frequency, rad/s. */
export interface Root {
  readonly re: number;
  readonly im: number;
}

export interface Pole extends Root {
  /** The block to which the pole belongs most, by participation. */
  readonly block: string;
  /** The parts that take part most, largest first, with their share (the real part of the participation factor; all parts sum to 1). */
  readonly shares: readonly { readonly source: string; readonly share: number }[];
}

export interface PolesAndZeros {
  /** Ascending in magnitude; of a complex pair both are listed. */
  readonly poles: readonly Pole[];
  readonly zeros: readonly Root[];
  /** H(s) = gain·Π(s − zero)/Π(s − pole), stated as ln |gain| and its sign, since the products run past any number's range. */
  readonly lnGain: number;
  readonly sign: 1 | -1;
  /** The largest difference between that factored form and the response, dB, over 10 Hz–100 kHz: how far to trust this table. */
  readonly reproducedWithin: number;
  /** Poles with a positive real part: the board oscillates, and no other figure means anything. */
  readonly unstable: readonly Pole[];
}

/** Roots past this are infinite for all that a netlist of real parts can say, rad/s. */
const FARTHEST = 1e14;

/** Roots below this are at the origin, rad/s: a time constant of three centuries is a charge that stays for ever. */
const AT_ORIGIN = 1e-10;
/** Roots below this have no sign to speak of, rad/s: bootstrapped input resistances leave them to rounding. */
const SLOWEST_SIGN = 1e-6;

/** Shifts for the slow roots and for the fast ones, rad/s; where a board happens to have a root at one, the next serves. */
const NEAR_SHIFTS = [1, 1.618, 2.718];
const FAR_SHIFTS = [1e11, 1.618e11, 2.718e11];
/** Both tell the roots in this range alike, rad/s. */
const [SHARED_FROM, SHARED_TO] = [1e5, 1e9];

/**
 * Poles and zeros of v(load)/EMF from the descriptor form (G + s·C)·x = b of the whole board, inductors and op-amp poles
 * included. C is a sum of m rank-one terms, one a reactive element, so that det(G + s·C) = 0 becomes the eigenvalue problem
 * of the m×m matrix K = D·Vᵀ(G + σC)⁻¹U with s = σ − 1/κ (matrix determinant lemma; σ > 0 keeps G + σC regular where a
 * node floats at DC). Zeros: the same with the EMF's equation replaced by v(load) = 0. Every root is then refined on the
 * full pencil by two-sided Rayleigh quotient iteration (Ostrowski, Arch. Rational Mech. Anal. 3, 1959), so that time
 * constants ten decades apart keep their digits.
 * @throws RangeError where some value is out of any practical range
 */
export function polesAndZeros(board: Board, opts: ValueOpts = {}): PolesAndZeros {
  const poleForm = describeNetlist(expandBoard(board, opts));
  const poleRoots = refine(poleForm, eigenvaluesOf(poleForm));
  const zeroForm = withOutputHeld(poleForm);
  const zeroRoots = refine(zeroForm, eigenvaluesOf(zeroForm));
  const response = responseOf(board, opts);
  const atOrigin = zerosAtOrigin(board, opts, poleRoots);
  const zeros = zeroRoots.map((root, index): Root => (index < atOrigin ? { re: 0, im: 0 } : { re: root.re, im: root.im }));
  const poles = poleRoots.map(({ re, im, x, y }): Pole => ({ re, im, ...participation(poleForm, x, y) }));
  const factored = fitGain(poles, zeros, response);
  return { poles, zeros, ...factored, unstable: poles.filter(isUnstable) };
}

/** The poles that make a board oscillate: those with a positive real part. Quicker than `polesAndZeros`, which tells more. @throws RangeError as that does */
export function unstablePoles(board: Board, opts: ValueOpts = {}): Pole[] {
  const form = describeNetlist(expandBoard(board, opts));
  const suspects = eigenvaluesOf(form).filter((root) => root.re > -1e-6 * Math.hypot(root.re, root.im));
  return refine(form, suspects).filter(isUnstable).map(({ re, im, x, y }) => ({ re, im, ...participation(form, x, y) }));
}

function isUnstable({ re, im }: Root): boolean {
  const size = Math.hypot(re, im);
  // A pole at the origin or next to it is a node that keeps its charge, such as a capacitor into an op amp's input.
  return size > SLOWEST_SIGN && re > 1e-9 * size;
}

/** Says that a board oscillates, and in which loop. @param unstable at least one pole */
export function unstableText(unstable: readonly Pole[]): string {
  const names = [...new Set(unstable.map((p) => `“${p.block}”`))].join(", ");
  return `unstable: a pole lies in the right half plane, so the board oscillates and no other figure means anything; look at the loop of ${names}`;
}

/** f = |s|/2π in Hz and Q = |s|/(−2·Re s); Q is ½ or less for real roots, negative where unstable, null at the origin. */
export function rootFigures({ re, im }: Root): { readonly frequency: number; readonly q: number | null } {
  const size = Math.hypot(re, im);
  return { frequency: size / (2 * Math.PI), q: re === 0 ? null : im === 0 ? (re < 0 ? 0.5 : -0.5) : -size / (2 * re) };
}

interface Vector {
  readonly re: Float64Array;
  readonly im: Float64Array;
}

interface RefinedRoot extends Root {
  /** Right and left vectors of the pencil. */
  readonly x: Vector;
  readonly y: Vector;
}

/** The pencil whose roots are the zeros: the EMF's equation gives way to v(load) = 0 (its current becomes free). */
function withOutputHeld(form: Descriptor): Descriptor {
  const row = form.excitation.findIndex((b) => b !== 0);
  const conductance = form.conductance.slice();
  conductance.fill(0, row * form.size, (row + 1) * form.size);
  conductance[row * form.size + form.outputIndex] = 1;
  return { ...form, conductance };
}

/**
 * A shift tells roots well that are not many decades larger than itself: past that, roots at infinity, which rounding
 * scatters, look like any other. So slow roots are read from a low shift, fast ones from a high one, and the seam lies in
 * the widest gap of the range that both tell alike.
 */
function eigenvaluesOf(form: Descriptor): Root[] {
  const near = shiftedRoots(form, NEAR_SHIFTS);
  const far = shiftedRoots(form, FAR_SHIFTS);
  const sizeOf = ({ re, im }: Root): number => Math.hypot(re, im);
  const shared = near.map(sizeOf).filter((size) => size > SHARED_FROM && size < SHARED_TO).sort((a, b) => a - b);
  let seam = SHARED_FROM;
  let widest = 0;
  [SHARED_FROM, ...shared].forEach((size, i) => {
    const ratio = (shared[i] ?? SHARED_TO) / size;
    if (ratio > widest) [widest, seam] = [ratio, size * Math.sqrt(ratio)];
  });
  return [...near.filter((root) => sizeOf(root) < seam), ...far.filter((root) => sizeOf(root) >= seam && sizeOf(root) < FARTHEST)];
}

/** The roots as one shift tells them, the infinite ones apart. @throws RangeError where no shift gives finite numbers */
function shiftedRoots(form: Descriptor, shifts: readonly number[]): Root[] {
  const { size: n, conductance, storage, storageTerms } = form;
  const m = storageTerms.length;
  if (m === 0) return [];
  const lu = new ComplexLu(n);
  const column = new Float64Array(n);
  const zero = new Float64Array(n);
  for (const sigma of shifts) {
    for (let i = 0; i < n * n; i++) lu.re[i] = conductance[i] + sigma * storage[i];
    lu.im.fill(0);
    if (!lu.factor()) continue;
    const k = new Float64Array(m * m);
    storageTerms.forEach(({ u }, j) => {
      column.fill(0);
      zero.fill(0);
      for (const [index, factor] of u) column[index] += factor;
      lu.solve(column, zero);
      storageTerms.forEach(({ v, value }, i) => {
        let sum = 0;
        for (const [index, factor] of v) sum += factor * column[index];
        // Times the shift, so that K is of the size of 1.
        k[i * m + j] = sigma * value * sum;
      });
    });
    if (!k.every(Number.isFinite)) break;
    const { re, im } = realEigenvalues(k, m);
    const roots: Root[] = [];
    for (let i = 0; i < m; i++) {
      const norm = re[i] * re[i] + im[i] * im[i];
      if (norm > 0) roots.push({ re: sigma - (sigma * re[i]) / norm, im: (sigma * im[i]) / norm });
    }
    return roots;
  }
  throw new RangeError("there are no poles to be found: some value of the board is out of any practical range");
}

/**
 * Two-sided Rayleigh quotient iteration on every root; of a complex pair one is worked on and mirrored. Each step squares
 * the error or better, so that one of a billionth is the last.
 */
function refine(form: Descriptor, roots: readonly Root[]): RefinedRoot[] {
  const { size: n, conductance, storage } = form;
  const lu = new ComplexLu(n);
  const refined: RefinedRoot[] = [];
  for (const start of roots) {
    if (start.im < 0) continue;
    let { re, im } = start;
    const reach = reachOf(start, roots);
    let x: Vector = { re: ramp(n, 1), im: im === 0 ? new Float64Array(n) : ramp(n, 2) };
    let y: Vector = { re: ramp(n, 3), im: im === 0 ? new Float64Array(n) : ramp(n, 4) };
    let step = Infinity;
    for (let iteration = 0; iteration < 8 && step > 1e-9 * Math.hypot(re, im); iteration++) {
      for (let i = 0; i < n * n; i++) {
        lu.re[i] = conductance[i] + re * storage[i];
        lu.im[i] = im * storage[i];
      }
      // Singular to the last bit: the root is exact already.
      if (!lu.factor()) break;
      const right = multiply(storage, n, x, false);
      const left = multiply(storage, n, y, true);
      x = { re: right.re.slice(), im: right.im.slice() };
      y = { re: left.re.slice(), im: left.im.slice() };
      lu.solve(x.re, x.im);
      lu.solveTransposed(y.re, y.im);
      normalise(x);
      normalise(y);
      // δ = −yᵀ(G + λC)x / yᵀCx
      const [ar, ai] = bilinear(y, pencil(form, re, im, x));
      const [cr, ci] = bilinear(y, multiply(storage, n, x, false));
      const norm = cr * cr + ci * ci;
      if (!(norm > 0)) break;
      const deltaRe = -(ar * cr + ai * ci) / norm;
      const deltaIm = start.im === 0 ? 0 : -(ai * cr - ar * ci) / norm;
      const size = Math.hypot(deltaRe, deltaIm);
      if (!Number.isFinite(size)) break;
      // A step that leaves the neighbourhood would end on another root: the vectors have to settle first.
      if (Math.hypot(re + deltaRe - start.re, im + deltaIm - start.im) > reach) continue;
      re += deltaRe;
      im += deltaIm;
      step = size;
    }
    refined.push({ re, im, x, y });
  }
  // Two starts that ended on one root: the one that moved further goes back to where it was.
  const starts = roots.filter((root) => root.im >= 0);
  for (let i = 0; i < refined.length; i++) {
    for (let j = 0; j < i; j++) {
      const [a, b] = [refined[i], refined[j]];
      const size = Math.hypot(a.re, a.im);
      if (Math.hypot(a.re - b.re, a.im - b.im) > 1e-11 * size || Math.hypot(starts[i].re - starts[j].re, starts[i].im - starts[j].im) < 1e-8 * size) continue;
      const moved = (k: number): number => Math.hypot(refined[k].re - starts[k].re, refined[k].im - starts[k].im);
      const back = moved(i) > moved(j) ? i : j;
      refined[back] = { ...refined[back], re: starts[back].re, im: starts[back].im };
    }
  }
  return refined
    .flatMap((root) => (root.im === 0 ? [root] : [root, { ...root, im: -root.im, x: conjugate(root.x), y: conjugate(root.y) }]))
    .map((root) => (Math.hypot(root.re, root.im) < AT_ORIGIN ? { ...root, re: 0, im: 0 } : root))
    .sort((a, b) => Math.hypot(a.re, a.im) - Math.hypot(b.re, b.im) || b.im - a.im);
}

/** How far a root may move from its start: what rounding can have done to it, short of its neighbours. */
function reachOf(start: Root, roots: readonly Root[]): number {
  const size = Math.hypot(start.re, start.im);
  let nearest = Infinity;
  for (const other of roots) if (other !== start) nearest = Math.min(nearest, Math.hypot(other.re - start.re, other.im - start.im));
  return Math.max(1e-3 * size, Math.min(size, nearest) / 2);
}

/** A fixed vector with something of every direction in it. */
function ramp(n: number, phase: number): Float64Array {
  return Float64Array.from({ length: n }, (_, i) => Math.sin((i + 1) * (0.7 + 0.13 * phase)) + 1.1);
}

function conjugate(x: Vector): Vector {
  return { re: x.re, im: x.im.map((v) => -v) };
}

function normalise(x: Vector): void {
  let largest = 0;
  for (let i = 0; i < x.re.length; i++) largest = Math.max(largest, Math.abs(x.re[i]), Math.abs(x.im[i]));
  if (!(largest > 0) || !Number.isFinite(largest)) return;
  for (let i = 0; i < x.re.length; i++) {
    x.re[i] /= largest;
    x.im[i] /= largest;
  }
}

function multiply(matrix: Float64Array, n: number, x: Vector, isTransposed: boolean): Vector {
  const out = { re: new Float64Array(n), im: new Float64Array(n) };
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const a = isTransposed ? matrix[j * n + i] : matrix[i * n + j];
      if (a === 0) continue;
      out.re[i] += a * x.re[j];
      out.im[i] += a * x.im[j];
    }
  }
  return out;
}

/** (G + λC)·x. */
function pencil(form: Descriptor, re: number, im: number, x: Vector): Vector {
  const g = multiply(form.conductance, form.size, x, false);
  const c = multiply(form.storage, form.size, x, false);
  for (let i = 0; i < form.size; i++) {
    g.re[i] += re * c.re[i] - im * c.im[i];
    g.im[i] += re * c.im[i] + im * c.re[i];
  }
  return g;
}

/** yᵀ·z, not conjugated. */
function bilinear(y: Vector, z: Vector): readonly [number, number] {
  let re = 0;
  let im = 0;
  for (let i = 0; i < y.re.length; i++) {
    re += y.re[i] * z.re[i] - y.im[i] * z.im[i];
    im += y.re[i] * z.im[i] + y.im[i] * z.re[i];
  }
  return [re, im];
}

/**
 * Participation factors of the reactive elements, value·(yᵀu)(vᵀx)/(yᵀCx): they say how far each element moves the root, and
 * sum to 1 (Pérez-Arriaga, Verghese and Schweppe, IEEE Trans. Power App. Syst. 101(9), 1982).
 */
function participation(form: Descriptor, x: Vector, y: Vector): Pick<Pole, "block" | "shares"> {
  const [cr, ci] = bilinear(y, multiply(form.storage, form.size, x, false));
  const norm = cr * cr + ci * ci;
  const project = (vector: Descriptor["storageTerms"][number]["u"], of: Vector): readonly [number, number] => {
    let re = 0;
    let im = 0;
    for (const [index, factor] of vector) {
      re += factor * of.re[index];
      im += factor * of.im[index];
    }
    return [re, im];
  };
  const factors = form.storageTerms.map(({ source, value, u, v }) => {
    const [yr, yi] = project(u, y);
    const [xr, xi] = project(v, x);
    const re = value * (yr * xr - yi * xi);
    const im = value * (yr * xi + yi * xr);
    return { source, share: norm > 0 ? (re * cr + im * ci) / norm : 0 };
  });
  const byBlock = new Map<string, number>();
  for (const { source, share } of factors) {
    const block = source.slice(0, source.indexOf(".") < 0 ? undefined : source.lastIndexOf("."));
    const name = block.endsWith(".inductor") ? block.slice(0, -".inductor".length) : block;
    byBlock.set(name, (byBlock.get(name) ?? 0) + share);
  }
  const [block] = [...byBlock].reduce((best, entry) => (Math.abs(entry[1]) > Math.abs(best[1]) ? entry : best), ["", 0]);
  const shares = factors.filter(({ share }) => Math.abs(share) > 0.01).sort((a, b) => Math.abs(b.share) - Math.abs(a.share));
  return { block, shares };
}

interface Sampled {
  readonly omega: Float64Array;
  readonly re: Float64Array;
  readonly im: Float64Array;
}

function responseOf(board: Board, opts: ValueOpts): Sampled {
  const omega = angular(logFrequencies(10, 100e3, 241));
  const columns = transferColumns(omega.length, false);
  const compiled = compileBoard(board, opts);
  new Sweep(compiled, omega).run(compiled.positions, columns);
  return { omega, re: columns.re, im: columns.im };
}

/**
 * How many zeros lie exactly at the origin (one a series capacitor in the signal path, as a rule): |H| rises with that power
 * of ω below every other root, less one for a pole there. A multiple root is the one thing that an eigenvalue solver blurs.
 */
function zerosAtOrigin(board: Board, opts: ValueOpts, poles: readonly Root[]): number {
  const sizes = poles.map(({ re, im }) => Math.hypot(re, im));
  const slowest = Math.min(...sizes.filter((size) => size > 0));
  if (!Number.isFinite(slowest)) return 0;
  const columns = transferColumns(1, true) as Required<ReturnType<typeof transferColumns>>;
  // Well below the slowest pole, and well above those that pass for the origin.
  const omega = new Float64Array([Math.sqrt(slowest * AT_ORIGIN)]);
  const compiled = compileBoard(board, opts);
  new Sweep(compiled, omega).run(compiled.positions, columns);
  // d ln|H| / d ln ω = −ω·Im(H′/H)
  const { re, im, slopeRe, slopeIm } = columns;
  const slope = (-omega[0] * (slopeIm[0] * re[0] - slopeRe[0] * im[0])) / (re[0] * re[0] + im[0] * im[0]);
  return Math.max(0, Math.round(slope) + sizes.filter((size) => size === 0).length);
}

/** The gain that ties the factored form to the response at its middle, and how well the two agree everywhere else. */
function fitGain(poles: readonly Root[], zeros: readonly Root[], response: Sampled): Pick<PolesAndZeros, "lnGain" | "sign" | "reproducedWithin"> {
  const { omega, re, im } = response;
  const logOf = (w: number): readonly [ln: number, angle: number] => {
    let ln = 0;
    let angle = 0;
    for (const [roots, way] of [[zeros, 1], [poles, -1]] as const) {
      for (const root of roots) {
        ln += way * Math.log(Math.hypot(root.re, w - root.im));
        angle += way * Math.atan2(w - root.im, -root.re);
      }
    }
    return [ln, angle];
  };
  const middle = omega.length >> 1;
  const [ln, angle] = logOf(omega[middle]);
  const lnGain = Math.log(Math.hypot(re[middle], im[middle])) - ln;
  const sign = Math.cos(Math.atan2(im[middle], re[middle]) - angle) >= 0 ? 1 : -1;
  let worst = 0;
  for (let k = 0; k < omega.length; k++) {
    const [lnK, angleK] = logOf(omega[k]);
    const turn = Math.atan2(im[k], re[k]) - angleK - (sign < 0 ? Math.PI : 0);
    // |difference| as a fraction of H, in dB: magnitude and phase both count.
    const apart = Math.hypot(lnGain + lnK - Math.log(Math.hypot(re[k], im[k])), Math.sin(turn / 2) * 2);
    worst = Math.max(worst, (20 / Math.LN10) * apart);
  }
  return { lnGain, sign, reproducedWithin: worst };
}

import { LEG_REGISTERS, type LegPort } from "../blocks/definition.ts";
import { Dual } from "../num/dual.ts";
import type { CompiledBoard, ItemForm, ReferenceForm } from "./star.ts";
import type { TransferColumns } from "./transfer.ts";

/** A complex number a frequency. */
class Column {
  readonly re: Float64Array;
  readonly im: Float64Array;

  constructor(points: number) {
    this.re = new Float64Array(points);
    this.im = new Float64Array(points);
  }

  set(k: number, re: number, im: number): void {
    this.re[k] = re;
    this.im[k] = im;
  }

  add(k: number, re: number, im: number): void {
    this.re[k] += re;
    this.im[k] += im;
  }
}

/** What hangs below a node of the chain, with the reference as a second port; names as in star-slopes.ts. */
interface Below {
  readonly ii: Column;
  readonly ir: Column;
  readonly ri: Column;
  readonly rr: Column;
  readonly t: Column;
  readonly tr: Column;
}

/** A leg's two-port admittances. */
interface LegColumns {
  readonly ww: Column;
  readonly wr: Column;
  readonly rw: Column;
  readonly rr: Column;
  /** Whether anything in it goes to the reference: a leg with none has one admittance only. */
  hasReference: boolean;
}

/** Sums over a stage's bands: what they put between the rails and from rails to reference (see the boost-cut stage's README). */
interface Sums {
  readonly m: Column;
  readonly p: Column;
  readonly cross: Column;
  readonly mr: Column;
  readonly pr: Column;
  readonly rm: Column;
  readonly rp: Column;
  readonly rr: Column;
}

/**
 * The star reduction on a board whose reference has an impedance of its own: every leg and stage has the reference as a
 * second port, and the reference node is closed last. In columns, so that a slider move costs one division a band and
 * frequency as on a split supply.
 */
export class ReferenceStar {
  #board: CompiledBoard;
  readonly omega: Float64Array;
  readonly #legs: readonly LegColumns[];
  readonly #below: readonly Below[];
  readonly #belowAll: readonly Column[];
  readonly #sums: Sums;
  readonly #sumsAll: readonly Column[];
  /** 1 where a band's kept columns are of another leg or frequency. */
  readonly #stale: Uint8Array;
  readonly #port: LegPort = { ww: new Dual(), wr: new Dual(), rw: new Dual(), rr: new Dual() };
  readonly #work: readonly Dual[] = Array.from({ length: LEG_REGISTERS }, () => new Dual());

  constructor(board: CompiledBoard, omega: Float64Array) {
    const column = (): Column => new Column(omega.length);
    this.#board = board;
    this.omega = omega;
    this.#legs = board.bands.map(() => ({ ww: column(), wr: column(), rw: column(), rr: column(), hasReference: false }));
    this.#below = board.items.map(() => ({ ii: column(), ir: column(), ri: column(), rr: column(), t: column(), tr: column() }));
    this.#sums = { m: column(), p: column(), cross: column(), mr: column(), pr: column(), rm: column(), rp: column(), rr: column() };
    this.#belowAll = this.#below.flatMap((below) => Object.values(below));
    this.#sumsAll = Object.values(this.#sums);
    this.#stale = new Uint8Array(board.bands.length).fill(1);
  }

  /** Puts another version of the same board in; legs that differ are worked out anew with the next run. */
  replace(board: CompiledBoard): void {
    for (const [index, band] of board.bands.entries()) if (band.leg !== this.#board.bands[index].leg) this.#stale[index] = 1;
    this.#board = board;
  }

  /** Takes notice that `omega` has changed. */
  retune(): void {
    this.#stale.fill(1);
  }

  #refresh(): void {
    const { ww, wr, rw, rr } = this.#port;
    for (let b = 0; b < this.#stale.length; b++) {
      if (this.#stale[b] === 0) continue;
      this.#stale[b] = 0;
      const columns = this.#legs[b];
      columns.hasReference = false;
      for (let k = 0; k < this.omega.length; k++) {
        this.#board.bands[b].leg.port(this.omega[k], this.#port, this.#work);
        columns.ww.set(k, ww[0], ww[1]);
        columns.wr.set(k, wr[0], wr[1]);
        columns.rw.set(k, rw[0], rw[1]);
        columns.rr.set(k, rr[0], rr[1]);
        columns.hasReference ||= wr[0] !== 0 || wr[1] !== 0 || rw[0] !== 0 || rw[1] !== 0 || rr[0] !== 0 || rr[1] !== 0;
      }
    }
  }

  /** Fills H; arguments as for `Sweep.run`. */
  run(positions: Float64Array, out: TransferColumns, weights: Float64Array): void {
    this.#refresh();
    const { items, reference } = this.#board;
    if (!reference) throw new RangeError("the board's reference is ground");
    clear(this.#belowAll);
    for (let i = items.length - 1; i >= 0; i--) {
      const item = items[i];
      if (item.type === "stage") this.#stage(i, item, positions, weights);
      else if (item.type === "buffer") this.#buffer(i, item);
      else if (item.type === "output") this.#output(item);
      else this.#input(i, item, reference, out);
    }
  }

  #gather(item: Extract<ItemForm, { type: "stage" }>, positions: Float64Array, weights: Float64Array): number {
    const points = this.omega.length;
    const sums = this.#sums;
    clear(this.#sumsAll);
    const { m, p, cross } = sums;
    let tracks = 0;
    for (const band of item.bands) {
      const { boost: ra, cut: rb } = band.resistances(positions[band.index]);
      const track = ra + rb;
      const product = ra * rb;
      const weight = weights[band.index];
      const toBoost = weight * rb;
      const toCut = weight * ra;
      const across = (weight * product) / track;
      tracks += weight / track;
      const leg = this.#legs[band.index];
      const { re: wwRe, im: wwIm } = leg.ww;
      for (let k = 0; k < points; k++) {
        // q = 1/(T + Ra·Rb·Yww), y = q·Yww
        const yr = wwRe[k];
        const yi = wwIm[k];
        const dr = track + product * yr;
        const di = product * yi;
        const norm = 1 / (dr * dr + di * di);
        const qr = dr * norm;
        const qi = -di * norm;
        const vr = qr * yr - qi * yi;
        const vi = qr * yi + qi * yr;
        m.re[k] += toBoost * vr;
        m.im[k] += toBoost * vi;
        p.re[k] += toCut * vr;
        p.im[k] += toCut * vi;
        cross.re[k] += across * vr;
        cross.im[k] += across * vi;
        if (!leg.hasReference) continue;
        const or = leg.wr.re[k];
        const oi = leg.wr.im[k];
        const ir = leg.rw.re[k];
        const ii = leg.rw.im[k];
        const outR = qr * or - qi * oi;
        const outI = qr * oi + qi * or;
        sums.mr.add(k, toBoost * outR, toBoost * outI);
        sums.pr.add(k, toCut * outR, toCut * outI);
        sums.rr.add(k, weight * leg.rr.re[k] - toCut * rb * (outR * ir - outI * ii), weight * leg.rr.im[k] - toCut * rb * (outR * ii + outI * ir));
        const inR = qr * ir - qi * ii;
        const inI = qr * ii + qi * ir;
        sums.rm.add(k, toBoost * inR, toBoost * inI);
        sums.rp.add(k, toCut * inR, toCut * inI);
      }
    }
    return tracks;
  }

  #stage(index: number, item: Extract<ItemForm, { type: "stage" }>, positions: Float64Array, weights: Float64Array): void {
    const tracks = this.#gather(item, positions, weights);
    const { m, p, cross, mr, pr, rm, rp, rr } = this.#sums;
    const { amp, inputG, feedbackG, feedbackC } = item;
    const { e0, e1, ro, gin } = amp;
    const below = this.#below[index];
    const up = this.#below[item.driver];
    for (let k = 0; k < this.omega.length; k++) {
      const omega = this.omega[k];
      const er = e0;
      const ei = omega * e1;
      const fi = omega * feedbackC;
      // Ymp − gin, and Gi + gin + Ypp
      const mxR = cross.re[k] - tracks - gin;
      const mxI = cross.im[k];
      const pxR = p.re[k] - cross.re[k] + tracks + inputG + gin;
      const pxI = p.im[k] - cross.im[k];
      // e·α, e·β, e·γ
      const lr = 1 + ro * (feedbackG + below.ii.re[k]);
      const li = ro * (fi + below.ii.im[k]);
      const ar = er * lr - ei * li;
      const ai = er * li + ei * lr;
      const br = ro * (er * feedbackG - ei * fi);
      const bi = ro * (er * fi + ei * feedbackG);
      const gr = ro * (er * below.ir.re[k] - ei * below.ir.im[k]);
      const gi = ro * (er * below.ir.im[k] + ei * below.ir.re[k]);
      // The 2×2 system in v_m and v_o.
      const a11r = feedbackG + m.re[k] - (br * mxR - bi * mxI);
      const a11i = fi + m.im[k] - (br * mxI + bi * mxR);
      const a12r = ar * mxR - ai * mxI - feedbackG;
      const a12i = ar * mxI + ai * mxR - fi;
      const a21r = p.re[k] + inputG - (br * pxR - bi * pxI);
      const a21i = p.im[k] - (br * pxI + bi * pxR);
      const a22r = ar * pxR - ai * pxI;
      const a22i = ar * pxI + ai * pxR;
      const detR = a11r * a22r - a11i * a22i - (a12r * a21r - a12i * a21i);
      const detI = a11r * a22i + a11i * a22r - (a12r * a21i + a12i * a21r);
      const norm = 1 / (detR * detR + detI * detI);

      // Driven from the stage's in, reference still: right-hand side (0, Gi).
      const voR = (a11r * detR + a11i * detI) * inputG * norm;
      const voI = (a11i * detR - a11r * detI) * inputG * norm;
      const vmR = -(a12r * detR + a12i * detI) * inputG * norm;
      const vmI = -(a12i * detR - a12r * detI) * inputG * norm;
      const vpR = vmR + ar * voR - ai * voI - (br * vmR - bi * vmI);
      const vpI = vmI + ar * voI + ai * voR - (br * vmI + bi * vmR);
      const tr = below.t.re[k];
      const ti = below.t.im[k];
      const riR = below.ri.re[k];
      const riI = below.ri.im[k];
      up.ii.add(k, inputG * (1 - vpR), -inputG * vpI);
      up.t.add(k, tr * voR - ti * voI, tr * voI + ti * voR);
      up.ri.add(k, rm.re[k] * vmR - rm.im[k] * vmI + rp.re[k] * vpR - rp.im[k] * vpI + riR * voR - riI * voI, rm.re[k] * vmI + rm.im[k] * vmR + rp.re[k] * vpI + rp.im[k] * vpR + riR * voI + riI * voR);

      // Driven from the reference, the stage's in still: right-hand side (b1, b2).
      const b1r = -mr.re[k] - (gr * mxR - gi * mxI);
      const b1i = -mr.im[k] - (gr * mxI + gi * mxR);
      const b2r = -pr.re[k] - (gr * pxR - gi * pxI);
      const b2i = -pr.im[k] - (gr * pxI + gi * pxR);
      const nmR = b1r * a22r - b1i * a22i - (a12r * b2r - a12i * b2i);
      const nmI = b1r * a22i + b1i * a22r - (a12r * b2i + a12i * b2r);
      const noR = a11r * b2r - a11i * b2i - (a21r * b1r - a21i * b1i);
      const noI = a11r * b2i + a11i * b2r - (a21r * b1i + a21i * b1r);
      const wmR = (nmR * detR + nmI * detI) * norm;
      const wmI = (nmI * detR - nmR * detI) * norm;
      const woR = (noR * detR + noI * detI) * norm;
      const woI = (noI * detR - noR * detI) * norm;
      const wpR = wmR + ar * woR - ai * woI - (br * wmR - bi * wmI) + gr;
      const wpI = wmI + ar * woI + ai * woR - (br * wmI + bi * wmR) + gi;
      up.ir.add(k, -inputG * wpR, -inputG * wpI);
      up.rr.add(
        k,
        rr.re[k] + below.rr.re[k] + rm.re[k] * wmR - rm.im[k] * wmI + rp.re[k] * wpR - rp.im[k] * wpI + riR * woR - riI * woI,
        rr.im[k] + below.rr.im[k] + rm.re[k] * wmI + rm.im[k] * wmR + rp.re[k] * wpI + rp.im[k] * wpR + riR * woI + riI * woR,
      );
      up.tr.add(k, tr * woR - ti * woI + below.tr.re[k], tr * woI + ti * woR + below.tr.im[k]);
    }
  }

  #buffer(index: number, item: Extract<ItemForm, { type: "buffer" }>): void {
    const { e0, e1, ro, gin } = item.amp;
    const below = this.#below[index];
    const up = this.#below[item.driver];
    for (let k = 0; k < this.omega.length; k++) {
      const ei = this.omega[k] * e1;
      // v_o·(1 + e·(1 + ro·(YL + gin))) = v_in·(1 + e·ro·gin) − e·ro·YLr·v_r
      const lr = 1 + ro * (below.ii.re[k] + gin);
      const li = ro * below.ii.im[k];
      const dr = 1 + e0 * lr - ei * li;
      const di = e0 * li + ei * lr;
      const norm = 1 / (dr * dr + di * di);
      const nr = 1 + e0 * ro * gin;
      const ni = ei * ro * gin;
      const gr = (nr * dr + ni * di) * norm;
      const gi = (ni * dr - nr * di) * norm;
      const cr = -ro * (e0 * below.ir.re[k] - ei * below.ir.im[k]);
      const ci = -ro * (e0 * below.ir.im[k] + ei * below.ir.re[k]);
      const wr = (cr * dr + ci * di) * norm;
      const wi = (ci * dr - cr * di) * norm;
      const tr = below.t.re[k];
      const ti = below.t.im[k];
      const riR = below.ri.re[k];
      const riI = below.ri.im[k];
      up.ii.add(k, gin * (1 - gr), -gin * gi);
      up.ir.add(k, -gin * wr, -gin * wi);
      up.ri.add(k, riR * gr - riI * gi, riR * gi + riI * gr);
      up.rr.add(k, below.rr.re[k] + riR * wr - riI * wi, below.rr.im[k] + riR * wi + riI * wr);
      up.t.add(k, tr * gr - ti * gi, tr * gi + ti * gr);
      up.tr.add(k, tr * wr - ti * wi + below.tr.re[k], tr * wi + ti * wr + below.tr.im[k]);
    }
  }

  #output(item: Extract<ItemForm, { type: "output" }>): void {
    const { seriesR, couplingC, loadR } = item;
    const up = this.#below[item.driver];
    const r = seriesR + loadR;
    for (let k = 0; k < this.omega.length; k++) {
      const x = couplingC === 0 ? 0 : -1 / (this.omega[k] * couplingC);
      const norm = 1 / (r * r + x * x);
      up.ii.add(k, r * norm, -x * norm);
      up.t.add(k, loadR * r * norm, -loadR * x * norm);
    }
  }

  #input(index: number, item: Extract<ItemForm, { type: "input" }>, reference: ReferenceForm, out: TransferColumns): void {
    const { sourceR, couplingC, loadG } = item;
    const { ii, ir, ri, rr, t, tr } = this.#below[index];
    const node = { re: 0, im: 0 };
    for (let k = 0; k < this.omega.length; k++) {
      const x = couplingC === 0 ? 0 : -1 / (this.omega[k] * couplingC);
      // v·(1 + Z·(loadG + ii)) = 1 + Z·(loadG − ir)·v_r
      const yr = loadG + ii.re[k];
      const yi = ii.im[k];
      // v_r·(Yref + loadG + rr) = (loadG − ri)·v
      referenceAdmittance(reference, this.omega[k], node);
      const nr = node.re + loadG + rr.re[k];
      const ni = node.im + rr.im[k];
      const share = 1 / (nr * nr + ni * ni);
      const sr = loadG - ri.re[k];
      const si = -ri.im[k];
      const vr = (sr * nr + si * ni) * share;
      const vi = (si * nr - sr * ni) * share;
      const cr = loadG - ir.re[k];
      const ci = -ir.im[k];
      const zr = sourceR * cr - x * ci;
      const zi = sourceR * ci + x * cr;
      const dr = 1 + sourceR * yr - x * yi - (zr * vr - zi * vi);
      const di = sourceR * yi + x * yr - (zr * vi + zi * vr);
      const fr = t.re[k] + tr.re[k] * vr - tr.im[k] * vi;
      const fi = t.im[k] + tr.re[k] * vi + tr.im[k] * vr;
      // H = (t + tr·v_r/v)·v, v = 1/d
      const norm = 1 / (dr * dr + di * di);
      out.re[k] = (fr * dr + fi * di) * norm;
      out.im[k] = (fi * dr - fr * di) * norm;
    }
  }
}

function clear(columns: readonly Column[]): void {
  for (const { re, im } of columns) {
    re.fill(0);
    im.fill(0);
  }
}

/** Admittance of the reference node to ground: the bypassed divider, or the output of its follower. */
function referenceAdmittance(reference: ReferenceForm, omega: number, out: { re: number; im: number }): void {
  const { conductance, bypassC, amp } = reference;
  const yr = conductance;
  const yi = omega * bypassC;
  out.re = yr;
  out.im = yi;
  if (!amp) return;
  // 1 − κ = Ydivider/(gin + Ydivider): Y = (e + 1 − κ)/(e·ro) + gin·(1 − κ)
  const { e0, e1, ro, gin } = amp;
  const tr = yr + gin;
  const norm = 1 / (tr * tr + yi * yi);
  const sr = (yr * tr + yi * yi) * norm;
  const si = (yi * tr - yr * yi) * norm;
  const er = e0 * ro;
  const ei = omega * e1 * ro;
  const inverse = 1 / (er * er + ei * ei);
  const nr = e0 + sr;
  const ni = omega * e1 + si;
  out.re = (nr * er + ni * ei) * inverse + gin * sr;
  out.im = (ni * er - nr * ei) * inverse + gin * si;
}

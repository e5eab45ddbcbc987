import { LEG_REGISTERS, type LegPort } from "../blocks/definition.ts";
import { Dual } from "../num/dual.ts";
import type { CompiledBoard, ItemForm, ReferenceForm } from "./star.ts";
import type { TransferColumns } from "./transfer.ts";

/** Working registers of the elimination. */
const REGISTERS = 28;

function duals(count: number): Dual[] {
  return Array.from({ length: count }, () => new Dual());
}

/** What hangs below a node of the chain, seen with the reference as a second port, and how the final output follows from it. */
class Below {
  /** Current into what hangs here: ii·v + ir·v_r; current that it takes from the reference: ri·v + rr·v_r. */
  readonly ii = new Dual();
  readonly ir = new Dual();
  readonly ri = new Dual();
  readonly rr = new Dual();
  /** Final output = t·v + tr·v_r. */
  readonly t = new Dual();
  readonly tr = new Dual();

  clear(): void {
    for (const d of [this.ii, this.ir, this.ri, this.rr, this.t, this.tr]) d.real(0);
  }
}

/**
 * The star reduction with dH/ds beside H, by forward differentiation, and the shared reference of a single supply as a
 * second port of every leg and stage. Same elimination as the columns of star.ts and star-reference.ts, which it is
 * tested against, at several times their cost.
 */
export class SlopeStar {
  #board: CompiledBoard;
  readonly omega: Float64Array;
  /** Kept leg ports, one for every band and frequency. */
  readonly #legs: readonly (readonly LegPort[])[];
  readonly #below: readonly Below[];
  readonly #h = new Dual();
  /** The tracks' two parts in this run, ohms. */
  readonly #ra: Float64Array;
  readonly #rb: Float64Array;
  /** Working registers. */
  readonly #d = duals(REGISTERS);
  readonly #legWork = duals(LEG_REGISTERS);
  /** 1 where a band's kept ports are of another leg or frequency. */
  readonly #stale: Uint8Array;

  constructor(board: CompiledBoard, omega: Float64Array) {
    this.#board = board;
    this.omega = omega;
    this.#ra = new Float64Array(board.bands.length);
    this.#rb = new Float64Array(board.bands.length);
    this.#below = board.items.map(() => new Below());
    this.#legs = board.bands.map(() => Array.from(omega, () => ({ ww: new Dual(), wr: new Dual(), rw: new Dual(), rr: new Dual() })));
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

  run(positions: Float64Array, out: Required<TransferColumns>, weights: Float64Array): void {
    const { items } = this.#board;
    const h = this.#h;
    for (const [index, band] of this.#board.bands.entries()) {
      if (this.#stale[index] === 1) for (let k = 0; k < this.omega.length; k++) band.leg.port(this.omega[k], this.#legs[index][k], this.#legWork);
      this.#stale[index] = 0;
      const { boost, cut } = band.resistances(positions[band.index]);
      this.#ra[band.index] = boost;
      this.#rb[band.index] = cut;
    }
    for (let k = 0; k < this.omega.length; k++) {
      for (const below of this.#below) below.clear();
      for (let i = items.length - 1; i >= 0; i--) {
        const item = items[i];
        if (item.type === "stage") this.#stage(i, item, k, weights);
        else if (item.type === "buffer") this.#buffer(i, item, k);
        else if (item.type === "output") this.#output(item, k);
        else this.#input(i, item, k, h);
      }
      out.re[k] = h.re;
      out.im[k] = h.im;
      out.slopeRe[k] = h.dre;
      out.slopeIm[k] = h.dim;
    }
  }

  #stage(index: number, item: Extract<ItemForm, { type: "stage" }>, k: number, weights: Float64Array): void {
    const omega = this.omega[k];
    const [sm, sp, mp, mr, pr, rm, rp, rr, y, t, e, yf, alpha, beta, gamma, mx, px, a11, a12, a21, a22, det, vm, vo, vp, q, load, b1] = this.#d;
    for (const sum of [sm, sp, mp, mr, pr, rm, rp, rr]) sum.real(0);
    const hasReference = this.#board.reference !== undefined;
    for (const band of item.bands) {
      const ra = this.#ra[band.index];
      const rb = this.#rb[band.index];
      const track = ra + rb;
      const leg = this.#legs[band.index][k];
      // q = 1/(T + Ra·Rb·ww), y = q·ww
      q.shift(t.scale(leg.ww, ra * rb), track);
      q.div(t.real(1), q);
      y.mul(q, leg.ww);
      const weight = weights[band.index];
      const toBoost = weight * rb;
      const toCut = weight * ra;
      sm.add(sm, t.scale(y, toBoost));
      sp.add(sp, t.scale(y, toCut));
      mp.add(mp, t.scale(y, (toCut * rb) / track));
      mp[0] -= weight / track;
      if (!hasReference) continue;
      y.mul(q, leg.wr);
      mr.add(mr, t.scale(y, toBoost));
      pr.add(pr, t.scale(y, toCut));
      y.mul(y, leg.rw);
      rr.add(rr, t.scale(leg.rr, weight)).sub(rr, t.scale(y, toCut * rb));
      y.mul(q, leg.rw);
      rm.add(rm, t.scale(y, toBoost));
      rp.add(rp, t.scale(y, toCut));
    }
    const { amp, inputG, feedbackG, feedbackC } = item;
    const below = this.#below[index];
    const up = this.#below[item.driver];
    e.affine(amp.e0, amp.e1, omega);
    yf.affine(feedbackG, feedbackC, omega);
    load.add(yf, below.ii);
    alpha.shift(load.scale(load, amp.ro), 1).mul(alpha, e);
    beta.scale(yf, amp.ro).mul(beta, e);
    gamma.scale(below.ir, amp.ro).mul(gamma, e);
    mx.shift(mp, -amp.gin);
    px.sub(sp, mp).shift(px, inputG + amp.gin);
    a11.add(yf, sm).sub(a11, t.mul(beta, mx));
    a12.mul(alpha, mx).sub(a12, yf);
    a21.shift(sp, inputG).sub(a21, t.mul(beta, px));
    a22.mul(alpha, px);
    det.mul(a11, a22).sub(det, t.mul(a12, a21));
    const final = below.t;

    // Driven from the stage's in, reference still: right-hand side (0, inputG).
    vo.scale(a11, inputG).div(vo, det);
    vm.scale(a12, -inputG).div(vm, det);
    this.#plusInput(vp, vm, vo, alpha, beta, t);
    up.ii.shift(up.ii, inputG).sub(up.ii, t.scale(vp, inputG));
    if (final.re !== 0 || final.im !== 0) up.t.mul(final, vo);
    if (!hasReference) return;
    up.ri.addMul(rm, vm).addMul(rp, vp).addMul(below.ri, vo);

    // Driven from the reference, the stage's in still.
    b1.real(0).sub(b1, mr).sub(b1, t.mul(gamma, mx));
    q.real(0).sub(q, pr).sub(q, t.mul(gamma, px));
    // v_m = (b1·a22 − a12·b2)/Δ, v_o = (a11·b2 − a21·b1)/Δ
    vm.mul(b1, a22).sub(vm, t.mul(a12, q)).div(vm, det);
    vo.mul(a11, q).sub(vo, t.mul(a21, b1)).div(vo, det);
    this.#plusInput(vp, vm, vo, alpha, beta, t);
    vp.add(vp, gamma);
    up.ir.sub(up.ir, t.scale(vp, inputG));
    up.rr.add(up.rr, rr).addMul(rm, vm).addMul(rp, vp).addMul(below.ri, vo).add(up.rr, below.rr);
    if (final.re !== 0 || final.im !== 0) up.tr.mul(final, vo).add(up.tr, below.tr);
  }

  /** v_p = v_m + e·(α·v_o − β·v_m), with α and β already times e. */
  #plusInput(vp: Dual, vm: Dual, vo: Dual, alpha: Dual, beta: Dual, t: Dual): void {
    vp.mul(alpha, vo).sub(vp, t.mul(beta, vm)).add(vp, vm);
  }

  #buffer(index: number, item: Extract<ItemForm, { type: "buffer" }>, k: number): void {
    const { amp } = item;
    const below = this.#below[index];
    const up = this.#below[item.driver];
    const [e, d, n, t, g, gr] = this.#d;
    e.affine(amp.e0, amp.e1, this.omega[k]);
    // v_o·(1 + e·(1 + ro·(YL + gin))) = v_in·(1 + e·ro·gin) − e·ro·YLr·v_r
    d.scale(below.ii, amp.ro).shift(d, 1 + amp.ro * amp.gin).mul(d, e).shift(d, 1);
    n.scale(e, amp.ro * amp.gin).shift(n, 1);
    g.div(n, d);
    gr.scale(below.ir, -amp.ro).mul(gr, e).div(gr, d);
    up.ii.shift(up.ii, amp.gin).sub(up.ii, t.scale(g, amp.gin));
    up.ir.sub(up.ir, t.scale(gr, amp.gin));
    up.ri.addMul(below.ri, g);
    up.rr.add(up.rr, below.rr).addMul(below.ri, gr);
    if (below.t.re === 0 && below.t.im === 0) return;
    up.t.mul(below.t, g);
    up.tr.mul(below.t, gr).add(up.tr, below.tr);
  }

  #output(item: Extract<ItemForm, { type: "output" }>, k: number): void {
    const up = this.#below[item.driver];
    const [z, c, one] = this.#d;
    z.real(item.seriesR + item.loadR);
    one.real(1);
    if (item.couplingC > 0) z.add(z, c.affine(0, item.couplingC, this.omega[k]).div(one, c));
    z.div(one, z);
    up.ii.add(up.ii, z);
    up.t.scale(z, item.loadR);
  }

  #input(index: number, item: Extract<ItemForm, { type: "input" }>, k: number, h: Dual): void {
    const below = this.#below[index];
    const omega = this.omega[k];
    const [z, c, t, d, vr, back, n] = this.#d;
    z.real(item.sourceR);
    if (item.couplingC > 0) z.add(z, c.affine(0, item.couplingC, omega).div(t.real(1), c));
    // v·(1 + Z·(loadG + ii)) = 1 + Z·(loadG − ir)·v_r
    d.shift(below.ii, item.loadG).mul(d, z).shift(d, 1);
    vr.real(0);
    const { reference } = this.#board;
    if (reference) {
      // v_r·(Yref + loadG + rr) = (loadG − ri)·v
      this.#referenceAdmittance(reference, omega, n).add(n, below.rr).shift(n, item.loadG);
      vr.scale(below.ri, -1).shift(vr, item.loadG).div(vr, n);
      back.scale(below.ir, -1).shift(back, item.loadG).mul(back, z).mul(back, vr);
      d.sub(d, back);
    }
    // h = (t + tr·v_r/v)·v, v = 1/d
    h.mul(below.tr, vr).add(h, below.t).div(h, d);
  }

  /** Admittance of the reference node to ground: the bypassed divider, or the output of its follower. */
  #referenceAdmittance(reference: ReferenceForm, omega: number, out: Dual): Dual {
    const { conductance, bypassC, amp } = reference;
    out.affine(conductance, bypassC, omega);
    if (!amp) return out;
    const [, , , , , , , share, e, t] = this.#d;
    // κ = gin/(gin + Ydivider): Y = (e + 1 − κ)/(e·ro) + gin·(1 − κ)
    share.shift(out, amp.gin);
    share.div(out, share);
    e.affine(amp.e0, amp.e1, omega);
    out.add(e, share).div(out, t.scale(e, amp.ro));
    return out.add(out, t.scale(share, amp.gin));
  }
}

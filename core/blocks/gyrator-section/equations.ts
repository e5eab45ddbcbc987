import type { OpAmpModel } from "../../model/project.ts";
import type { Dual } from "../../num/dual.ts";
import type { Leg, LegPort, PartValues } from "../definition.ts";

/**
 * The gyrator leg in closed form, with a one-pole op amp and the signal reference as a second port. Derivation in
 * README.md beside this file; simulated inductor after Berndt and Dutta Roy, IEEE J. Solid-State Circuits, 1969.
 * @param blockC capacitor between wiper and the gyrator, farads; undefined is a wire
 */
export function gyratorLeg(blockC: number | undefined, values: PartValues, opAmp: OpAmpModel | "ideal"): Leg {
  const isIdeal = opAmp === "ideal";
  return new GyratorLeg(
    blockC ?? 0,
    1 / values.seriesR,
    values.gyratorC,
    1 / values.gyratorR,
    isIdeal ? 0 : 1 / opAmp.openLoopGain,
    isIdeal ? 0 : 1 / (2 * Math.PI * opAmp.gainBandwidth),
    isIdeal ? 0 : opAmp.outputR,
    isIdeal ? 0 : 1 / opAmp.inputR,
  );
}

class GyratorLeg implements Leg {
  /** Series capacitor, F; 0 means a wire. */
  readonly cs: number;
  readonly gs: number;
  readonly cg: number;
  readonly gg: number;
  /** 1/A = e0 + s·e1. */
  readonly e0: number;
  readonly e1: number;
  readonly ro: number;
  readonly gin: number;

  constructor(cs: number, gs: number, cg: number, gg: number, e0: number, e1: number, ro: number, gin: number) {
    this.cs = cs;
    this.gs = gs;
    this.cg = cg;
    this.gg = gg;
    this.e0 = e0;
    this.e1 = e1;
    this.ro = ro;
    this.gin = gin;
  }

  admittance(omega: Float64Array, re: Float64Array, im: Float64Array): void {
    const { cs, gs, cg, gg, e0, e1, ro, gin } = this;
    const p1 = 1 + ro * gs;
    const q1 = ro * gin;
    for (let i = 0; i < omega.length; i++) {
      const w = omega[i];
      const b = w * cg;
      const ei = w * e1;
      // P, Q, K = gg + jb, M = K + gin as in the README.
      const pr = e0 * p1;
      const pi = ei * p1;
      const qr = 1 + e0 * q1;
      const qi = ei * q1;
      const mr = gg + gin;
      const dr = pr * mr - pi * b + qr * gg - qi * b;
      const di = pr * b + pi * mr + qr * b + qi * gg;
      // u = (e·M + Q·gg)/Δ, d = (e·K − P·gg)/Δ
      const nur = e0 * mr - ei * b + qr * gg;
      const nui = e0 * b + ei * mr + qi * gg;
      const ndr = e0 * gg - ei * b - pr * gg;
      const ndi = e0 * b + ei * gg - pi * gg;
      // (u·gs + (u − d)·jb)·Δ
      const vr = nur - ndr;
      const vi = nui - ndi;
      const yr = nur * gs - vi * b;
      const yi = nui * gs + vr * b;
      // Ya = N/Δ alone; in series with cs it is jx·N/(N + jx·Δ), x = ω·cs: one division either way.
      const x = w * cs;
      const tr = cs === 0 ? yr : -x * yi;
      const ti = cs === 0 ? yi : x * yr;
      const sr = cs === 0 ? dr : yr - x * di;
      const si = cs === 0 ? di : yi + x * dr;
      const inverse = 1 / (sr * sr + si * si);
      re[i] = (tr * sr + ti * si) * inverse;
      im[i] = (ti * sr - tr * si) * inverse;
    }
  }

  port(omega: number, out: LegPort, [e, p, q, k, m, det, yc, u, v, t, ys]: readonly Dual[]): void {
    const { gs, cg, gg, ro, gin } = this;
    e.affine(this.e0, this.e1, omega);
    p.scale(e, 1 + ro * gs);
    q.scale(e, ro * gin).shift(q, 1);
    k.affine(gg, cg, omega);
    m.affine(gg + gin, cg, omega);
    det.mul(p, m).addMul(q, k);
    yc.affine(0, cg, omega);
    const { ww, wr, rw, rr } = out;
    // Driven at a: u = v_a − v_o, v = v_a − v_n = u − d.
    u.mul(e, m).add(u, t.scale(q, gg)).div(u, det);
    v.mul(e, k).sub(v, t.scale(p, gg)).div(v, det).sub(u, v);
    ww.scale(u, gs).addMul(v, yc);
    rw.shift(t.scale(v, -1), 1).scale(rw, -gg);
    // Driven at the reference: u = −Q·gg/Δ, d = P·gg/Δ.
    u.scale(q, -gg).div(u, det);
    v.scale(p, gg).div(v, det).sub(u, v);
    wr.scale(u, gs).addMul(v, yc);
    rr.shift(v, 1).scale(rr, gg);
    if (this.cs === 0) return;
    ys.affine(0, this.cs, omega);
    t.add(ys, ww);
    // rr − rw·wr/(ys + ww), then every transfer through ys/(ys + ww).
    u.mul(rw, wr);
    rr.sub(rr, u.div(u, t));
    t.div(ys, t);
    ww.mul(ww, t);
    wr.mul(wr, t);
    rw.mul(rw, t);
  }
}

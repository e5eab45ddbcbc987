import type { Dual } from "../num/dual.ts";
import type { Leg, LegPort } from "./definition.ts";

export interface SeriesLegValues {
  /** Series capacitor, F; undefined is a wire. */
  readonly c: number | undefined;
  readonly r: number;
  /** Inductance, H; undefined is a wire. */
  readonly l?: number | undefined;
  readonly windingR?: number | undefined;
  readonly selfC?: number | undefined;
}

/** The passive leg to ground, Z = 1/(s·c) + r + (windingR + s·l) ∥ 1/(s·selfC), as used by inductor, shelf and level sections. */
export function seriesLeg(values: SeriesLegValues): Leg {
  return new SeriesLeg(values.c ?? 0, values.r, values.l ?? 0, values.windingR ?? 0, values.selfC ?? 0);
}

class SeriesLeg implements Leg {
  readonly c: number;
  readonly r: number;
  readonly l: number;
  readonly rw: number;
  readonly cp: number;

  constructor(c: number, r: number, l: number, rw: number, cp: number) {
    this.c = c;
    this.r = r;
    this.l = l;
    this.rw = rw;
    this.cp = cp;
  }

  admittance(omega: Float64Array, re: Float64Array, im: Float64Array): void {
    const { c, r, l, rw, cp } = this;
    for (let i = 0; i < omega.length; i++) {
      const w = omega[i];
      const x = w * l;
      // (rw + jx) / (1 + jw·cp·(rw + jx))
      const dr = 1 - w * cp * x;
      const di = w * cp * rw;
      const norm = 1 / (dr * dr + di * di);
      const zr = r + (rw * dr + x * di) * norm;
      const zi = (x * dr - rw * di) * norm - (c === 0 ? 0 : 1 / (w * c));
      const inverse = 1 / (zr * zr + zi * zi);
      re[i] = zr * inverse;
      im[i] = -zi * inverse;
    }
  }

  port(omega: number, out: LegPort, [z, t, coil]: readonly Dual[]): void {
    coil.affine(this.rw, this.l, omega);
    z.mul(t.affine(0, this.cp, omega), coil).shift(z, 1).div(coil, z).shift(z, this.r);
    const one = t.real(1);
    if (this.c > 0) {
      const block = coil.affine(0, this.c, omega);
      z.add(z, block.div(one, block));
    }
    out.ww.div(one, z);
    out.wr.real(0);
    out.rw.real(0);
    out.rr.real(0);
  }
}

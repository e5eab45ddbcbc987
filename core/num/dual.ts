import { Phasor } from "./phasor.ts";

/**
 * A phasor that carries its derivative with respect to s (forward-mode differentiation; Griewank and Walther,
 * "Evaluating Derivatives", 2nd ed., chapter 3): [re, im, d re, d im].
 */
export class Dual extends Phasor {
  constructor() {
    super(4);
  }

  /** d/ds of the value. */
  get dre(): number {
    return this[2];
  }

  get dim(): number {
    return this[3];
  }

  /** A constant: its derivative is 0. */
  override real(value: number): this {
    this[0] = value;
    this[1] = this[2] = this[3] = 0;
    return this;
  }

  /** constant + slope·s at s = jω. */
  override affine(constant: number, slope: number, omega: number): this {
    this[0] = constant;
    this[1] = slope * omega;
    this[2] = slope;
    this[3] = 0;
    return this;
  }

  override add(a: this, b: this): this {
    this[0] = a[0] + b[0];
    this[1] = a[1] + b[1];
    this[2] = a[2] + b[2];
    this[3] = a[3] + b[3];
    return this;
  }

  override sub(a: this, b: this): this {
    this[0] = a[0] - b[0];
    this[1] = a[1] - b[1];
    this[2] = a[2] - b[2];
    this[3] = a[3] - b[3];
    return this;
  }

  /** a + constant. */
  override shift(a: this, constant: number): this {
    this[0] = a[0] + constant;
    this[1] = a[1];
    this[2] = a[2];
    this[3] = a[3];
    return this;
  }

  override scale(a: this, factor: number): this {
    this[0] = a[0] * factor;
    this[1] = a[1] * factor;
    this[2] = a[2] * factor;
    this[3] = a[3] * factor;
    return this;
  }

  override mul(a: this, b: this): this {
    const re = a[0] * b[0] - a[1] * b[1];
    const im = a[0] * b[1] + a[1] * b[0];
    const dre = a[2] * b[0] - a[3] * b[1] + a[0] * b[2] - a[1] * b[3];
    const dim = a[2] * b[1] + a[3] * b[0] + a[0] * b[3] + a[1] * b[2];
    this[0] = re;
    this[1] = im;
    this[2] = dre;
    this[3] = dim;
    return this;
  }

  /** this + a·b. */
  override addMul(a: this, b: this): this {
    const re = a[0] * b[0] - a[1] * b[1];
    const im = a[0] * b[1] + a[1] * b[0];
    const dre = a[2] * b[0] - a[3] * b[1] + a[0] * b[2] - a[1] * b[3];
    const dim = a[2] * b[1] + a[3] * b[0] + a[0] * b[3] + a[1] * b[2];
    this[0] += re;
    this[1] += im;
    this[2] += dre;
    this[3] += dim;
    return this;
  }

  /** a / b: (a/b)' = (a' − (a/b)·b') / b. */
  override div(a: this, b: this): this {
    const norm = 1 / (b[0] * b[0] + b[1] * b[1]);
    const re = (a[0] * b[0] + a[1] * b[1]) * norm;
    const im = (a[1] * b[0] - a[0] * b[1]) * norm;
    const nr = a[2] - (re * b[2] - im * b[3]);
    const ni = a[3] - (re * b[3] + im * b[2]);
    const dre = (nr * b[0] + ni * b[1]) * norm;
    const dim = (ni * b[0] - nr * b[1]) * norm;
    this[0] = re;
    this[1] = im;
    this[2] = dre;
    this[3] = dim;
    return this;
  }
}

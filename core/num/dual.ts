/**
 * A complex number that carries its derivative with respect to s (forward-mode differentiation; Griewank and Walther,
 * "Evaluating Derivatives", 2nd ed., chapter 3). Methods write into `this`, so that nothing is allocated in a frequency loop.
 * The four numbers lie in a typed array, [re, im, d re, d im], so that writing one does not allocate either.
 * Every method may be called with `this` among its arguments.
 */
export class Dual extends Float64Array {
  constructor() {
    super(4);
  }

  get re(): number {
    return this[0];
  }

  get im(): number {
    return this[1];
  }

  /** d/ds of the value. */
  get dre(): number {
    return this[2];
  }

  get dim(): number {
    return this[3];
  }

  /** A constant: its derivative is 0. */
  real(value: number): this {
    this[0] = value;
    this[1] = this[2] = this[3] = 0;
    return this;
  }

  /** constant + slope·s at s = jω. */
  affine(constant: number, slope: number, omega: number): this {
    this[0] = constant;
    this[1] = slope * omega;
    this[2] = slope;
    this[3] = 0;
    return this;
  }

  add(a: Dual, b: Dual): this {
    this[0] = a[0] + b[0];
    this[1] = a[1] + b[1];
    this[2] = a[2] + b[2];
    this[3] = a[3] + b[3];
    return this;
  }

  sub(a: Dual, b: Dual): this {
    this[0] = a[0] - b[0];
    this[1] = a[1] - b[1];
    this[2] = a[2] - b[2];
    this[3] = a[3] - b[3];
    return this;
  }

  /** a + constant. */
  shift(a: Dual, constant: number): this {
    this[0] = a[0] + constant;
    this[1] = a[1];
    this[2] = a[2];
    this[3] = a[3];
    return this;
  }

  scale(a: Dual, factor: number): this {
    this[0] = a[0] * factor;
    this[1] = a[1] * factor;
    this[2] = a[2] * factor;
    this[3] = a[3] * factor;
    return this;
  }

  mul(a: Dual, b: Dual): this {
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
  addMul(a: Dual, b: Dual): this {
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
  div(a: Dual, b: Dual): this {
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

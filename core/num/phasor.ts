/**
 * A complex number at one frequency, s = jω. Methods write into `this`, so that nothing is allocated in a frequency loop;
 * the numbers lie in a typed array, [re, im], so that writing one does not allocate either.
 * Every method may be called with `this` among its arguments. `Dual` is the same with derivatives: what is worked out in
 * one kind works in the other, as long as the two are not mixed.
 */
export class Phasor extends Float64Array {
  constructor(length = 2) {
    super(length);
  }

  get re(): number {
    return this[0];
  }

  get im(): number {
    return this[1];
  }

  /** A constant. */
  real(value: number): this {
    this[0] = value;
    this[1] = 0;
    return this;
  }

  /** constant + slope·s at s = jω. */
  affine(constant: number, slope: number, omega: number): this {
    this[0] = constant;
    this[1] = slope * omega;
    return this;
  }

  add(a: this, b: this): this {
    this[0] = a[0] + b[0];
    this[1] = a[1] + b[1];
    return this;
  }

  sub(a: this, b: this): this {
    this[0] = a[0] - b[0];
    this[1] = a[1] - b[1];
    return this;
  }

  /** a + constant. */
  shift(a: this, constant: number): this {
    this[0] = a[0] + constant;
    this[1] = a[1];
    return this;
  }

  scale(a: this, factor: number): this {
    this[0] = a[0] * factor;
    this[1] = a[1] * factor;
    return this;
  }

  mul(a: this, b: this): this {
    const re = a[0] * b[0] - a[1] * b[1];
    const im = a[0] * b[1] + a[1] * b[0];
    this[0] = re;
    this[1] = im;
    return this;
  }

  /** this + a·b. */
  addMul(a: this, b: this): this {
    const re = a[0] * b[0] - a[1] * b[1];
    const im = a[0] * b[1] + a[1] * b[0];
    this[0] += re;
    this[1] += im;
    return this;
  }

  div(a: this, b: this): this {
    const norm = 1 / (b[0] * b[0] + b[1] * b[1]);
    const re = (a[0] * b[0] + a[1] * b[1]) * norm;
    const im = (a[1] * b[0] - a[0] * b[1]) * norm;
    this[0] = re;
    this[1] = im;
    return this;
  }
}

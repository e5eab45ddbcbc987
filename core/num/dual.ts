/**
 * A complex number that carries its derivative with respect to s (forward-mode differentiation; Griewank and Walther,
 * "Evaluating Derivatives", 2nd ed., chapter 3). Methods write into `this`, so that nothing is allocated in a frequency loop.
 * Every method may be called with `this` among its arguments.
 */
export class Dual {
  re: number;
  im: number;
  /** d/ds of the value. */
  dre: number;
  dim: number;

  constructor(re = 0, im = 0, dre = 0, dim = 0) {
    this.re = re;
    this.im = im;
    this.dre = dre;
    this.dim = dim;
  }

  /** A constant: its derivative is 0. */
  real(value: number): this {
    this.re = value;
    this.im = this.dre = this.dim = 0;
    return this;
  }

  /** constant + slope·s at s = jω. */
  affine(constant: number, slope: number, omega: number): this {
    this.re = constant;
    this.im = slope * omega;
    this.dre = slope;
    this.dim = 0;
    return this;
  }

  copy(a: Dual): this {
    this.re = a.re;
    this.im = a.im;
    this.dre = a.dre;
    this.dim = a.dim;
    return this;
  }

  add(a: Dual, b: Dual): this {
    this.re = a.re + b.re;
    this.im = a.im + b.im;
    this.dre = a.dre + b.dre;
    this.dim = a.dim + b.dim;
    return this;
  }

  sub(a: Dual, b: Dual): this {
    this.re = a.re - b.re;
    this.im = a.im - b.im;
    this.dre = a.dre - b.dre;
    this.dim = a.dim - b.dim;
    return this;
  }

  /** a + constant. */
  shift(a: Dual, constant: number): this {
    this.re = a.re + constant;
    this.im = a.im;
    this.dre = a.dre;
    this.dim = a.dim;
    return this;
  }

  scale(a: Dual, factor: number): this {
    this.re = a.re * factor;
    this.im = a.im * factor;
    this.dre = a.dre * factor;
    this.dim = a.dim * factor;
    return this;
  }

  mul(a: Dual, b: Dual): this {
    const re = a.re * b.re - a.im * b.im;
    const im = a.re * b.im + a.im * b.re;
    const dre = a.dre * b.re - a.dim * b.im + a.re * b.dre - a.im * b.dim;
    const dim = a.dre * b.im + a.dim * b.re + a.re * b.dim + a.im * b.dre;
    this.re = re;
    this.im = im;
    this.dre = dre;
    this.dim = dim;
    return this;
  }

  /** this + a·b. */
  addMul(a: Dual, b: Dual): this {
    const re = a.re * b.re - a.im * b.im;
    const im = a.re * b.im + a.im * b.re;
    const dre = a.dre * b.re - a.dim * b.im + a.re * b.dre - a.im * b.dim;
    const dim = a.dre * b.im + a.dim * b.re + a.re * b.dim + a.im * b.dre;
    this.re += re;
    this.im += im;
    this.dre += dre;
    this.dim += dim;
    return this;
  }

  /** a / b: (a/b)' = (a' − (a/b)·b') / b. */
  div(a: Dual, b: Dual): this {
    const norm = 1 / (b.re * b.re + b.im * b.im);
    const re = (a.re * b.re + a.im * b.im) * norm;
    const im = (a.im * b.re - a.re * b.im) * norm;
    const nr = a.dre - (re * b.dre - im * b.dim);
    const ni = a.dim - (re * b.dim + im * b.dre);
    const dre = (nr * b.re + ni * b.im) * norm;
    const dim = (ni * b.re - nr * b.im) * norm;
    this.re = re;
    this.im = im;
    this.dre = dre;
    this.dim = dim;
    return this;
  }
}

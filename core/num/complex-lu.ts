/**
 * Dense complex LU with partial pivoting after row equilibration, P·D·A = L·U (Golub and Van Loan, "Matrix Computations",
 * 4th ed., 3.4 and 3.5.2). Real and imaginary parts lie in separate row-major arrays; nothing is allocated after construction.
 */
export class ComplexLu {
  readonly size: number;
  /** The matrix to factor (n×n, row-major): fill these, then call `factor`, which overwrites them with L and U. */
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly #pivot: Int32Array;
  readonly #scale: Float64Array;

  constructor(size: number) {
    this.size = size;
    this.re = new Float64Array(size * size);
    this.im = new Float64Array(size * size);
    this.#pivot = new Int32Array(size);
    this.#scale = new Float64Array(size);
  }

  /** Factors in place. Returns false where the matrix is singular to working precision (a zero pivot). */
  factor(): boolean {
    const { size: n, re, im } = this;
    const pivot = this.#pivot;
    const scale = this.#scale;
    for (let i = 0; i < n; i++) {
      let largest = 0;
      for (let j = i * n; j < i * n + n; j++) largest = Math.max(largest, Math.abs(re[j]) + Math.abs(im[j]));
      if (!(largest > 0) || !Number.isFinite(largest)) return false;
      // A power of two scales without rounding.
      const factor = 2 ** -Math.round(Math.log2(largest));
      scale[i] = factor;
      for (let j = i * n; j < i * n + n; j++) {
        re[j] *= factor;
        im[j] *= factor;
      }
    }
    for (let k = 0; k < n; k++) {
      let best = k;
      let bestSize = -1;
      for (let i = k; i < n; i++) {
        const size = Math.abs(re[i * n + k]) + Math.abs(im[i * n + k]);
        if (size > bestSize) {
          bestSize = size;
          best = i;
        }
      }
      if (!(bestSize > 0)) return false;
      pivot[k] = best;
      if (best !== k) {
        for (let j = 0; j < n; j++) {
          const a = k * n + j;
          const b = best * n + j;
          const tr = re[a]; re[a] = re[b]; re[b] = tr;
          const ti = im[a]; im[a] = im[b]; im[b] = ti;
        }
      }
      const pr = re[k * n + k];
      const pi = im[k * n + k];
      const norm = 1 / (pr * pr + pi * pi);
      for (let i = k + 1; i < n; i++) {
        const ar = re[i * n + k];
        const ai = im[i * n + k];
        if (ar === 0 && ai === 0) continue;
        const lr = (ar * pr + ai * pi) * norm;
        const li = (ai * pr - ar * pi) * norm;
        re[i * n + k] = lr;
        im[i * n + k] = li;
        const rowK = k * n;
        const rowI = i * n;
        for (let j = k + 1; j < n; j++) {
          const ur = re[rowK + j];
          const ui = im[rowK + j];
          re[rowI + j] -= lr * ur - li * ui;
          im[rowI + j] -= lr * ui + li * ur;
        }
      }
    }
    return true;
  }

  /** Solves A·x = b; b is overwritten with x. */
  solve(bRe: Float64Array, bIm: Float64Array): void {
    const { size: n, re, im } = this;
    for (let i = 0; i < n; i++) {
      bRe[i] *= this.#scale[i];
      bIm[i] *= this.#scale[i];
    }
    for (let k = 0; k < n; k++) {
      const p = this.#pivot[k];
      if (p === k) continue;
      const tr = bRe[k]; bRe[k] = bRe[p]; bRe[p] = tr;
      const ti = bIm[k]; bIm[k] = bIm[p]; bIm[p] = ti;
    }
    for (let i = 0; i < n; i++) {
      let sr = bRe[i];
      let si = bIm[i];
      for (let j = 0; j < i; j++) {
        const lr = re[i * n + j];
        const li = im[i * n + j];
        sr -= lr * bRe[j] - li * bIm[j];
        si -= lr * bIm[j] + li * bRe[j];
      }
      bRe[i] = sr;
      bIm[i] = si;
    }
    for (let i = n - 1; i >= 0; i--) {
      let sr = bRe[i];
      let si = bIm[i];
      for (let j = i + 1; j < n; j++) {
        const ur = re[i * n + j];
        const ui = im[i * n + j];
        sr -= ur * bRe[j] - ui * bIm[j];
        si -= ur * bIm[j] + ui * bRe[j];
      }
      const dr = re[i * n + i];
      const di = im[i * n + i];
      const norm = 1 / (dr * dr + di * di);
      bRe[i] = (sr * dr + si * di) * norm;
      bIm[i] = (si * dr - sr * di) * norm;
    }
  }

  /** Solves Aᵀ·x = b (transposed, not conjugated); b is overwritten with x. */
  solveTransposed(bRe: Float64Array, bIm: Float64Array): void {
    const { size: n, re, im } = this;
    // Aᵀ = (D⁻¹·Pᵀ·L·U)ᵀ: forward with Uᵀ, back with Lᵀ, then undo the exchanges and the scaling.
    for (let i = 0; i < n; i++) {
      let sr = bRe[i];
      let si = bIm[i];
      for (let j = 0; j < i; j++) {
        const ur = re[j * n + i];
        const ui = im[j * n + i];
        sr -= ur * bRe[j] - ui * bIm[j];
        si -= ur * bIm[j] + ui * bRe[j];
      }
      const dr = re[i * n + i];
      const di = im[i * n + i];
      const norm = 1 / (dr * dr + di * di);
      bRe[i] = (sr * dr + si * di) * norm;
      bIm[i] = (si * dr - sr * di) * norm;
    }
    for (let i = n - 1; i >= 0; i--) {
      let sr = bRe[i];
      let si = bIm[i];
      for (let j = i + 1; j < n; j++) {
        const lr = re[j * n + i];
        const li = im[j * n + i];
        sr -= lr * bRe[j] - li * bIm[j];
        si -= lr * bIm[j] + li * bRe[j];
      }
      bRe[i] = sr;
      bIm[i] = si;
    }
    for (let k = n - 1; k >= 0; k--) {
      const p = this.#pivot[k];
      if (p === k) continue;
      const tr = bRe[k]; bRe[k] = bRe[p]; bRe[p] = tr;
      const ti = bIm[k]; bIm[k] = bIm[p]; bIm[p] = ti;
    }
    for (let i = 0; i < n; i++) {
      bRe[i] *= this.#scale[i];
      bIm[i] *= this.#scale[i];
    }
  }
}

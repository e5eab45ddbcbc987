/**
 * Eigenvalues of a real general matrix: balancing (Parlett and Reinsch, Numer. Math. 13, 1969), reduction to Hessenberg form
 * by stabilised elimination, and the double-shift QR iteration of Francis (Martin, Peters and Wilkinson, Numer. Math. 14,
 * 1970; Golub and Van Loan, "Matrix Computations", 4th ed., 7.4–7.5). Values only; the matrix is overwritten.
 */

export interface Eigenvalues {
  readonly re: Float64Array;
  readonly im: Float64Array;
}

/** @param a n×n, row-major; overwritten. @throws RangeError where an entry is not finite, or the iteration does not settle */
export function realEigenvalues(a: Float64Array, n: number): Eigenvalues {
  if (!a.every(Number.isFinite)) throw new RangeError("the matrix has an entry that is not a finite number");
  balance(a, n);
  hessenberg(a, n);
  return francisQr(a, n);
}

/** Scales rows and columns by powers of two until their norms agree; powers of two leave no rounding behind. */
function balance(a: Float64Array, n: number): void {
  for (let isSettled = false; !isSettled; ) {
    isSettled = true;
    for (let i = 0; i < n; i++) {
      let row = 0;
      let column = 0;
      for (let j = 0; j < n; j++) {
        if (j === i) continue;
        column += Math.abs(a[j * n + i]);
        row += Math.abs(a[i * n + j]);
      }
      if (row === 0 || column === 0) continue;
      const factor = 2 ** Math.round(Math.log2(row / column) / 2);
      // The other way round, sums past any number's range would be balanced for ever.
      if (!(column * factor + row / factor < 0.95 * (column + row))) continue;
      isSettled = false;
      for (let j = 0; j < n; j++) {
        a[i * n + j] /= factor;
        a[j * n + i] *= factor;
      }
    }
  }
}

function hessenberg(a: Float64Array, n: number): void {
  for (let m = 1; m < n - 1; m++) {
    let pivot = m;
    for (let i = m + 1; i < n; i++) if (Math.abs(a[i * n + m - 1]) > Math.abs(a[pivot * n + m - 1])) pivot = i;
    const x = a[pivot * n + m - 1];
    if (pivot !== m) {
      for (let j = m - 1; j < n; j++) [a[pivot * n + j], a[m * n + j]] = [a[m * n + j], a[pivot * n + j]];
      for (let j = 0; j < n; j++) [a[j * n + pivot], a[j * n + m]] = [a[j * n + m], a[j * n + pivot]];
    }
    if (x === 0) continue;
    for (let i = m + 1; i < n; i++) {
      const y = a[i * n + m - 1] / x;
      if (y === 0) continue;
      a[i * n + m - 1] = 0;
      for (let j = m; j < n; j++) a[i * n + j] -= y * a[m * n + j];
      for (let j = 0; j < n; j++) a[j * n + m] += y * a[j * n + i];
    }
  }
}

function francisQr(a: Float64Array, n: number): Eigenvalues {
  const re = new Float64Array(n);
  const im = new Float64Array(n);
  let norm = 0;
  for (let i = 0; i < n; i++) for (let j = Math.max(i - 1, 0); j < n; j++) norm += Math.abs(a[i * n + j]);
  let last = n - 1;
  let shift = 0;
  let iterations = 0;
  while (last >= 0) {
    // A subdiagonal entry that is negligible beside its neighbours splits the matrix.
    let start = last;
    while (start > 0) {
      const size = Math.abs(a[(start - 1) * n + start - 1]) + Math.abs(a[start * n + start]) || norm;
      if (Math.abs(a[start * n + start - 1]) <= Number.EPSILON * size) {
        a[start * n + start - 1] = 0;
        break;
      }
      start--;
    }
    let x = a[last * n + last];
    if (start === last) {
      re[last] = x + shift;
      last--;
      iterations = 0;
      continue;
    }
    let y = a[(last - 1) * n + last - 1];
    let w = a[last * n + last - 1] * a[(last - 1) * n + last];
    if (start === last - 1) {
      const p = (y - x) / 2;
      const q = p * p + w;
      const z = Math.sqrt(Math.abs(q));
      x += shift;
      if (q >= 0) {
        const root = p + (p >= 0 ? z : -z);
        re[last - 1] = x + root;
        re[last] = root === 0 ? x : x - w / root;
      } else {
        re[last - 1] = re[last] = x + p;
        im[last - 1] = z;
        im[last] = -z;
      }
      last -= 2;
      iterations = 0;
      continue;
    }
    if (iterations === 100) throw new RangeError("the eigenvalue iteration does not settle");
    if (iterations > 0 && iterations % 10 === 0) {
      // An exceptional shift gets a stuck iteration going.
      shift += x;
      for (let i = 0; i <= last; i++) a[i * n + i] -= x;
      const s = Math.abs(a[last * n + last - 1]) + Math.abs(a[(last - 1) * n + last - 2]);
      x = y = 0.75 * s;
      w = -0.4375 * s * s;
    }
    iterations++;
    let m = last - 2;
    let p = 0;
    let q = 0;
    let r = 0;
    for (; m >= start; m--) {
      const z = a[m * n + m];
      const rr = x - z;
      const ss = y - z;
      p = (rr * ss - w) / a[(m + 1) * n + m] + a[m * n + m + 1];
      q = a[(m + 1) * n + m + 1] - z - rr - ss;
      r = a[(m + 2) * n + m + 1];
      const s = Math.abs(p) + Math.abs(q) + Math.abs(r);
      p /= s;
      q /= s;
      r /= s;
      if (m === start) break;
      const small = Math.abs(a[m * n + m - 1]) * (Math.abs(q) + Math.abs(r));
      const large = Math.abs(p) * (Math.abs(a[(m - 1) * n + m - 1]) + Math.abs(z) + Math.abs(a[(m + 1) * n + m + 1]));
      if (small <= Number.EPSILON * large) break;
    }
    for (let i = m + 2; i <= last; i++) {
      a[i * n + i - 2] = 0;
      if (i !== m + 2) a[i * n + i - 3] = 0;
    }
    for (let k = m; k <= last - 1; k++) {
      if (k !== m) {
        p = a[k * n + k - 1];
        q = a[(k + 1) * n + k - 1];
        r = k === last - 1 ? 0 : a[(k + 2) * n + k - 1];
        x = Math.abs(p) + Math.abs(q) + Math.abs(r);
        if (x === 0) continue;
        p /= x;
        q /= x;
        r /= x;
      }
      const length = Math.sqrt(p * p + q * q + r * r);
      const s = p >= 0 ? length : -length;
      if (k !== m) a[k * n + k - 1] = -s * x;
      else if (start !== m) a[k * n + k - 1] = -a[k * n + k - 1];
      p += s;
      x = p / s;
      y = q / s;
      const z = r / s;
      q /= p;
      r /= p;
      for (let j = k; j <= last; j++) {
        let t = a[k * n + j] + q * a[(k + 1) * n + j];
        if (k !== last - 1) {
          t += r * a[(k + 2) * n + j];
          a[(k + 2) * n + j] -= t * z;
        }
        a[(k + 1) * n + j] -= t * y;
        a[k * n + j] -= t * x;
      }
      const end = Math.min(last, k + 3);
      for (let i = start; i <= end; i++) {
        let t = x * a[i * n + k] + y * a[i * n + k + 1];
        if (k !== last - 1) {
          t += z * a[i * n + k + 2];
          a[i * n + k + 2] -= t * r;
        }
        a[i * n + k + 1] -= t * q;
        a[i * n + k] -= t;
      }
    }
  }
  return { re, im };
}

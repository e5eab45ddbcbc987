/**
 * A root of f between a and b, where f changes sign: Brent's method ("Algorithms for Minimization without Derivatives",
 * 1973, chapter 4), which keeps the bracket and converges faster than bisection on smooth functions.
 * @param fa f(a), where it is known already; likewise fb
 * @param tolerance absolute, on the root
 * @throws RangeError where f(a) and f(b) have the same sign
 */
export function findRoot(f: (x: number) => number, a: number, b: number, tolerance: number, fa = f(a), fb = f(b)): number {
  if (fa === 0) return a;
  if (fb === 0) return b;
  if (fa > 0 === fb > 0) throw new RangeError(`no sign change between ${a} and ${b}`);
  let c = a;
  let fc = fa;
  let d = b - a;
  let e = d;
  for (let step = 0; step < 200; step++) {
    if (Math.abs(fc) < Math.abs(fb)) {
      [a, b, c] = [b, c, b];
      [fa, fb, fc] = [fb, fc, fb];
    }
    const tol = 2 * Number.EPSILON * Math.abs(b) + tolerance / 2;
    const half = (c - b) / 2;
    if (Math.abs(half) <= tol || fb === 0) return b;
    if (Math.abs(e) < tol || Math.abs(fa) <= Math.abs(fb)) d = e = half;
    else {
      const s = fb / fa;
      let p: number;
      let q: number;
      if (a === c) {
        p = 2 * half * s;
        q = 1 - s;
      } else {
        const u = fa / fc;
        const r = fb / fc;
        p = s * (2 * half * u * (u - r) - (b - a) * (r - 1));
        q = (u - 1) * (r - 1) * (s - 1);
      }
      if (p > 0) q = -q;
      else p = -p;
      if (2 * p < Math.min(3 * half * q - Math.abs(tol * q), Math.abs(e * q))) {
        e = d;
        d = p / q;
      } else d = e = half;
    }
    a = b;
    fa = fb;
    b += Math.abs(d) > tol ? d : tol * Math.sign(half);
    fb = f(b);
    if (fb > 0 === fc > 0) {
      c = a;
      fc = fa;
      d = e = b - a;
    }
  }
  return b;
}

/**
 * Where f is least between a and b, by golden section (J. Kiefer, "Sequential Minimax Search for a Maximum", Proc. Amer.
 * Math. Soc. 4, 1953): the least of all where f has one valley there, else one of several.
 * @param tolerance absolute, on the place
 */
export function findLeast(f: (x: number) => number, a: number, b: number, tolerance: number): number {
  const golden = (Math.sqrt(5) - 1) / 2;
  let [left, right] = [b - golden * (b - a), a + golden * (b - a)];
  let [fLeft, fRight] = [f(left), f(right)];
  while (b - a > tolerance) {
    if (fLeft <= fRight) {
      [b, right, fRight] = [right, left, fLeft];
      left = b - golden * (b - a);
      fLeft = f(left);
    } else {
      [a, left, fLeft] = [left, right, fRight];
      right = a + golden * (b - a);
      fRight = f(right);
    }
  }
  return (a + b) / 2;
}

/** Random numbers in [0, 1) from a seed, the same on every machine. */
export type Random = () => number;

/**
 * A 32-bit generator of small state (a counter, mixed by multiplications and shifts as in SplitMix: Steele, Lea and
 * Flood, "Fast splittable pseudorandom number generators", OOPSLA 2014): plenty for dealing parts, not for secrets.
 */
export function randomFrom(seed: number): Random {
  let state = seed >>> 0;
  return () => {
    state = (state + 0x9e3779b9) >>> 0;
    let z = state;
    z = Math.imul(z ^ (z >>> 16), 0x85ebca6b);
    z = Math.imul(z ^ (z >>> 13), 0xc2b2ae35);
    return ((z ^ (z >>> 16)) >>> 0) / 2 ** 32;
  };
}

/** A random order of 0 … n − 1 (Fisher and Yates; Durstenfeld, Communications of the ACM 7, 1964). */
export function randomOrder(n: number, random: Random): number[] {
  const order = Array.from({ length: n }, (_, i) => i);
  for (let i = n - 1; i > 0; i--) {
    const j = Math.floor(random() * (i + 1));
    [order[i], order[j]] = [order[j], order[i]];
  }
  return order;
}

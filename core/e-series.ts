/** Preferred number series, IEC 60063:2015. E24 and below are tables of the standard (they do not follow the rounding rule). */
const E24 = [1, 1.1, 1.2, 1.3, 1.5, 1.6, 1.8, 2, 2.2, 2.4, 2.7, 3, 3.3, 3.6, 3.9, 4.3, 4.7, 5.1, 5.6, 6.2, 6.8, 7.5, 8.2, 9.1];

export const E_SERIES = [3, 6, 12, 24, 48, 96, 192] as const;
export type ESeries = (typeof E_SERIES)[number];

const cache = new Map<ESeries, readonly number[]>();

/** The values of a series in one decade, 1 ≤ v < 10, ascending. */
export function seriesValues(series: ESeries): readonly number[] {
  let values = cache.get(series);
  if (!values) {
    if (series <= 24) values = E24.filter((_, index) => index % (24 / series) === 0);
    // From E48 on: 10^(n/N) rounded to three digits, but for 9.19 of E192, which the standard gives as 9.20.
    else values = Array.from({ length: series }, (_, n) => Number((10 ** (n / series)).toFixed(2))).map((v) => (v === 9.19 ? 9.2 : v));
    cache.set(series, values);
  }
  return values;
}

/**
 * The next preferred value above (direction 1) or below (−1) a value, in the decade where it falls; a value that is on
 * the series steps to its neighbour. SI in and out.
 */
export function nextPreferred(value: number, series: ESeries, direction: 1 | -1): number {
  const values = seriesValues(series);
  const decade = Math.floor(Math.log10(value) + 1e-9);
  const candidates = [decade - 1, decade, decade + 1].flatMap((d) => values.map((v) => Number(`${v}e${d}`)));
  const slack = value * 1e-9;
  return direction === 1 ? candidates.find((c) => c > value + slack)! : candidates.findLast((c) => c < value - slack)!;
}

/** The nearest preferred value by ratio. */
export function nearestPreferred(value: number, series: ESeries): number {
  const [below, above] = [nextPreferred(value * (1 + 1e-6), series, -1), nextPreferred(value, series, 1)];
  return value / below < above / value ? below : above;
}

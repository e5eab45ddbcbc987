/** Reading a curve between its points. */

interface Columns {
  readonly frequency: Float64Array;
  readonly gain: Float64Array;
  readonly phase: Float64Array;
}

/** A column's value at a frequency, interpolated over log frequency; null outside its points. */
export function valueAt(frequency: Float64Array, column: Float64Array, at: number): number | null {
  const last = frequency.length - 1;
  if (last < 1 || !(at >= frequency[0] && at <= frequency[last])) return null;
  let low = 0;
  let high = last;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (frequency[middle] <= at) low = middle;
    else high = middle;
  }
  const share = Math.log(at / frequency[low]) / Math.log(frequency[high] / frequency[low]);
  return column[low] + (column[high] - column[low]) * share;
}

/** Gain (dB) and phase (degrees) at a frequency; null outside the curve. */
export function readCurve({ frequency, gain, phase }: Columns, at: number): { gain: number; phase: number } | null {
  const [level, angle] = [valueAt(frequency, gain, at), valueAt(frequency, phase, at)];
  return level === null || angle === null ? null : { gain: level, phase: angle };
}

/** Index of the entry that lies furthest from 0. */
export function extremeIndex(column: Float64Array): number {
  let best = 0;
  for (let i = 1; i < column.length; i++) if (Math.abs(column[i]) > Math.abs(column[best])) best = i;
  return best;
}

/** The dB axis of the response: its span from the data, its ticks in steps of 1, 2 and 5. */

export interface LevelSpan {
  readonly top: number;
  readonly bottom: number;
}

const LEAST = 12;
const MOST_BELOW = 60;

/**
 * A span that holds what the sliders can do and what they do now. It moves in steps of 3 dB, so that the axis stands
 * still while a slider moves inside them. A roll-off far below is cut short: it would flatten what the work is about.
 */
export function levelSpan(peaks: Iterable<number>, curves: Iterable<Float64Array>): LevelSpan {
  let top = LEAST;
  let bottom = -LEAST;
  for (const peak of peaks) {
    if (!Number.isFinite(peak)) continue;
    top = Math.max(top, peak);
    bottom = Math.min(bottom, peak);
  }
  for (const curve of curves) {
    for (const value of curve) {
      if (value > top) top = value;
      if (value < bottom) bottom = value;
    }
  }
  return { top: stepped(top), bottom: -stepped(Math.min(-bottom, Math.max(MOST_BELOW, top))) };
}

/** Multiples of a 1-2-5 step inside the span, ascending, at least `leastGap` pixels apart on an axis of `height` pixels. */
export function levelTicks(span: LevelSpan, height: number, leastGap = 24): number[] {
  const perPixel = (span.top - span.bottom) / height;
  const steps = [1, 2, 5, 10, 20, 50, 100];
  const step = steps.find((s) => s / perPixel >= leastGap) ?? 100;
  const out: number[] = [];
  for (let n = Math.ceil(span.bottom / step); n * step <= span.top; n++) out.push(n * step);
  return out;
}

/** A place where a curve goes on below the axis, and how far, dB. */
export interface Low {
  readonly frequency: number;
  readonly gain: number;
}

/** The lowest point of every stretch of a curve, between two frequencies, that lies below the axis. */
export function lowsBelow(span: LevelSpan, { frequency, gain }: { readonly frequency: Float64Array; readonly gain: Float64Array }, { from, to }: { readonly from: number; readonly to: number }): Low[] {
  const lows: Low[] = [];
  let low: Low | null = null;
  for (let i = 0; i < frequency.length; i++) {
    const isBelow = gain[i] < span.bottom && frequency[i] >= from && frequency[i] <= to;
    if (isBelow && (low === null || gain[i] < low.gain)) low = { frequency: frequency[i], gain: gain[i] };
    if (low !== null && (!isBelow || i === frequency.length - 1)) {
      lows.push(low);
      low = null;
    }
  }
  return lows;
}

/** Up to the next 3 dB, a little room included. */
function stepped(value: number): number {
  return Math.ceil((value + 0.5) / 3) * 3;
}

export function levelY(span: LevelSpan, top: number, height: number, gain: number): number {
  return top + (height * (span.top - gain)) / (span.top - span.bottom);
}

/** Phase axis: symmetrical, in steps of 45°. */
export function phaseSpan(curve: Float64Array): LevelSpan {
  let most = 90;
  for (const value of curve) most = Math.max(most, Math.abs(value));
  const end = Math.min(1080, Math.ceil(most / 45) * 45);
  return { top: end, bottom: -end };
}

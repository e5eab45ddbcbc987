/** The frequency ruling: log frequency across the sheet, its rules and its labels. */
import { clamp, px, sheetUnits, type Pixel, type SheetUnit } from "./units.ts";

/** Sheet units a decade; x = 0 is at 10 Hz, so that places in files do not depend on the range on show. */
const DECADE_UNITS = 300;
const ZERO_AT = 10;

export function sheetXOf(frequency: number): SheetUnit {
  return sheetUnits(DECADE_UNITS * Math.log10(frequency / ZERO_AT));
}

export function frequencyOfSheetX(x: SheetUnit): number {
  return ZERO_AT * 10 ** (x / DECADE_UNITS);
}

/** The part of the frequency axis on show, and where on the screen it is. Hz and pixels. */
export interface Ruling {
  readonly left: number;
  readonly right: number;
  readonly from: number;
  readonly to: number;
}

export function pixelOf(ruling: Ruling, frequency: number): Pixel {
  const { left, right, from, to } = ruling;
  return px(left + ((right - left) * Math.log(frequency / from)) / Math.log(to / from));
}

export function frequencyAt(ruling: Ruling, x: number): number {
  const { left, right, from, to } = ruling;
  return from * (to / from) ** ((x - left) / (right - left));
}

function pixelsPerDecade(ruling: Ruling): number {
  return ((ruling.right - ruling.left) * Math.LN10) / Math.log(ruling.to / ruling.from);
}

/** Two frequencies, Hz. */
export interface Span {
  readonly from: number;
  readonly to: number;
}

/** The narrowest span that can be zoomed to: a semitone and a half would show nothing but one band. */
const NARROWEST = 1.25;

/** The span after zooming by `factor` (above 1: closer) about a frequency that stays where it is, kept inside `limits`. */
export function zoomSpan(span: Span, limits: Span, factor: number, about: number): Span {
  const whole = Math.log(limits.to / limits.from);
  const width = Math.log(span.to / span.from);
  const next = clamp(width / factor, Math.log(NARROWEST), whole);
  const share = Math.log(about / span.from) / width;
  return keptInside(about * Math.exp(-share * next), next, limits);
}

/** The span moved by a factor in frequency, kept inside `limits`. */
export function moveSpan(span: Span, limits: Span, factor: number): Span {
  const width = Math.min(Math.log(span.to / span.from), Math.log(limits.to / limits.from));
  return keptInside(span.from * factor, width, limits);
}

/** `limits` widened by pixels at both ends, for a ruling that many pixels wide. */
export function paddedSpan(limits: Span, pad: number, width: number): Span {
  const ratio = (limits.to / limits.from) ** (pad / Math.max(1, width - 2 * pad));
  return { from: limits.from / ratio, to: limits.to * ratio };
}

function keptInside(from: number, width: number, limits: Span): Span {
  const most = Math.max(0, Math.log(limits.to / limits.from) - width);
  const start = clamp(Math.log(from / limits.from), 0, most);
  return { from: limits.from * Math.exp(start), to: limits.from * Math.exp(Math.min(start + width, Math.log(limits.to / limits.from))) };
}

/** Mantissas of rules and labels, each list a part of the next. Preferred frequencies: ISO 266:1997, third octaves. */
const DIGITS = [1, 2, 3, 4, 5, 6, 7, 8, 9];
const ONE_TWO_FIVE = [1, 2, 5];
const THIRDS = [1, 1.25, 1.6, 2, 2.5, 3.15, 4, 5, 6.3, 8];
/** Steps of R 40 between them, for a close look. */
const FORTIETHS = [1, 1.06, 1.12, 1.18, 1.25, 1.32, 1.4, 1.5, 1.6, 1.7, 1.8, 1.9, 2, 2.12, 2.24, 2.36, 2.5, 2.65, 2.8, 3, 3.15, 3.35, 3.55, 3.75, 4, 4.25, 4.5, 4.75, 5, 5.3, 5.6, 6, 6.3, 6.7, 7.1, 7.5, 8, 8.5, 9, 9.5];
const LABEL_SETS: readonly (readonly number[])[] = [FORTIETHS, THIRDS, ONE_TWO_FIVE, [1]];
/** ISO 266 octave centres, Hz. */
const OCTAVES = [16, 31.5, 63, 125, 250, 500, 1000, 2000, 4000, 8000, 16000, 31500];

/** All frequencies mantissa × 10^n inside a span, ascending, each the nearest double to its decimal. */
function series(mantissas: readonly number[], span: Span): number[] {
  const out: number[] = [];
  const slack = 1e-9;
  for (let decade = Math.floor(Math.log10(span.from)); decade <= Math.log10(span.to); decade++) {
    for (const mantissa of mantissas) {
      const frequency = Number(`${mantissa}e${decade}`);
      if (frequency >= span.from * (1 - slack) && frequency <= span.to * (1 + slack)) out.push(frequency);
    }
  }
  return out;
}

export interface Rule {
  readonly frequency: number;
  readonly x: number;
  readonly weight: "decade" | "digit";
}

/** The vertical rules: decades, and the nine digits between them where they are at least a few pixels apart. */
export function frequencyRules(ruling: Ruling): Rule[] {
  const isFine = pixelsPerDecade(ruling) * Math.log10(10 / 9) >= 4;
  return series(isFine ? DIGITS : [1], ruling).map((frequency) => ({
    frequency,
    x: pixelOf(ruling, frequency),
    weight: Math.abs(Math.log10(frequency) - Math.round(Math.log10(frequency))) < 1e-9 ? "decade" : "digit",
  }));
}

/** Octave centres on show: short marks on the axis. */
export function octaveMarks(ruling: Ruling): { frequency: number; x: number }[] {
  return OCTAVES.filter((f) => f >= ruling.from && f <= ruling.to).map((frequency) => ({ frequency, x: pixelOf(ruling, frequency) }));
}

export interface AxisLabel {
  readonly frequency: number;
  readonly x: number;
  readonly text: string;
}

/** `20`, `31.5`, `1 k`, `12.5 k`: the unit stands at the end of the axis. */
function axisFrequencyText(frequency: number): string {
  return frequency >= 999.5 ? `${Number((frequency / 1000).toPrecision(4))} k` : `${Number(frequency.toPrecision(4))}`;
}

/**
 * The labels of the frequency axis: the densest regular set (third octaves, 1-2-5, decades …) in which no two labels come
 * nearer than `gap` pixels. `widthOf` measures a text in pixels.
 */
export function frequencyLabels(ruling: Ruling, widthOf: (text: string) => number, gap = 10): AxisLabel[] {
  let labels: AxisLabel[] = [];
  for (const mantissas of LABEL_SETS) {
    labels = series(mantissas, ruling).map((frequency) => ({ frequency, x: pixelOf(ruling, frequency), text: axisFrequencyText(frequency) }));
    const isClear = labels.every((label, i) => i === 0 || label.x - labels[i - 1].x >= (widthOf(label.text) + widthOf(labels[i - 1].text)) / 2 + gap);
    if (isClear) return labels;
  }
  const kept: AxisLabel[] = [];
  for (const label of labels) {
    const last = kept.at(-1);
    if (!last || label.x - last.x >= (widthOf(label.text) + widthOf(last.text)) / 2 + gap) kept.push(label);
  }
  return kept;
}

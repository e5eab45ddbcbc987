import type { BandFigures } from "../../core/analysis/bands.ts";
import type { UnstableEnd } from "../../core/analysis/unstable-ends.ts";
import { BLOCKS } from "../../core/blocks/index.ts";
import { formatDb, formatFigure } from "../../core/units.ts";

export interface FigureTexts {
  readonly boost: string;
  readonly cut: string;
  /** Without their unit, which the margin gives: boost, cut, and both in one where they mirror each other. */
  readonly bareBoost: string;
  readonly bareCut: string;
  readonly mirrored: string | null;
  readonly centre: string;
  readonly quality: string;
}

/** The ends of a band's slider at which its figures mean nothing, since the board oscillates there. */
export interface VoidEnds {
  readonly boost: boolean;
  readonly cut: boolean;
}

export const NO_END_VOID: VoidEnds = { boost: false, cut: false };
export const BOTH_ENDS_VOID: VoidEnds = { boost: true, cut: true };

/** A piece of a line of figures; one that is void is struck. */
export interface Run {
  readonly text: string;
  readonly isVoid: boolean;
}

/** Boost and cut further apart than this are told apart, dB. */
const SAME = 0.15;

/** The figures under a band: what it does in circuit, where, and how wide. Centre and width are those of the boost. */
export function bandFigureTexts({ boost, cut, kind }: BandFigures): FigureTexts {
  const isMirrored = Math.abs(boost.peak + cut.peak) < SAME;
  const shape = BLOCKS[kind].shape ?? "level";
  const where = boost.frequency === null ? "—" : formatFigure(boost.frequency, "frequency");
  return {
    boost: `▲ ${formatDb(boost.peak)}`,
    cut: `▼ ${formatDb(cut.peak)}`,
    bareBoost: bare(boost.peak),
    bareCut: bare(cut.peak),
    mirrored: isMirrored ? `±${Math.abs(boost.peak).toFixed(1)}` : null,
    centre: shape === "level" ? "all alike" : where,
    quality: shape === "resonance" ? (boost.q === null ? "Q —" : `Q ${boost.q.toFixed(2)}`) : { "high-shelf": "high shelf", "low-shelf": "low shelf", level: "level" }[shape],
  };
}

function bare(gainDb: number): string {
  return formatDb(gainDb).replace(" dB", "");
}

/** Boost and cut on one line, in forms from the fullest to the shortest. An end that means nothing never hides behind the other. */
export function peakForms({ bareBoost, bareCut, mirrored }: FigureTexts, voids: VoidEnds): readonly (readonly Run[])[] {
  const boost = { text: bareBoost, isVoid: voids.boost };
  if (voids.boost !== voids.cut) return [[boost, { text: bareCut, isVoid: voids.cut }], [boost], [{ ...boost, text: bareBoost.replace("+", "") }]];
  if (mirrored !== null) return [[{ ...boost, text: mirrored }], [{ ...boost, text: mirrored.slice(1) }]];
  return [[{ ...boost, text: `${bareBoost} ${bareCut}` }], [boost], [{ ...boost, text: bareBoost.replace("+", "") }]];
}

/** The ends of each band at which its figures mean nothing; bands that have none are left out. */
export function voidEndsOf(unstable: readonly UnstableEnd[]): ReadonlyMap<string, VoidEnds> {
  const found = new Map<string, VoidEnds>();
  for (const { id, end } of unstable) found.set(id, { ...(found.get(id) ?? NO_END_VOID), [end]: true });
  return found;
}

/** `unstable at full boost`, in words; empty where no end is. */
export function voidEndsText({ boost, cut }: VoidEnds): string {
  const ends = [...(boost ? ["full boost"] : []), ...(cut ? ["full cut"] : [])];
  return ends.length === 0 ? "" : `unstable at ${ends.join(" and ")}`;
}

/** `3.15 k`, `3.15k`, `3k15` of `3.15 kHz`; none of a label that is no frequency. */
function shorterForms(label: string): readonly string[] {
  const match = /^([\d.,]+)\s*(k?)Hz(?: · (\d+))?$/i.exec(label.trim());
  if (!match) return [];
  const [, figure, prefix, count] = match;
  const forms = [`${figure} ${prefix}`.trim(), `${figure}${prefix}`, ...(prefix !== "" && /[.,]/.test(figure) ? [figure.replace(/[.,]/, "k")] : [])];
  return count === undefined ? forms : forms.map((form) => `${form}·${count}`);
}

/** A label as it fits: whole, without its unit's letters, as a code, cut short; a number that tells two of a name apart stays. */
export function fittedLabel(label: string, fits: (text: string) => boolean): string {
  const forms = [label, ...shorterForms(label)];
  const form = forms.find(fits);
  if (form !== undefined) return form;
  const last = forms.at(-1)!;
  for (let length = last.length - 1; length > 1; length--) {
    const cut = `${last.slice(0, length).trimEnd()}…`;
    if (fits(cut)) return cut;
  }
  return last.slice(0, 1);
}

/** `−23.4°` with a true minus sign, and none on zero. */
export function degreesText(degrees: number, decimals = 1): string {
  const text = Math.abs(degrees).toFixed(decimals);
  return `${degrees < 0 && Number(text) !== 0 ? "−" : ""}${text}°`;
}

/** How far a slider stands from its centre, in words: `75 % of travel`. */
export function travelText(position: number): string {
  return `${Math.round(position * 100)} % of travel`;
}

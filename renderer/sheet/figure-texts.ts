import type { BandFigures } from "../../core/analysis/bands.ts";
import { BLOCKS } from "../../core/blocks/index.ts";
import { formatDb, formatFigure } from "../../core/units.ts";

export interface FigureTexts {
  readonly boost: string;
  readonly cut: string;
  /** Without their unit, which the margin gives: boost and cut, and the boost alone where there is no room for both. */
  readonly barePeak: string;
  readonly shortPeak: string;
  readonly centre: string;
  readonly quality: string;
}

/** Boost and cut further apart than this are told apart, dB. */
const SAME = 0.15;

/** The figures under a band: what it does in circuit, where, and how wide. */
export function bandFigureTexts({ boost, cut, kind }: BandFigures): FigureTexts {
  const isMirrored = Math.abs(boost.peak + cut.peak) < SAME;
  const shape = BLOCKS[kind].shape ?? "level";
  const peak = boost.peak.toFixed(1);
  const where = boost.frequency === null ? "—" : formatFigure(boost.frequency, "frequency");
  return {
    boost: `▲ ${formatDb(boost.peak)}`,
    cut: `▼ ${formatDb(cut.peak)}`,
    barePeak: isMirrored ? `±${peak}` : `+${peak} −${Math.abs(cut.peak).toFixed(1)}`,
    shortPeak: isMirrored ? `±${peak}` : `+${peak}`,
    centre: shape === "level" ? "all alike" : where,
    quality: shape === "resonance" ? (boost.q === null ? "Q —" : `Q ${boost.q.toFixed(2)}`) : { "high-shelf": "high shelf", "low-shelf": "low shelf", level: "level" }[shape],
  };
}

/** A label as it fits: whole, without its unit's letters, as a code, cut short. */
export function fittedLabel(label: string, fits: (text: string) => boolean): string {
  const frequency = /^([\d.,]+)\s*(k?)Hz$/i.exec(label.trim());
  const forms = frequency ? [label, `${frequency[1]} ${frequency[2]}`.trim(), `${frequency[1]}${frequency[2]}`] : [label];
  const form = forms.find(fits);
  if (form !== undefined) return form;
  const last = forms.at(-1)!;
  for (let length = last.length - 1; length > 1; length--) {
    const cut = `${last.slice(0, length).trimEnd()}…`;
    if (fits(cut)) return cut;
  }
  return last.slice(0, 1);
}

/** How far a slider stands from its centre, in words: `75 % of travel`. */
export function travelText(position: number): string {
  return `${Math.round(position * 100)} % of travel`;
}

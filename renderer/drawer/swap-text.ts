import type { RankedCandidate } from "../../core/drawer/swap.ts";
import type { Candidate } from "../../core/drawer/candidates.ts";
import type { Money } from "../../core/drawer/stock.ts";
import { formatDb } from "../../core/units.ts";
import { costText, lineName, percentText, toleranceText, valueCode } from "./line-text.ts";

/** `6n2 C0G 1 %`, or `3n3 ∥ 2n7 film` for two that are joined. */
export function candidateName(candidate: Pick<Candidate, "lines" | "joined" | "tolerance">): string {
  const [first, second] = candidate.lines;
  if (second === undefined || candidate.joined === null) return lineName(first);
  const technology = first.technology === second.technology ? first.technology : [first.technology, second.technology].filter((t) => t !== "").join(" / ");
  const sign = candidate.joined === "series" ? "+" : "∥";
  return [`${valueCode(first)} ${sign} ${valueCode(second)}`, technology, candidate.tolerance === null ? "" : toleranceText(Number(candidate.tolerance.toPrecision(2)))].filter((part) => part !== "").join(" ");
}

/** `6 left`, `two in series, 6 left`, `in place, 6 left`: the stock after this build. */
export function leftText({ joined, left, isInPlace }: Pick<RankedCandidate, "joined" | "left" | "isInPlace">): string {
  return [isInPlace ? "in place" : "", joined === null ? "" : `two in ${joined}`, `${left} left`].filter((part) => part !== "").join(", ");
}

export function moneyText(money: Money | null): string {
  return money === null ? "no price" : costText(money.amount, money.currency);
}

/** A sum, to the cent where it is more than one unit of money. */
export function sumText({ amount, currency }: Money): string {
  return amount >= 1 ? costText(Number(amount.toFixed(2)), currency) : costText(amount, currency);
}

/** Sums in several currencies stay apart. */
export function moneysText(sums: readonly Money[]): string {
  return sums.length === 0 ? "no price" : sums.map(sumText).join(" + ");
}

/** What a candidate does to its band, in the figures that matter: `+0.1 dB · centre +4.1 % · Q −2.0 %`. */
export function effectText(candidate: Pick<RankedCandidate, "change">): string {
  const { peak, centre, q } = candidate.change;
  return [`peak ${formatDb(peak, 2) === "0.00 dB" ? "±0 dB" : formatDb(peak, 2)}`, centre === null ? "" : `centre ${percentText(centre)}`, q === null ? "" : `Q ${percentText(q)}`].filter((part) => part !== "").map((part) => part.replaceAll(" ", "\u00a0")).join(" · ");
}

/** `0.14 dB at most`: the largest change anywhere from 20 Hz to 20 kHz. */
export function worstText(worst: number): string {
  return worst < 0.005 ? "response unchanged" : `${worst.toFixed(worst < 1 ? 2 : 1)} dB at most`;
}

import { formatDb } from "../../core/units.ts";
import type { Account } from "../worker/protocol.ts";

/** One entry of a band's loss account. */
export interface AccountRow {
  readonly id: string;
  readonly label: string;
  /** dB; below 0 where it adds to the boost. */
  readonly loss: number;
  /** Length of the bar, as a fraction of the longest. */
  readonly length: number;
}

export interface AccountModel {
  /** What neighbours take, largest first, then the band's own loss. */
  readonly rows: readonly AccountRow[];
  /** Neighbours that take next to nothing, in one line; empty where there are none. */
  readonly rest: string;
  readonly total: string;
  /** The account in a sentence. */
  readonly summary: string;
}

/** What is shown as 0.00 dB, dB. */
const LEAST = 0.005;

/** The account of a band's loss as rows of bars and a total. */
export function accountModel(account: Account): AccountModel {
  const { isolatedBoost, peak, whole, own, shares } = account;
  const largest = Math.max(0.01, Math.abs(own), ...shares.map((share) => Math.abs(share.loss)));
  const told = shares.filter((share) => Math.abs(share.loss) >= LEAST);
  const untold = shares.length - told.length;
  const rows = [...told.toSorted((a, b) => b.loss - a.loss), { id: account.id, label: "the band itself: leg, track, stage, ends of the chain", loss: own }].map(
    ({ id, label, loss }): AccountRow => ({ id, label, loss, length: Math.abs(loss) / largest }),
  );
  const most = told.length === 0 ? "" : ` The largest share, ${lossText(rows[0].loss)}, goes to ${rows[0].label}.`;
  return {
    rows,
    rest: untold === 0 ? "" : `${untold} ${untold === 1 ? "other band takes" : "other bands take"} less than 0.01 dB${untold === 1 ? "" : " each"}.`,
    total: `${formatDb(isolatedBoost, 2)} ${whole < 0 ? "+" : "−"} ${Math.abs(whole).toFixed(2)} dB = ${formatDb(peak, 2)}`,
    summary: `On paper the band boosts by ${formatDb(isolatedBoost, 2)}; in circuit, the other sliders centred, by ${formatDb(peak, 2)}.${most}`,
  };
}

/** `1.91 dB`, with a true minus where a neighbour adds to the boost. */
export function lossText(loss: number): string {
  const text = Math.abs(loss).toFixed(2);
  return `${loss < 0 && Number(text) !== 0 ? "−" : ""}${text} dB`;
}

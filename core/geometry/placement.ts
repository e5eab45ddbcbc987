/** Side by side without overlap, each as near as can be to where it wants to be. */

/**
 * Centres for items of one `width` that want to be at `wanted` (any order), kept in the order of their wishes and inside
 * [left, right]: least sum of squared distances, found by pooling neighbours that would overlap. Where all of them do not
 * fit, the width shrinks to what there is.
 */
export function spread(wanted: readonly number[], width: number, left: number, right: number): number[] {
  const count = wanted.length;
  if (count === 0) return [];
  const pitch = Math.min(width, (right - left) / count);
  const order = wanted.map((_, index) => index).sort((a, b) => wanted[a] - wanted[b] || a - b);
  // With the pitch taken out, "no overlap" is "not descending": an isotonic regression.
  const pools: { sum: number; size: number }[] = [];
  order.forEach((index, rank) => {
    let pool = { sum: wanted[index] - rank * pitch, size: 1 };
    for (let last = pools.at(-1); last && last.sum / last.size > pool.sum / pool.size; last = pools.at(-1)) {
      pools.pop();
      pool = { sum: pool.sum + last.sum, size: pool.size + last.size };
    }
    pools.push(pool);
  });
  const out = wanted.map(() => 0);
  let rank = 0;
  const least = left + pitch / 2;
  const most = right - pitch / 2 - (count - 1) * pitch;
  for (const { sum, size } of pools) {
    const base = Math.max(least, Math.min(Math.max(least, most), sum / size));
    for (let n = 0; n < size; n++, rank++) out[order[rank]] = base + rank * pitch;
  }
  return out;
}

/** How far a band may be pushed from its frequency for the sake of a wider slot, px: its leader still tells at a glance. */
const REACH = 36;

export interface SlotSizes {
  /** All that a band can use. */
  readonly best: number;
  /** Enough for its values: wider than this it is not pushed aside. */
  readonly enough: number;
  /** Enough for its values where they stand close. */
  readonly close: number;
  /** Narrower, and the slider cannot be held. */
  readonly least: number;
}

/**
 * A width for bands that want to be at `wanted`: what most of the gaps between them give, up to `best`. Where that is
 * not enough for the values they fan out to it, or as near to it as short leaders reach. Between the ends all always fit.
 */
export function slotWidth(wanted: readonly number[], { best, enough, close, least }: SlotSizes, left: number, right: number): number {
  const room = (right - left) / Math.max(1, wanted.length);
  if (wanted.length < 2) return Math.min(best, room);
  const sorted = [...wanted].sort((a, b) => a - b);
  const gaps = sorted.slice(1).map((x, i) => x - sorted[i]).sort((a, b) => a - b);
  const usual = gaps[Math.floor(gaps.length / 2)];
  if (usual >= enough) return Math.min(best, usual, room);
  // Pushed aside only where that makes the values readable.
  for (let fanned = Math.min(enough, room); fanned >= Math.max(close, usual); fanned--) {
    if (reachOf(wanted, fanned, left, right) <= REACH) return fanned;
  }
  return Math.min(Math.max(least, usual), room);
}

/** The furthest push, px. */
function reachOf(wanted: readonly number[], width: number, left: number, right: number): number {
  return spread(wanted, width, left, right).reduce((most, x, i) => Math.max(most, Math.abs(x - wanted[i])), 0);
}

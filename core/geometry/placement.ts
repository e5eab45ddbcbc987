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

/**
 * A width for bands that want to be at `wanted`: as wide as `best` where they have the room, narrower where most of them
 * stand closer or where all of them would not fit.
 */
export function slotWidth(wanted: readonly number[], best: number, least: number, room: number): number {
  if (wanted.length < 2) return Math.min(best, room);
  const sorted = [...wanted].sort((a, b) => a - b);
  const gaps = sorted.slice(1).map((x, i) => x - sorted[i]).sort((a, b) => a - b);
  const usual = gaps[Math.floor(gaps.length / 2)];
  return Math.min(Math.max(least, Math.min(best, usual)), room / wanted.length);
}

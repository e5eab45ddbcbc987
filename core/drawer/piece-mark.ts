import type { StockPiece } from "./stock.ts";

/** The mark for the next piece of a line: the number after the largest that is in use. */
export function nextMark(pieces: readonly Pick<StockPiece, "mark">[]): string {
  const most = Math.max(0, ...pieces.map((piece) => (/^\d+$/.test(piece.mark) ? Number(piece.mark) : 0)));
  return String(most + 1);
}

import type { Board } from "../net/board.ts";
import type { ValueOpts } from "../net/values.ts";
import { unstablePoles } from "./poles.ts";

/** An end of a band's slider at which the board oscillates. */
export interface UnstableEnd {
  readonly id: string;
  readonly end: "boost" | "cut";
}

/**
 * The ends at which a board oscillates, one slider at an end and every other centred: where the band figures are taken. A
 * board may be at peace with its sliders as they stand and still have figures that mean nothing.
 * @param only bands to look at; all where left off
 */
export function unstableEnds(board: Board, opts: Omit<ValueOpts, "positions"> = {}, only?: readonly string[]): UnstableEnd[] {
  const ids = board.chain.flatMap((item) => item.bands.map((band) => band.id));
  const centred = Object.fromEntries(ids.map((id) => [id, 0.5]));
  return ids.filter((id) => only?.includes(id) ?? true).flatMap((id) =>
    (["boost", "cut"] as const)
      .filter((end) => unstablePoles(board, { ...opts, positions: { ...centred, [id]: end === "boost" ? 1 : 0 } }).length > 0)
      .map((end): UnstableEnd => ({ id, end })),
  );
}

import { BLOCKS } from "../../core/blocks/index.ts";
import type { BandFigures } from "../../core/analysis/bands.ts";
import { blockIds } from "../../core/analysis/equation-report.ts";
import type { Board } from "../../core/net/board.ts";
import type { EquationsPage } from "../editor/ui.ts";

/** Where numbers are put in while nobody says otherwise, Hz. */
const USUAL_FREQUENCY = 1000;

/** Name of the divider of a single supply among the blocks; it is none of the file's. */
export const REFERENCE = "reference";

/** The block whose equations are on the screen: the one selected last that takes part, else the first band, else the first block. */
export function shownBlock(board: Board, selection: readonly string[], page: EquationsPage): string {
  const ids = blockIds(board);
  if (page === "reference" && ids.includes(REFERENCE)) return REFERENCE;
  const chosen = selection.findLast((id) => ids.includes(id));
  return chosen ?? board.chain.flatMap((item) => item.bands)[0]?.id ?? ids[0];
}

/** The frequency that a block suggests, to four digits: the centre of a band, the corner of a shelf, else the usual one, Hz. */
export function shownFrequency(id: string, figures: ReadonlyMap<string, BandFigures> | undefined): number {
  const figure = figures?.get(id);
  const own = figure && BLOCKS[figure.kind].shape !== "level" ? figure.boost.frequency : null;
  return Number((own ?? USUAL_FREQUENCY).toPrecision(4));
}

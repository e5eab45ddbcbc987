/** Where the card with a band's figures goes: in free space near the band, over nothing that is written, held or wired. */
import type { BandPlace } from "./band-place.ts";
import type { SheetLayout } from "./layout.ts";
import { referenceDrawing } from "./reference-drawing.ts";
import { overlaps, type Box } from "./units.ts";

export interface CardSize {
  readonly width: number;
  readonly height: number;
}

/** Which of the offered sizes fits, and where. */
export interface CardPlace {
  readonly form: number;
  readonly box: Box;
}

/** Pixels between a card and what it must not touch. */
const GAP = 3;
/** Slim labels are up to this much wider than their slot on either side, in slots. */
const LABEL_OVERHANG = 0.4;
/** Pixels of distance that a card folded once more, or laid over one neighbour's leader, has to save. */
const FOLD_COST = 60;
const LEADER_COST = 12;
const ASIDE_COST = 0.1;
/** Pixels of distance that a card beside another bus has to save. */
const OTHER_RAIL_COST = 60;

/**
 * The best free place for the card of a band: near it, before all; in the fullest form that finds one. Null where the
 * band is out of sight or no form finds room.
 * @param sizes of the card's forms, the fullest first
 * @param written what else is written for this band, such as its part values
 */
export function placeCard(layout: SheetLayout, band: BandPlace, sizes: readonly CardSize[], written: readonly Box[] = []): CardPlace | null {
  const { ruling, board, width } = layout.frame;
  const within: Box = { left: Math.ceil(ruling.left) + 2, right: Math.floor(width) - 15, top: Math.ceil(board.top) + 3, bottom: Math.floor(board.bottom) - 4 };
  if (!overlaps(band.box, { ...within, right: ruling.right })) return null;
  const taken = [...takenBoxes(layout), ...written].map((box) => grown(box, GAP)).filter((box) => overlaps(box, within));
  const rail = layout.rails[band.rail];
  const leaders = layout.bands.filter((other) => other !== band).flatMap(leaderBox);
  let best: (CardPlace & { readonly cost: number }) | null = null;
  sizes.forEach(({ width: w, height: h }, form) => {
    // A card that can be anywhere can be pushed left and up until it touches something: these places are all there are to try.
    const xs = places([band.x - w / 2, within.left, within.right - w], taken.flatMap((box) => [box.right, box.left - w]), within.left, within.right - w);
    const ys = places([band.figuresTop, within.top, within.bottom - h], taken.flatMap((box) => [box.bottom, box.top - h]), within.top, within.bottom - h);
    for (const left of xs) {
      for (const top of ys) {
        const box = { left, top, right: left + w, bottom: top + h };
        const isElsewhere = box.bottom > rail.bottom || box.top < rail.top - GAP;
        const cost = form * FOLD_COST + distance(box, band.box) + ASIDE_COST * Math.abs(left + w / 2 - band.x) + (isElsewhere ? OTHER_RAIL_COST : 0);
        if (best && cost >= best.cost) continue;
        const crossing = cost + LEADER_COST * leaders.filter((leader) => overlaps(leader, box)).length;
        if ((best && crossing >= best.cost) || taken.some((other) => overlaps(other, box))) continue;
        best = { form, box, cost: crossing };
      }
    }
  });
  return best;
}

/** What a card must not lie over: bands, the chain, rails and wires. */
function takenBoxes(layout: SheetLayout): Box[] {
  const { ruling } = layout.frame;
  const grid = layout.chainGrid;
  const bands = layout.bands.map(({ box, detail, slot }): Box => {
    const over = detail === "slim" ? slot * LABEL_OVERHANG : 0;
    return { ...box, left: box.left - over, right: box.right + over };
  });
  const rails = layout.rails.flatMap(({ rail, top, y, gap }): Box[] => {
    if (rail.isLoose) return [{ left: ruling.left, right: ruling.right, top: top + 6, bottom: top + 26 }];
    if (rail.stage === null) return [];
    const isBare = rail.bands.length === 0;
    return [{ left: ruling.left, right: ruling.right, top: y - 2, bottom: y + gap + (isBare ? 34 : 2) }];
  });
  const wires = layout.wires.flatMap((path) => path.slice(2).flatMap((_, i): Box[] => {
    if (i % 2 === 1) return [];
    const [x0, y0, x1, y1] = path.slice(i, i + 4);
    return [{ left: Math.min(x0, x1) - 1, right: Math.max(x0, x1) + 1, top: Math.min(y0, y1) - 1, bottom: Math.max(y0, y1) + 1 }];
  }));
  const drawing = referenceDrawing(true);
  const reference = layout.reference ? [{ left: layout.reference.x, right: layout.frame.width, top: layout.reference.y - 6 * grid, bottom: layout.reference.y + drawing.bottom * grid }] : [];
  return [...bands, ...rails, ...wires, ...reference, ...layout.chain.map((place) => place.box)];
}

function leaderBox({ trueX, x, leaderTop, boostRailY, isLoose }: BandPlace): Box[] {
  return trueX === null || isLoose ? [] : [{ left: Math.min(trueX, x) - 1, right: Math.max(trueX, x) + 1, top: leaderTop, bottom: boostRailY }];
}

/** A box with some space about it, on whole pixels. */
function grown(box: Box, by: number): Box {
  return { left: Math.floor(box.left - by), right: Math.ceil(box.right + by), top: Math.floor(box.top - by), bottom: Math.ceil(box.bottom + by) };
}

/** Different whole pixels from least to most, the wished ones first. */
function places(wished: readonly number[], edges: readonly number[], least: number, most: number): number[] {
  return [...new Set([...wished.map(Math.round), ...edges])].filter((value) => value >= least && value <= most);
}

/** Pixels from one box to another, 0 where they touch. */
function distance(a: Box, b: Box): number {
  return Math.hypot(Math.max(0, a.left - b.right, b.left - a.right), Math.max(0, a.top - b.bottom, b.top - a.bottom));
}

import { BLOCKS } from "../blocks/index.ts";
import { RAIL_GAP } from "../blocks/boost-cut-stage/drawing.ts";
import type { Block } from "../model/project.ts";
import { chainGridOf, GRID, LEAST_VALUE_GRID, LINE, valueFontSize } from "./frame.ts";
import { clamp, type Box, type SheetPlace } from "./units.ts";

/**
 * How much is written, by how wide a band's slot is: everything with its units; peak, centre, Q and gain now without;
 * peak and gain now; the same of as many bands as have the room.
 */
export type Detail = "full" | "medium" | "short" | "slim";

/** Where everything of one band is, in pixels. */
export interface BandPlace {
  readonly id: string;
  readonly rail: number;
  /** Middle of the slider. */
  readonly x: number;
  /** Where the band's frequency is on the ruling; null for a level. */
  readonly trueX: number | null;
  /** Hz. */
  readonly frequency: number | null;
  /** Where it was put by hand; null where the ruling decides. */
  readonly hand: SheetPlace | null;
  /** The band hangs on no bus: nothing to join it to. */
  readonly isLoose: boolean;
  readonly slot: number;
  readonly detail: Detail;
  readonly hasValues: boolean;
  /** Its values stand close: in their shortest form. */
  readonly isClose: boolean;
  /** Width that its peak and gain may take; 0 where they are left out, so that those of its neighbours can be read. */
  readonly figureRoom: number;
  /** Every other label one line lower, where labels are wider than slots. */
  readonly isStaggered: boolean;
  readonly leaderTop: number;
  readonly boostRailY: number;
  readonly cutRailY: number;
  readonly trackTop: number;
  readonly trackBottom: number;
  readonly knobHalf: number;
  /** The way back from the cut end to its rail, and the wiper's lead. */
  readonly returnX: number;
  readonly leadX: number;
  readonly legX: number;
  readonly legY: number;
  /** Pixels a grid unit of the leg. */
  readonly legGrid: number;
  readonly figuresTop: number;
  readonly box: Box;
}

/** Lines of figures by detail: label, boost and cut, centre, Q, now. */
const FIGURE_LINES: Record<Detail, number> = { full: 6, medium: 5, short: 3, slim: 4 };
/** Narrowest slots that a centre such as `12.5 kHz` fits into, and a peak or a gain. */
const MEDIUM_SLOT = 45;
const FIGURE_SLOT = 27;

/** @param isBrief where centre and Q would make the board too tall to be seen at once */
export function detailOf(slot: number, scale: number, isBrief: boolean): Detail {
  if (slot >= 68 && scale >= 0.78) return "full";
  if (slot >= MEDIUM_SLOT && !isBrief) return "medium";
  return slot >= 36 ? "short" : "slim";
}

/** Every how many bands of a rail peak and gain are written: neighbours must not run into each other. */
export function figureStep(slot: number): number {
  return Math.ceil(FIGURE_SLOT / slot);
}

/** Heights of what a band is made of, from its rail down. */
export interface BandHeights {
  readonly rail: number;
  readonly drop: number;
  readonly track: number;
  readonly lead: number;
  readonly leg: LegSize;
}

/** @param closeLength characters of the longest value that stands at the right of a leg */
export function bandHeights(scale: number, slot: number, marginScale: number, closeLength: number): BandHeights {
  return {
    rail: RAIL_GAP * chainGridOf(marginScale, scale),
    drop: Math.round(14 * Math.max(0.8, scale)),
    track: Math.round(100 * scale),
    lead: Math.round(20 * Math.max(0.8, scale)),
    leg: legSizeOf(scale, slot, closeLength),
  };
}

/** Width of a written value in heights of its letters; and in pixels where they are smallest. */
const VALUE_CHARACTERS = 2.5;
const VALUE_ROOM = 26;
/** Width of a gyrator leg without values, grid units. */
const LEG_UNITS = 14.4;
/** The same for values that stand close, at the smallest size: width of a character, of what they keep to the next band, and the smallest grid at which they stand clear of each other. */
const CLOSE_CHARACTER = 6;
const CLOSE_GAP = 3;
const LEAST_CLOSE_GRID = 1.65;
/** Narrowest slot in which a band's values can be read: those of three characters. */
export const CLOSE_SLOT = Math.ceil(3 * CLOSE_CHARACTER + CLOSE_GAP + LEG_UNITS * LEAST_CLOSE_GRID);

export interface LegSize {
  /** Pixels a grid unit. */
  readonly grid: number;
  readonly hasValues: boolean;
  readonly isClose: boolean;
  /** Pixels for a value at the right of the leg. */
  readonly valueRoom: number;
}

/** How large a leg is drawn: never too small for its values where the slot has room for them, else without and as large as fits. */
function legSizeOf(scale: number, slot: number, closeLength: number): LegSize {
  const roomy = Math.min(Math.max(GRID * scale, LEAST_VALUE_GRID), (slot - VALUE_ROOM) / LEG_UNITS);
  if (roomy >= LEAST_VALUE_GRID) return { grid: roomy, hasValues: true, isClose: false, valueRoom: valueFontSize(roomy) * VALUE_CHARACTERS };
  if (slot >= CLOSE_SLOT) {
    const valueRoom = closeLength * CLOSE_CHARACTER;
    return { grid: clamp((slot - valueRoom - CLOSE_GAP) / LEG_UNITS, LEAST_CLOSE_GRID, LEAST_VALUE_GRID), hasValues: true, isClose: true, valueRoom };
  }
  return { grid: Math.min(GRID * scale, LEAST_VALUE_GRID - 0.05, slot / (LEG_UNITS + 2)), hasValues: false, isClose: false, valueRoom: 0 };
}

/** Pixels between a leg and its figures. */
const BELOW_LEG = 8;

/** From the boost rail to the end of the figures. */
export function bandHeight(heights: BandHeights, legUnits: number, detail: Detail): number {
  return heights.rail + heights.drop + heights.track + heights.lead + legUnits * heights.leg.grid + BELOW_LEG + FIGURE_LINES[detail] * LINE;
}

export interface BandAt {
  readonly block: Block;
  readonly rail: number;
  readonly railY: number;
  readonly legUnits: number;
  readonly heights: BandHeights;
  readonly x: number;
  readonly trueX: number | null;
  readonly frequency: number | null;
  readonly hand: SheetPlace | null;
  readonly isLoose: boolean;
  readonly isStaggered: boolean;
  readonly figureRoom: number;
  /** Pixels that a band moved by hand hangs lower. */
  readonly lower: number;
  readonly slot: number;
  readonly scale: number;
  readonly isBrief: boolean;
  readonly leaderTop: number;
}

export function placeBand(at: BandAt): BandPlace {
  const { block, heights, slot, scale } = at;
  const x = Math.round(at.x);
  const detail = detailOf(slot, scale, at.isBrief);
  const boostRailY = Math.round(at.railY);
  const cutRailY = Math.round(at.railY + heights.rail);
  const trackTop = cutRailY + heights.drop + Math.round(at.lower);
  const trackBottom = trackTop + heights.track;
  const knobHalf = Math.round(11 * clamp(Math.min(scale, slot / 42), 0.7, 1.5));
  const leadX = x + knobHalf + 3;
  const { grid, hasValues, isClose, valueRoom } = heights.leg;
  const { drawing } = BLOCKS[block.kind];
  // A branching leg is centred with its values; a straight one stands under its slider, as far left as its values ask for.
  const lopsided = drawing.left < -5 ? -((drawing.left + 2.7) * grid + valueRoom) / 2 : isClose ? Math.min(leadX - x, slot / 2 - 2.7 * grid - valueRoom - CLOSE_GAP) : 0;
  const legX = Math.abs(lopsided - (leadX - x)) < 4 ? leadX : x + Math.round(lopsided);
  const legY = trackBottom + heights.lead;
  const figuresTop = Math.round(legY + at.legUnits * grid + BELOW_LEG);
  return {
    id: block.id, rail: at.rail, x, trueX: at.trueX, frequency: at.frequency, hand: at.hand, isLoose: at.isLoose, slot, detail, hasValues, isClose, figureRoom: at.figureRoom,
    isStaggered: at.isStaggered, leaderTop: at.leaderTop,
    boostRailY, cutRailY, trackTop, trackBottom, knobHalf, returnX: x - knobHalf - 4, leadX, legX, legY,
    legGrid: grid, figuresTop,
    box: { left: x - slot / 2, right: x + slot / 2, top: cutRailY + 5 + Math.round(at.lower), bottom: figuresTop + FIGURE_LINES[detail] * LINE + 2 },
  };
}

/** Middle of the knob: boost up. */
export function knobY(place: Pick<BandPlace, "trackTop" | "trackBottom">, position: number): number {
  return place.trackBottom - position * (place.trackBottom - place.trackTop);
}

/** The slider position that puts the middle of the knob at a height, 0 to 1. */
export function positionAt(place: Pick<BandPlace, "trackTop" | "trackBottom">, y: number): number {
  return clamp((place.trackBottom - y) / (place.trackBottom - place.trackTop), 0, 1);
}

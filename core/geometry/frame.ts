/** The fixed frame of the sheet: the margins, the response above, the board below, and the scale of the drawings in it. */
import { clamp, type Box } from "./units.ts";
import { moveSpan, paddedSpan, type Ruling, type Span } from "./ruling.ts";

/** Pixels a grid unit at scale 1. */
export const GRID = 4;
/** Height of the frequency labels between response and board. */
const AXIS = 24;
const TOP = 14;
/** Lowest response that still shows a shape; where there is none to show, as little as its axis takes. */
const LEAST_RESPONSE = { shown: 60, none: 4 };
/** Room that a band at an end of the range keeps to the margin. */
const END_PAD = 30;
/** Height of a line of figures, whatever the scale: text does not shrink. */
export const LINE = 15;
/** Scales of the board: smaller and its symbols run together, larger and one band fills the sheet. */
const LEAST_SCALE = 0.5;
const MOST_SCALE = 1.7;
/** A band with all its values takes this much at scale 1. */
export const FULL_SLOT = 88;

export interface Frame {
  readonly width: number;
  readonly height: number;
  /** Scale of what stands in the margins. */
  readonly marginScale: number;
  /** What can be scrolled and zoomed to, Hz. */
  readonly limits: Span;
  readonly ruling: Ruling;
  readonly response: Box;
  readonly board: Box;
  /** 1 where the whole range is on show. */
  readonly zoom: number;
  /** Scale of the board at the present zoom, before a crowded bus asks for less. */
  readonly scale: number;
}

/** How far the frequency axis is zoomed in, 1 for all of it. */
function zoomOf(limits: Span, span: Span): number {
  return Math.log(limits.to / limits.from) / Math.log(span.to / span.from);
}

/** Left and right ends of the ruling and the scale of the drawings in the margins, for a sheet of some width. */
function margins(width: number): { left: number; right: number; scale: number } {
  const scale = clamp(width / 1060, 0.75, 1);
  return { left: Math.round(210 * scale), right: Math.round(width - 98 * scale), scale };
}

/** The range widened so that a band at either end stands clear of the margins. */
function sheetLimits(range: Span, width: number): Span {
  const { left, right } = margins(width);
  return paddedSpan(range, END_PAD, Math.max(100, right - left));
}

export interface FrameOpts {
  readonly width: number;
  readonly height: number;
  /** Pixels at the top that something else lies over: the response gives them up, and the board stays where it is as long as there is enough of that. */
  readonly topInset?: number;
  /** False where the board's wiring gives no response. */
  readonly hasResponse?: boolean;
  readonly range: Span;
  /** What is on show; null for all. */
  readonly span: Span | null;
  /** Height that the rails need at a scale. */
  readonly heightAt: (scale: number) => number;
}

/**
 * Zoom works on the frequency axis and on the board together: the ruling widens, and the board grows with it as long as
 * its bands have the room. The response keeps its height and never scrolls; the board below it does.
 */
export function frameOf({ width, height, topInset = 0, hasResponse = true, range, span, heightAt }: FrameOpts): Frame {
  const { left, right, scale: marginScale } = margins(width);
  const limits = sheetLimits(range, width);
  // A span kept from another range is brought inside this one.
  const shown = span ? moveSpan(span, limits, 1) : limits;
  const room = Math.max(260, height - TOP - AXIS);
  const responseHeight = Math.round(clamp(room - heightAt(1), Math.max(120, room * 0.21), room * 0.46));
  const boardHeight = room - responseHeight;
  let fitting = LEAST_SCALE;
  while (fitting < 1.25 && heightAt(fitting + 0.02) <= boardHeight) fitting += 0.02;
  const zoom = zoomOf(limits, shown);
  const responseTop = TOP + topInset;
  const responseBottom = Math.max(TOP + responseHeight, responseTop + (hasResponse ? LEAST_RESPONSE.shown : LEAST_RESPONSE.none));
  return {
    width, height, marginScale, limits, zoom,
    ruling: { left, right, from: shown.from, to: shown.to },
    response: { left, right, top: responseTop, bottom: responseBottom },
    board: { left: 0, right: width, top: responseBottom + AXIS, bottom: height },
    scale: clamp(fitting * zoom, LEAST_SCALE, MOST_SCALE),
  };
}

/** Smallest grid at which values, whose letters do not shrink with it, stand clear of the symbols. */
export const LEAST_VALUE_GRID = 2.8;

/** Pixels a grid unit of the drawings in the margins: they shrink less than the board, for there are few of them. */
export function chainGridOf(marginScale: number, scale: number): number {
  return Math.max(LEAST_VALUE_GRID, GRID * marginScale * clamp(scale, 0.7, 1));
}

/** Text size for drawings at a scale: it follows the grid, but never below what can be read. */
export function valueFontSize(grid: number): number {
  return Math.round(clamp(grid * 2.7, 10, 16) * 2) / 2;
}

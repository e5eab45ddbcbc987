/** The whole sheet in pixels: rails, bands under their frequencies, the chain in the margins. Pure: nothing is measured here. */
import type { BandFigures } from "../analysis/bands.ts";
import { BLOCKS } from "../blocks/index.ts";
import type { Block, Project, SheetPoint } from "../model/project.ts";
import { bandFrequency } from "./band-frequency.ts";
import { bandHeight, bandHeights, CLOSE_SLOT, detailOf, figureStep, placeBand, type BandPlace } from "./band-place.ts";
import { FEED_DROP, placeChain, type ChainPlace, type WirePath } from "./chain.ts";
import { chainGridOf, frameOf, FULL_SLOT, type Frame } from "./frame.ts";
import { slotWidth, spread } from "./placement.ts";
import { lastRail, railsOf, type Rail, type RailPlace, type Rails } from "./rails.ts";
import { frequencyAt, frequencyOfSheetX, pixelOf, sheetXOf, type Span } from "./ruling.ts";
import { clamp, sheetUnits, type SheetPlace } from "./units.ts";
import { closeLength } from "./values.ts";

/** Sheet units from one rail to the next in files, whatever the screen makes of it. */
const RAIL_UNITS = 480;
/** Slot in which a band's values and figures have all the room that they need. */
const VALUE_SLOT = 69;
/** Narrowest slot that still shows a slider. */
const LEAST_SLOT = 28;
const BETWEEN_RAILS = 8;
/** A board that is higher than its place by less than this is as good as seen whole, px. */
const SEEN_AT_ONCE = 20;
/** Grid units above a rail (the stage's op amp) and below it (what feeds a stage, what ends the chain). */
const ABOVE = 23.5;

export interface SheetLayout {
  readonly frame: Frame;
  readonly scale: number;
  /** Pixels a grid unit of the drawings in the margins. */
  readonly chainGrid: number;
  readonly rails: readonly RailPlace[];
  readonly bands: readonly BandPlace[];
  readonly chain: readonly ChainPlace[];
  readonly wires: readonly WirePath[];
  /** Where the divider of a single supply is drawn: its place in the margin. */
  readonly reference: { readonly x: number; readonly y: number } | null;
  readonly scroll: number;
  readonly mostScroll: number;
}

export interface LayoutOpts {
  readonly project: Project;
  readonly figures: ReadonlyMap<string, BandFigures> | null;
  readonly width: number;
  readonly height: number;
  /** Pixels at the top that something else lies over. */
  readonly topInset?: number;
  /** False where the board's wiring gives no response. */
  readonly hasResponse?: boolean;
  readonly range: Span;
  /** Frequencies on show; null for all of them. */
  readonly span: Span | null;
  readonly scroll: number;
  /** Places of blocks that are being moved, before the project knows. */
  readonly moving?: ReadonlyMap<string, SheetPoint>;
}

/**
 * Where a block was put by hand; null where the ruling decides.
 *
 * The rule: a block stays where a hand put it, and only then. A hand's place carries `byHand`. A place without it, such
 * as other programs write to have something in the file, says nothing: the block is arranged like one that has no `at`.
 * x is on the frequency ruling (300 units a decade from 10 Hz), y counts from the first rail (480 units a rail).
 * Bands move along the ruling and down from their rail, a stage takes its rail up or down; the rest of the chain is fixed.
 */
function handPlace(block: Block, moving?: ReadonlyMap<string, SheetPoint>): SheetPlace | null {
  const at = moving?.get(block.id) ?? block.at;
  return at?.byHand === true ? { x: sheetUnits(at.x), y: sheetUnits(at.y) } : null;
}

/** Places of everything on the sheet. */
export function layoutSheet(opts: LayoutOpts): SheetLayout {
  const { project, moving } = opts;
  const rails = railsOf(project);
  const isSingle = project.supply.kind === "single";
  const hasReferenceAmp = project.supply.kind === "single" && project.supply.reference.opAmp !== undefined;
  const legUnits = rails.rails.map((rail) => Math.max(0, ...rail.bands.map((band) => BLOCKS[band.kind].drawing.bottom)));
  const wanted = (frame: Frame): (readonly (number | null)[])[] =>
    rails.rails.map((rail) => rail.bands.map((band) => {
      const frequency = bandFrequency(band, opts.figures?.get(band.id));
      return frequency === null ? null : pixelOf(frame.ruling, frequency);
    }));
  const fitted = frameOf({ ...opts, span: null, heightAt: () => 0 });
  const wantedFitted = wanted(fitted);
  // Slots are the same at every scale up to 1.
  const smallSlots = slotsOf(rails, wantedFitted, fitted, 1);
  const lengths = rails.rails.map((rail) => Math.max(0, ...rail.bands.map(closeLength)));
  const heightsAt = (scale: number, slots: readonly number[], isBrief: boolean): number[] =>
    rails.rails.map((rail, i) => railHeight(rail, rails, i, { scale, slot: slots[i], legUnits: legUnits[i], closeLength: lengths[i], margin: fitted.marginScale, isSingle, isBrief }));
  const contentOf = (heights: readonly number[]): number => heights.reduce((a, b) => a + b, 0) + BETWEEN_RAILS;
  const heightAt = (isBrief: boolean) => (scale: number): number => contentOf(heightsAt(scale, scale <= 1 ? smallSlots : slotsOf(rails, wantedFitted, fitted, scale), isBrief));
  const ample = frameOf({ ...opts, span: null, heightAt: heightAt(false) });
  const overflow = (of: Frame, brief: boolean): number => heightAt(brief)(of.scale) - (of.board.bottom - of.board.top);
  // Rails that can be seen at once without centre and Q, but not with them, leave these to the selected band's card.
  const isBrief = rails.rails.length > 1 && overflow(ample, false) > 0 && overflow(frameOf({ ...opts, span: null, heightAt: heightAt(true) }), true) < SEEN_AT_ONCE;
  const frame = frameOf({ ...opts, heightAt: heightAt(isBrief) });
  const xs = wanted(frame);
  let slots = slotsOf(rails, xs, frame, frame.scale);
  // Larger than life only where every bus has the room for it.
  const roomiest = Math.min(...slots.map((slot, i) => (rails.rails[i].bands.length === 0 ? Infinity : Math.max(1, slot / FULL_SLOT))));
  const scale = Math.min(frame.scale, roomiest);
  slots = slotsOf(rails, xs, frame, scale);
  const chainGrid = chainGridOf(frame.marginScale, scale);

  const heights = heightsAt(scale, slots, isBrief);
  const mostScroll = Math.max(0, Math.ceil(contentOf(heights) - (frame.board.bottom - frame.board.top)));
  const scroll = clamp(opts.scroll, 0, mostScroll);
  let top = frame.board.top - scroll;
  const places: RailPlace[] = [];
  const bands: BandPlace[] = [];
  rails.rails.forEach((rail, index) => {
    const above = aboveOf(rail, chainGrid);
    const hand = rail.stage && handPlace(rail.stage, moving);
    const shift = hand ? (hand.y - RAIL_UNITS * index) * scale : 0;
    const y = Math.round(top + above + shift);
    const bandSizes = bandHeights(scale, slots[index], frame.marginScale, lengths[index]);
    const placed = placeRail(rail, index, { frame, scale, isBrief, slot: slots[index], wanted: xs[index], heights: bandSizes, legUnits: legUnits[index], railY: y, leaderTop: y - above + 6, figures: opts.figures, ...(moving ? { moving } : {}) });
    bands.push(...placed);
    places.push({ rail, index, top: top + shift, y, gap: bandSizes.rail, bottom: top + heights[index] + shift, slot: slots[index] });
    top += heights[index];
  });
  const { chain, wires, reference } = placeChain(project, rails, places, frame, chainGrid, hasReferenceAmp);
  return { frame, scale, chainGrid, rails: places, bands, chain, wires, reference, scroll, mostScroll };
}

function aboveOf(rail: Rail, chainGrid: number): number {
  return rail.isLoose ? 34 : ABOVE * chainGrid;
}

interface RailSize {
  readonly scale: number;
  readonly slot: number;
  readonly legUnits: number;
  readonly closeLength: number;
  readonly margin: number;
  readonly isSingle: boolean;
  readonly isBrief: boolean;
}

function railHeight(rail: Rail, rails: Rails, index: number, size: RailSize): number {
  const grid = chainGridOf(size.margin, size.scale);
  const band = rail.bands.length === 0 ? 0 : bandHeight(bandHeights(size.scale, size.slot, size.margin, size.closeLength), size.legUnits, detailOf(size.slot, size.scale, size.isBrief));
  const hasInput = rail.feed.from !== null && rail.feed.from === rails.input?.id;
  const feed = rail.isLoose ? 0 : (4 + FEED_DROP + 14 * rail.feed.buffers.length + (hasInput || rail.stage === null ? 27 : 0)) * grid;
  const isLast = index === lastRail(rails);
  const ending = isLast ? (16 + (size.isSingle ? 28 : 0)) * grid : 0;
  return aboveOf(rail, grid) + Math.max(band, feed, ending, 40) + BETWEEN_RAILS;
}

function slotsOf(rails: Rails, wanted: (readonly (number | null)[])[], frame: Frame, scale: number): number[] {
  const ends = extent(frame);
  return rails.rails.map((rail, i) => {
    const xs = wanted[i].filter((_, n) => rail.bands[n].at?.byHand !== true).map((x) => x ?? ends.right);
    return slotWidth(xs, { best: FULL_SLOT * Math.max(1, scale), enough: VALUE_SLOT, close: CLOSE_SLOT, least: LEAST_SLOT }, ends.left, ends.right);
  });
}

/** Pixels that slots keep to the ends of the ruling: names are wider than narrow slots, and values stand at their right. */
const END_ROOM = 14;

/** Where bands may stand: the whole range, also what is scrolled out of sight. */
function extent(frame: Frame): { left: number; right: number } {
  return { left: pixelOf(frame.ruling, frame.limits.from) + END_ROOM, right: pixelOf(frame.ruling, frame.limits.to) - END_ROOM };
}

interface RailOpts {
  readonly frame: Frame;
  readonly scale: number;
  readonly isBrief: boolean;
  readonly slot: number;
  readonly wanted: readonly (number | null)[];
  readonly heights: ReturnType<typeof bandHeights>;
  readonly legUnits: number;
  readonly railY: number;
  readonly leaderTop: number;
  readonly figures: ReadonlyMap<string, BandFigures> | null;
  readonly moving?: ReadonlyMap<string, SheetPoint>;
}

function placeRail(rail: Rail, index: number, opts: RailOpts): BandPlace[] {
  const { frame, scale, wanted, moving, slot } = opts;
  const ends = extent(frame);
  const hands = rail.bands.map((band) => handPlace(band, moving));
  const free = rail.bands.map((_, n) => n).filter((n) => hands[n] === null);
  const xs = spread(free.map((n) => wanted[n] ?? ends.right), slot, ends.left, ends.right);
  const step = figureStep(slot);
  const order = [...free].sort((a, b) => xs[free.indexOf(a)] - xs[free.indexOf(b)]);
  return rail.bands.map((block, n): BandPlace => {
    const hand = hands[n];
    const x = hand ? pixelOf(frame.ruling, frequencyOfSheetX(hand.x)) : xs[free.indexOf(n)];
    return placeBand({
      block, rail: index, railY: opts.railY, legUnits: opts.legUnits, heights: opts.heights, x, trueX: wanted[n], hand,
      frequency: bandFrequency(block, opts.figures?.get(block.id)), isLoose: rail.isLoose,
      isStaggered: slot < 36 && order.indexOf(n) % 2 === 1,
      figureRoom: hand ? slot : order.indexOf(n) % step === 0 ? slot * step : 0,
      lower: hand ? Math.max(0, hand.y - RAIL_UNITS * index) * scale : 0, slot, scale, isBrief: opts.isBrief, leaderTop: opts.leaderTop,
    });
  });
}

const tidy = (value: number): number => Math.round(value * 10) / 10;

/** The place, as files keep it, of a block moved by pixels from where it is; null for a block that has its fixed place. */
export function movedPlace(layout: SheetLayout, id: string, dx: number, dy: number): SheetPoint | null {
  const band = layout.bands.find((b) => b.id === id);
  const { ruling } = layout.frame;
  if (band) {
    const rail = RAIL_UNITS * band.rail;
    // From the exact place, so that a move along one axis leaves the other as it was.
    const { x, y } = band.hand ?? { x: sheetXOf(frequencyAt(ruling, band.x)), y: rail };
    const moved = sheetXOf(frequencyAt(ruling, pixelOf(ruling, frequencyOfSheetX(x)) + dx));
    return { x: tidy(moved), y: tidy(Math.max(rail, y + dy / layout.scale)), byHand: true };
  }
  const rail = layout.rails.find((r) => r.rail.stage?.id === id);
  if (!rail) return null;
  const stage = rail.rail.stage!;
  const present = stage.at?.byHand === true ? stage.at.y : RAIL_UNITS * rail.index;
  return { x: STAGE_X, y: tidy(present + dy / layout.scale), byHand: true };
}

/** Left of the ruling, in sheet units. */
const STAGE_X = -184;

/** Places that put back what was moved by hand; empty where nothing was. */
export function arrangedPlaces(project: Project, figures: ReadonlyMap<string, BandFigures> | null, range: Span): { id: string; at: SheetPoint }[] {
  return railsOf(project).rails.flatMap((rail, index) =>
    [...(rail.stage ? [rail.stage] : []), ...rail.bands]
      .filter((block) => block.at?.byHand === true)
      .map((block) => {
        const x = block === rail.stage ? STAGE_X : sheetXOf(bandFrequency(block, figures?.get(block.id)) ?? range.to);
        return { id: block.id, at: { x: tidy(x), y: RAIL_UNITS * index } };
      }),
  );
}

/** The chain in the margins: stages at the left of their rails, what feeds them below, the output at the right. */
import type { Drawing } from "../blocks/drawing.ts";
import { BLOCKS } from "../blocks/index.ts";
import { bufferDrawing, risingBufferDrawing } from "../blocks/buffer/drawing.ts";
import type { Block, Project } from "../model/project.ts";
import type { Frame } from "./frame.ts";
import { lastRail, type RailPlace, type Rails } from "./rails.ts";
import type { Box } from "./units.ts";

export interface ChainPlace {
  readonly id: string;
  readonly block: Block;
  readonly drawing: Drawing;
  readonly x: number;
  readonly y: number;
  readonly grid: number;
  readonly box: Box;
}

/** x, y, x, y … in pixels. */
export type WirePath = readonly number[];

interface Pin {
  readonly x: number;
  readonly y: number;
  /** The side from which a wire comes in. */
  readonly side: "left" | "below";
}

/** The in of a stage and its out, in grid units from where its rails begin. */
const STAGE_IN = { x: -46, y: 2 };
const STAGE_OUT = { x: -0.5, y: -14 };
const BUFFER_LENGTH = 14;
/** Grid units that buffers in front of a stage hang below its in. */
export const FEED_DROP = 5;

/** Places and wires of everything that is not a band. */
export function placeChain(
  project: Project, rails: Rails, places: readonly RailPlace[], frame: Frame, grid: number, hasReferenceAmp: boolean,
): { chain: ChainPlace[]; wires: WirePath[]; reference: { x: number; y: number } | null } {
  const chain: ChainPlace[] = [];
  const outs = new Map<string, { x: number; y: number }>();
  const ins = new Map<string, Pin>();
  const tops = new Map<string, number>();
  const { left, right } = frame.ruling;
  const put = (block: Block, drawing: Drawing, x: number, y: number): void => {
    const box = { left: Math.max(3, x + drawing.left * grid - 4), right: x + drawing.right * grid + 4, top: y + drawing.top * grid - 2, bottom: y + drawing.bottom * grid + 2 };
    chain.push({ id: block.id, block, drawing, x, y, grid, box });
  };
  for (const place of places) {
    const { stage, feed, isLoose } = place.rail;
    if (isLoose) continue;
    const inPin = { x: left + STAGE_IN.x * grid, y: place.y + STAGE_IN.y * grid };
    if (stage) {
      put(stage, BLOCKS[stage.kind].drawing, left, place.y);
      ins.set(stage.id, { ...inPin, side: "left" });
      outs.set(stage.id, { x: left + STAGE_OUT.x * grid, y: place.y + STAGE_OUT.y * grid });
      tops.set(stage.id, place.top - 7);
    }
    let y = inPin.y + (feed.buffers.length > 0 ? FEED_DROP * grid : 0);
    for (const buffer of feed.buffers.toReversed()) {
      put(buffer, risingBufferDrawing, inPin.x, y);
      outs.set(buffer.id, { x: inPin.x, y });
      y += BUFFER_LENGTH * grid;
      ins.set(buffer.id, { x: inPin.x, y, side: "below" });
      tops.set(buffer.id, place.top - 7);
    }
    const isFed = rails.input !== null && feed.from === rails.input.id;
    const isFirstPlace = rails.input !== null && !outs.has(rails.input.id);
    if (rails.input && isFirstPlace && (isFed || place.index === inputRail(rails))) {
      put(rails.input, BLOCKS.input.drawing, inPin.x, y);
      outs.set(rails.input.id, { x: inPin.x, y });
    }
  }
  const last = places[lastRail(rails)];
  const outY = last.y + STAGE_OUT.y * grid;
  rails.outputFeed.buffers.forEach((buffer, n) => {
    const x = right - (rails.outputFeed.buffers.length - n) * BUFFER_LENGTH * grid;
    put(buffer, bufferDrawing, x, outY);
    ins.set(buffer.id, { x, y: outY, side: "left" });
    outs.set(buffer.id, { x: x + BUFFER_LENGTH * grid, y: outY });
  });
  if (rails.output) {
    put(rails.output, BLOCKS.output.drawing, right, outY);
    ins.set(rails.output.id, { x: right, y: outY, side: "left" });
  }
  const wires: WirePath[] = [];
  for (const { from, to } of project.wires) {
    if (!from.endsWith(".out") || !to.endsWith(".in")) continue;
    const start = outs.get(from.slice(0, -".out".length));
    const target = to.slice(0, -".in".length);
    const end = ins.get(target);
    if (start && end) wires.push(route(start, end, tops.get(target) ?? end.y, grid));
  }
  const reference = project.supply.kind === "single" ? { x: Math.round(right - (hasReferenceAmp ? 1 : 0) * grid), y: Math.round(outY + 36 * grid) } : null;
  return { chain, wires, reference };
}

/** The rail whose feed holds an input that drives nothing placed here. */
function inputRail(rails: Rails): number {
  const fed = rails.rails.findIndex((rail) => rail.feed.from !== null && rail.feed.from === rails.input?.id);
  return fed >= 0 ? fed : 0;
}

/** Straight where it can be, else along the free lane above the target's rail and down the left edge. */
function route(from: { x: number; y: number }, to: Pin, laneY: number, grid: number): WirePath {
  if (Math.abs(from.x - to.x) < 1 && Math.abs(from.y - to.y) < 1) return [];
  if (Math.abs(from.x - to.x) < 1 && from.y > to.y) return [from.x, from.y, to.x, to.y];
  if (to.side === "left" && to.x > from.x) {
    if (Math.abs(from.y - to.y) < 1) return [from.x, from.y, to.x, to.y];
    const turn = from.x < to.x - 4 * grid && to.x - from.x > 20 * grid ? from.x + 2 * grid : (from.x + to.x) / 2;
    return [from.x, from.y, turn, from.y, turn, to.y, to.x, to.y];
  }
  if (to.side === "below" && Math.abs(from.x - to.x) < 1) return [from.x, from.y, to.x, to.y];
  const edge = to.x - 2 * grid;
  const path = [from.x, from.y, from.x, laneY, edge, laneY];
  return to.side === "left" ? [...path, edge, to.y, to.x, to.y] : [...path, edge, to.y + 1.5 * grid, to.x, to.y + 1.5 * grid, to.x, to.y];
}

/** What is under the pointer. */
import type { Block } from "../model/project.ts";
import { knobY, type BandPlace } from "./band-place.ts";
import type { SheetLayout } from "./layout.ts";
import { isInside, overlaps, type Box, type ScreenPoint } from "./units.ts";
import { bandValues, chainValues, showsValues, type ValueTarget } from "./values.ts";

export type Hit =
  | { readonly part: "knob"; readonly id: string }
  | { readonly part: "value"; readonly id: string; readonly value: ValueTarget }
  | { readonly part: "block"; readonly id: string };

/** Least size of what a finger must hit, px (WCAG 2.2, target size). */
const LEAST_TARGET = 24;

/** Where a knob can be taken: the knob itself, and never less than a finger needs where there is room for it. */
function knobBox(place: BandPlace, position: number): Box {
  const y = knobY(place, position);
  const half = Math.max(place.knobHalf + 2, Math.min(LEAST_TARGET, place.slot) / 2);
  return { left: place.x - half, right: place.x + half, top: y - LEAST_TARGET / 2, bottom: y + LEAST_TARGET / 2 };
}

/**
 * The topmost thing at a point: knobs before values before blocks. Of knobs that share the point, the nearest one.
 * Nothing on the board can be hit through the response above it. `chosen`: the only band selected;
 * `card`: where the card with its figures lies, which is a part of it.
 */
export function hitTest(layout: SheetLayout, blocks: ReadonlyMap<string, Block>, at: ScreenPoint, chosen: string | null = null, card: Box | null = null): Hit | null {
  const { x, y } = at;
  if (y < layout.frame.board.top || y > layout.frame.board.bottom) return null;
  const { left, right } = layout.frame.ruling;
  const isOnRuling = x >= left && x <= right;
  let nearest: { id: string; distance: number } | null = null;
  for (const place of isOnRuling ? layout.bands : []) {
    const position = blocks.get(place.id)?.slider?.position ?? 0.5;
    if (!isInside(knobBox(place, position), x, y)) continue;
    const distance = Math.abs(x - place.x) + Math.abs(y - knobY(place, position));
    if (!nearest || distance < nearest.distance) nearest = { id: place.id, distance };
  }
  if (nearest) return { part: "knob", id: nearest.id };
  const values = [
    ...(isOnRuling ? layout.bands.filter((place) => showsValues(place, place.id === chosen)).flatMap((place) => bandValues(place, blocks.get(place.id)!)) : []),
    ...layout.chain.flatMap(chainValues),
  ];
  const value = values.find((v) => isInside(v.box, x, y));
  if (value) return { part: "value", id: value.id, value };
  if (chosen !== null && card !== null && isInside(card, x, y)) return { part: "block", id: chosen };
  const box = (isOnRuling ? layout.bands.findLast((b) => isInside(b.box, x, y)) : undefined) ?? layout.chain.findLast((c) => isInside(c.box, x, y));
  return box ? { part: "block", id: box.id } : null;
}

/** Blocks that a marquee touches, bands first from left to right. */
export function blocksIn(layout: SheetLayout, box: Box): string[] {
  const bands = layout.bands.filter((b) => overlaps(b.box, box)).sort((a, b) => a.x - b.x);
  return [...bands, ...layout.chain.filter((c) => overlaps(c.box, box))].map((b) => b.id);
}

/** The middle of a block or of a knob; null where it is not on the sheet. */
export function placeOf(layout: SheetLayout, blocks: ReadonlyMap<string, Block>, id: string, part: "knob" | "block"): { x: number; y: number } | null {
  const band = layout.bands.find((b) => b.id === id);
  if (band && part === "knob") return { x: band.x, y: knobY(band, blocks.get(id)?.slider?.position ?? 0.5) };
  const box = part === "block" ? (band?.box ?? layout.chain.find((c) => c.id === id)?.box) : undefined;
  return box ? { x: (box.left + box.right) / 2, y: (box.top + box.bottom) / 2 } : null;
}

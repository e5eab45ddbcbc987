/** The part values written on the sheet: what they say and where they stand. */
import type { Align, Drawing } from "../blocks/drawing.ts";
import { BLOCKS } from "../blocks/index.ts";
import { impracticalText, isImpractical } from "../blocks/practical.ts";
import { partsOf, type Block, type Part } from "../model/project.ts";
import { formatCode } from "../units.ts";
import type { BandPlace } from "./band-place.ts";
import type { ChainPlace } from "./chain.ts";
import { valueFontSize } from "./frame.ts";
import type { Box } from "./units.ts";

export interface ValueTarget {
  readonly id: string;
  readonly role: string;
  readonly text: string;
  readonly x: number;
  readonly y: number;
  readonly align: Align;
  readonly fontSize: number;
  /** No part has such a value. */
  readonly isOdd: boolean;
  readonly box: Box;
}

/** Stands behind a value that no part has. */
const ODD = " !";

/** Where a drawing stands and how large it is. */
export interface DrawingPlace {
  readonly x: number;
  readonly y: number;
  readonly grid: number;
}

/** A value as the sheet writes it: the letter code of the trade, such as 4k7, 470R or 3n9, of at most three digits. */
function partCode(block: Block, role: string): string | null {
  if (role === "track") return block.slider ? formatCode(block.slider.track.value, "resistance", 3) : null;
  const part = partsOf(block)[role];
  const quantity = BLOCKS[block.kind].roles.find((r) => r.role === role)?.quantity;
  return part && quantity ? formatCode(part.value, quantity, 3) : null;
}

function target(id: string, role: string, text: string, at: { x: number; y: number; align: Align }, fontSize: number): ValueTarget {
  const width = Math.max(14, text.length * fontSize * 0.6);
  const left = at.align === "left" ? at.x : at.align === "right" ? at.x - width : at.x - width / 2;
  return { id, role, text, ...at, fontSize, isOdd: text.endsWith(ODD), box: { left: left - 2, right: left + width + 2, top: at.y - fontSize * 0.7, bottom: at.y + fontSize * 0.7 } };
}

/** Values of a drawing's parts that are present. `codeOf` gives the text of a role, null where the part is absent. */
export function drawingValues(id: string, drawing: Drawing, place: DrawingPlace, codeOf: (role: string) => string | null): ValueTarget[] {
  const fontSize = valueFontSize(place.grid);
  return drawing.symbols.flatMap((symbol) => {
    if (!("role" in symbol)) return [];
    const text = codeOf(symbol.role);
    if (text === null) return [];
    return [target(id, symbol.role, text, { x: place.x + symbol.value.x * place.grid, y: place.y + symbol.value.y * place.grid, align: symbol.value.align }, fontSize)];
  });
}

/** Whether a band's values are written: where its slot has the room; over its neighbours where it is the chosen one. */
export function showsValues(place: BandPlace, isChosen: boolean): boolean {
  return place.hasValues || (isChosen && place.detail !== "slim");
}

/** Characters of the longest code of three digits. */
const CLOSE_MOST = 4;
/** Pixels that a value's box, which is a little wider than its letters, may reach past its band's slot. */
const CLOSE_OVERHANG = 6;

function marked(code: string | null, isOdd: boolean): string | null {
  return code !== null && isOdd ? `${code}${ODD}` : code;
}

/** Whole ohms without their letter: `470` for `470R`, as it is written where letters are many. */
function shortCode(code: string | null): string | null {
  return code === null ? null : code.replace(/^(\d+)R$/, "$1");
}

/** Characters of the longest value that stands at the right of a band's leg, in its short form; 0 where there is none. */
export function closeLength(block: Block): number {
  const codes = BLOCKS[block.kind].drawing.symbols.map((symbol) => ("role" in symbol && symbol.value.x > 0 ? shortCode(partCode(block, symbol.role)) : null));
  return Math.min(CLOSE_MOST, Math.max(0, ...codes.map((code) => code?.length ?? 0)));
}

/** A band's values, its track's too; those that stand close are left out where they would run into the next band. */
export function bandValues(place: BandPlace, block: Block): ValueTarget[] {
  const codeOf = (role: string): string | null => marked(place.isClose ? shortCode(partCode(block, role)) : partCode(block, role), isImpractical(block, role));
  const written = drawingValues(block.id, BLOCKS[block.kind].drawing, { x: place.legX, y: place.legY, grid: place.legGrid }, codeOf);
  const values = place.isClose ? written.filter(({ box, isOdd }) => isOdd || box.right <= place.box.right + CLOSE_OVERHANG) : written;
  const track = marked(partCode(block, "track"), isImpractical(block, "track"));
  const fontSize = valueFontSize(place.legGrid);
  return track === null ? values : [...values, target(block.id, "track", track, { x: place.leadX + 4, y: place.trackTop + fontSize * 0.4, align: "left" }, fontSize)];
}

export function chainValues(place: ChainPlace): ValueTarget[] {
  return drawingValues(place.id, place.drawing, place, (role) => marked(partCode(place.block, role), isImpractical(place.block, role)));
}

/** Codes of the divider of a single supply, by role. */
export function referenceCode(reference: { readonly upperR: Part; readonly lowerR: Part; readonly bypassC: Part }, role: string): string | null {
  if (role !== "upperR" && role !== "lowerR" && role !== "bypassC") return null;
  const quantity = role === "bypassC" ? "capacitance" : "resistance";
  const { value } = reference[role];
  return marked(formatCode(value, quantity, 3), impracticalText(value, role, quantity) !== null);
}

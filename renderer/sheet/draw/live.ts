/** What moves while a slider is dragged. */
import { knobY, type BandPlace } from "../../../core/geometry/band-place.ts";
import { boxWithin } from "../../../core/geometry/clear-box.ts";
import type { SheetLayout } from "../../../core/geometry/layout.ts";
import type { Box } from "../../../core/geometry/units.ts";
import { formatDb } from "../../../core/units.ts";
import { travelText } from "../figure-texts.ts";
import { bandValues } from "../../../core/geometry/values.ts";
import type { Block } from "../../../core/model/project.ts";
import { figureLine } from "./figure-line.ts";
import { drawTag, TAG_HEIGHT, tagWidth } from "./overlay.ts";
import { lineOf, valueColor } from "./symbols.ts";
import type { Pen } from "./pen.ts";

/** Nearer to the centre than this counts as centred: less than a twentieth of a millimetre of travel. */
const CENTRE = 0.0005;

export type Side = "boost" | "cut" | "centre";

function sideOf(position: number): Side {
  return position > 0.5 + CENTRE ? "boost" : position < 0.5 - CENTRE ? "cut" : "centre";
}

export interface KnobState {
  readonly isHeld: boolean;
  readonly isSelected: boolean;
  /** The board oscillates: the gain means nothing. */
  readonly isVoid: boolean;
}

/** The knob with its wiper lead, and the band's gain as it stands. Shape tells the side too: a notch up, down or none. */
export function drawKnob(pen: Pen, place: BandPlace, position: number, now: number | undefined, { isHeld, isSelected, isVoid }: KnobState): void {
  const { inks, ctx } = pen;
  const y = knobY(place, position);
  const side = sideOf(position);
  const { x, knobHalf, leadX, legX, legY, slot } = place;
  const line = slot < 44 ? 1 : Math.max(1.25, lineOf(place.legGrid));
  const bend = Math.round(legY - 7);
  pen.line(legX === leadX ? [x + knobHalf, y, leadX, y, leadX, legY] : [x + knobHalf, y, leadX, y, leadX, bend, legX, bend, legX, legY], inks.ink, line);
  const half = Math.max(4.5, knobHalf * 0.5);
  const color = { boost: inks.boost, cut: inks.cut, centre: inks.inkSoft }[side];
  pen.box(x, y, knobHalf * 2, half * 2, { fill: color, stroke: isHeld ? inks.ink : color, lineWidth: isHeld ? 1.6 : 1, radius: 3 });
  pen.line([x - knobHalf + 4, y, x + knobHalf - 4, y], inks.paper, 1.6);
  if (side !== "centre") {
    const up = side === "boost" ? -1 : 1;
    ctx.fillStyle = color;
    ctx.beginPath();
    ctx.moveTo(x - 3.5, y + up * half);
    ctx.lineTo(x + 3.5, y + up * half);
    ctx.lineTo(x, y + up * (half + 3.5));
    ctx.fill();
  }
  if (now === undefined || place.figureRoom === 0) return;
  const text = formatDb(now);
  const shown = { size: place.detail === "slim" ? 10 : 11, align: "center", color: isVoid ? inks.inkSoft : nowColor(pen, now), isStruck: isVoid } as const;
  const bare = text.replace(" dB", "");
  const isBold = place.detail === "full";
  // Measured once: letters are what costs most in a frame of many bands.
  const room = pen.widthOf(isBold ? text : bare, shown.size, isBold);
  const fits = isBold || room <= place.figureRoom - 2;
  const written = isBold ? text : fits ? bare : formatDb(now, 0).replace(" dB", "");
  const lineY = figureLine(place, "now");
  if (!isSelected) {
    // Plain ground behind the letters: an outline about each would cost most of the frame.
    const width = (fits ? room : pen.widthOf(written, shown.size)) + 2;
    ctx.fillStyle = inks.paper;
    ctx.fillRect(x - width / 2, lineY - 6, width, 12);
  }
  pen.text(written, x, lineY, { ...shown, isBold });
}

function nowColor(pen: Pen, now: number): string {
  if (Math.abs(now) < 0.05) return pen.inks.inkSoft;
  return now > 0 ? pen.inks.boostText : pen.inks.cutText;
}

/** What the held slider does now, above its rails: beside the knob it would hide the neighbours'. */
export function drawHeldTag(pen: Pen, layout: SheetLayout, place: BandPlace, position: number, now: number | undefined): void {
  const { ruling, board } = layout.frame;
  const text = [...(now === undefined ? [] : [formatDb(now)]), travelText(position)].join("   ");
  const width = tagWidth(pen, text);
  const within: Box = { left: ruling.left, right: ruling.right, top: board.top + 3, bottom: board.bottom };
  const above = place.boostRailY - 7 - TAG_HEIGHT;
  // With the rails scrolled out of sight it keeps beside the knob.
  const box = above >= within.top ? boxWithin(place.x - width / 2, above, width, TAG_HEIGHT, within)
    : boxWithin(place.x + place.knobHalf + 10, knobY(place, position) - 10 - TAG_HEIGHT, width, TAG_HEIGHT, within);
  drawTag(pen, text, box);
}

/** The values of the selected band, over its neighbours, where its slot has no room for them. */
export function drawChosenValues(pen: Pen, place: BandPlace, block: Block): void {
  for (const value of bandValues(place, block)) {
    const { text, x, y, align, fontSize, isOdd } = value;
    const width = pen.widthOf(text, fontSize, isOdd);
    const left = align === "left" ? x : align === "right" ? x - width : x - width / 2;
    pen.ctx.fillStyle = pen.inks.accentWash;
    pen.ctx.fillRect(left - 1, y - fontSize * 0.55, width + 2, fontSize * 1.1);
    pen.text(text, x, y, { size: fontSize, align, isBold: isOdd, color: valueColor(pen, value) });
  }
}

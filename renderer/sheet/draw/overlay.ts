/** What follows the pointer. */
import { levelY, type LevelSpan } from "../../../core/geometry/levels.ts";
import { pixelOf } from "../../../core/geometry/ruling.ts";
import type { Frame } from "../../../core/geometry/frame.ts";
import { tagPlace, type Box } from "../../../core/geometry/units.ts";
import { formatDb, formatFigure } from "../../../core/units.ts";
import { degreesText } from "../figure-texts.ts";
import { faint, type Pen } from "./pen.ts";

export interface CursorReading {
  readonly frequency: number;
  readonly gain: number;
  readonly phase: number;
}

/** A line of frequency through response and board, a dot on the curve and a tag that stays in sight. */
export function drawCursor(pen: Pen, frame: Frame, levels: LevelSpan, reading: CursorReading): void {
  const { inks } = pen;
  const { response, ruling } = frame;
  const x = pixelOf(ruling, reading.frequency);
  if (x < ruling.left || x > ruling.right) return;
  const y = levelY(levels, response.top, response.bottom - response.top, reading.gain);
  pen.line([x, response.top, x, response.bottom], faint(inks.accent, 0.8), 1);
  pen.line([x, frame.board.top, x, frame.height], faint(inks.accent, 0.35), 1);
  const onCurve = Math.max(response.top, Math.min(response.bottom, y));
  if (y === onCurve) {
    pen.dot(x, y, 4.5, inks.paper);
    pen.dot(x, y, 3, inks.accent);
  }
  const parts = [formatFigure(reading.frequency, "frequency"), formatDb(reading.gain, 2), degreesText(reading.phase)];
  drawTag(pen, parts.join("   "), { x, y: onCurve }, { ...response, left: response.left + 2, right: response.right - 2 });
}

/** A line of text on a card beside a point. */
export function drawTag(pen: Pen, text: string, at: { x: number; y: number }, within: Box): void {
  const size = { width: Math.ceil(pen.widthOf(text, 11.5)) + 14, height: 22 };
  const place = tagPlace(at, size, within);
  const [x, y] = [place.x + size.width / 2, place.y + size.height / 2];
  pen.box(x, y, size.width, size.height, { fill: pen.inks.card, stroke: pen.inks.ruleStrong, lineWidth: 1, radius: 4 });
  pen.text(text, x, y, { size: 11.5, align: "center" });
}

export function drawMarquee(pen: Pen, box: Box): void {
  pen.box((box.left + box.right) / 2, (box.top + box.bottom) / 2, box.right - box.left, box.bottom - box.top, { fill: faint(pen.inks.accent, 0.1), stroke: pen.inks.accent, lineWidth: 1 });
}

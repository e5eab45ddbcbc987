/** What follows the pointer. */
import { boxWithin, clearestBox } from "../../../core/geometry/clear-box.ts";
import type { Frame } from "../../../core/geometry/frame.ts";
import { levelY } from "../../../core/geometry/levels.ts";
import { pixelOf } from "../../../core/geometry/ruling.ts";
import type { Box } from "../../../core/geometry/units.ts";
import { formatDb, formatFigure } from "../../../core/units.ts";
import { degreesText } from "../figure-texts.ts";
import { linesOf, namesOf } from "./curve-names.ts";
import type { CurveScene } from "./curves.ts";
import { faint, type Pen } from "./pen.ts";

export interface CursorReading {
  readonly frequency: number;
  readonly gain: number;
  readonly phase: number;
}

/** A line of frequency through response and board, a dot on the curve, and a tag where it hides the curves least. */
export function drawCursor(pen: Pen, frame: Frame, scene: CurveScene, reading: CursorReading): void {
  const { inks } = pen;
  const { response, ruling } = frame;
  const { levels } = scene;
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
  const text = parts.join("   ");
  const width = tagWidth(pen, text);
  const within = { ...response, left: response.left + 2, right: response.right - 2 };
  // Along the edges, so that it does not jump about with the curve.
  const boxes = [response.top + 2, response.bottom - TAG_HEIGHT - 2].flatMap((top) => [x + 10, x - 10 - width].map((left) => boxWithin(left, top, width, TAG_HEIGHT, within)));
  // The side that the pointer would have to cross is none; on a narrow sheet there may be no other.
  const beside = boxes.filter((box) => box.left > x || box.right < x);
  drawTag(pen, text, clearestBox(ruling, response, linesOf(scene), namesOf(pen, scene).map((name) => name.box), beside.length > 0 ? beside : boxes));
}

export const TAG_HEIGHT = 22;

export function tagWidth(pen: Pen, text: string): number {
  return Math.ceil(pen.widthOf(text, 11.5)) + 14;
}

/** A line of text on a card. */
export function drawTag(pen: Pen, text: string, box: Box): void {
  const [x, y] = [(box.left + box.right) / 2, (box.top + box.bottom) / 2];
  pen.box(x, y, box.right - box.left, box.bottom - box.top, { fill: pen.inks.card, stroke: pen.inks.ruleStrong, lineWidth: 1, radius: 4 });
  pen.text(text, x, y, { size: 11.5, align: "center" });
}

export function drawMarquee(pen: Pen, box: Box): void {
  pen.box((box.left + box.right) / 2, (box.top + box.bottom) / 2, box.right - box.left, box.bottom - box.top, { fill: faint(pen.inks.accent, 0.1), stroke: pen.inks.accent, lineWidth: 1 });
}

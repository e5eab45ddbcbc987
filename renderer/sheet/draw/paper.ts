/** What lies under everything: the ruling and the axes. */
import { frequencyLabels, frequencyRules, octaveMarks } from "../../../core/geometry/ruling.ts";
import { levelTicks, levelY, type LevelSpan } from "../../../core/geometry/levels.ts";
import type { Frame } from "../../../core/geometry/frame.ts";
import type { Pen } from "./pen.ts";

/** A response this low is none, px. */
const NO_PLOT = 20;

/** Vertical rules through response and board, the level rules of the response, and the labels of all axes. */
export function drawPaper(pen: Pen, frame: Frame, levels: LevelSpan, phase: LevelSpan | null): void {
  const { inks } = pen;
  const { ruling, response, board } = frame;
  for (const rule of frequencyRules(ruling)) {
    pen.line([rule.x, response.top, rule.x, response.bottom], inks.rule, rule.weight === "decade" ? 1.6 : 1);
    pen.line([rule.x, board.top, rule.x, frame.height], inks.rule, rule.weight === "decade" ? 1.6 : 1);
  }
  const height = response.bottom - response.top;
  // Where wiring faults have taken its place there is no level to read.
  const isPlot = height > NO_PLOT;
  for (const level of isPlot ? levelTicks(levels, height, height < 200 ? 18 : 28) : []) {
    const y = levelY(levels, response.top, height, level);
    const isZero = level === 0;
    pen.line([response.left, y, response.right, y], isZero ? inks.ruleStrong : inks.rule, isZero ? 1.4 : 1);
    pen.text(`${level > 0 ? "+" : level < 0 ? "−" : ""}${Math.abs(level)}`, response.left - 10, y, { align: "right", color: isZero ? inks.ink : inks.inkSoft });
  }
  if (isPlot) sideways(pen, "gain, dB", response.left - 44, (response.top + response.bottom) / 2, inks.inkSoft);
  if (phase) {
    for (let angle = phase.bottom; angle <= phase.top; angle += phase.top > 180 ? 90 : 45) {
      const y = levelY(phase, response.top, height, angle);
      pen.line([response.right, y, response.right + 4, y], inks.accent, 1);
      pen.text(`${angle < 0 ? "−" : ""}${Math.abs(angle)}°`, response.right + 8, y, { color: inks.accent });
    }
  }
  if (phase) sideways(pen, "phase, degrees", response.right + 50, (response.top + response.bottom) / 2, inks.accent);
  const axisY = (response.bottom + board.top) / 2;
  for (const mark of octaveMarks(ruling)) pen.line([mark.x, response.bottom, mark.x, response.bottom + 4], inks.ruleStrong, 1);
  for (const label of frequencyLabels(ruling, (text) => pen.widthOf(text))) {
    pen.line([label.x, response.bottom, label.x, response.bottom + 4], inks.ruleStrong, 1);
    pen.text(label.text, label.x, axisY + 2, { align: "center", color: inks.inkSoft });
  }
  pen.text("frequency, Hz", ruling.left - 10, axisY + 2, { align: "right", color: inks.inkSoft });
}

/** A word along an axis, read from the right. */
function sideways(pen: Pen, text: string, x: number, y: number, color: string): void {
  pen.ctx.save();
  pen.ctx.translate(x, y);
  pen.ctx.rotate(-Math.PI / 2);
  pen.text(text, 0, 0, { align: "center", color });
  pen.ctx.restore();
}

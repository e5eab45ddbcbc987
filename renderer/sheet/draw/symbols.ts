/** IEC 60617 symbols and whole drawings. */
import { SYMBOL_LENGTH, type AmplifierSymbol, type Drawing, type MarkSymbol, type PartSymbol } from "../../../core/blocks/drawing.ts";
import type { DrawingPlace, ValueTarget } from "../../../core/geometry/values.ts";
import type { Pen } from "./pen.ts";

/** Line width of drawings by the size of their grid. */
export const lineOf = (grid: number): number => (grid >= 5.5 ? 1.6 : grid >= 3 ? 1.25 : 1);

/** Draws a block's symbols and wires. `has` tells whether a part is present. */
export function drawDrawing(pen: Pen, drawing: Drawing, place: DrawingPlace, has: (role: string) => boolean, color = pen.inks.ink): void {
  const { x, y, grid } = place;
  const line = lineOf(grid);
  for (const wire of drawing.wires) {
    if (wire.needs !== undefined && !has(wire.needs)) continue;
    pen.line(wire.points.map((v, i) => (i % 2 === 0 ? x : y) + v * grid), color, line);
  }
  for (const symbol of drawing.symbols) {
    const at = { x: x + symbol.x * grid, y: y + symbol.y * grid };
    if ("role" in symbol) drawPart(pen, symbol, at, grid, has(symbol.role), color);
    else if (symbol.symbol === "amplifier") drawAmplifier(pen, symbol, at, grid, color);
    else if (symbol.needs === undefined || has(symbol.needs)) drawMark(pen, symbol, at, grid, color);
  }
  for (const joint of drawing.joints) {
    if (joint.needs === undefined || has(joint.needs)) pen.dot(x + joint.x * grid, y + joint.y * grid, Math.max(1.4, Math.min(3, grid * 0.55)), color);
  }
}

/** Writes part values beside their symbols. */
export function drawValues(pen: Pen, values: readonly ValueTarget[], color = pen.inks.ink): void {
  for (const value of values) pen.text(value.text, value.x, value.y, { size: value.fontSize, align: value.align, isBold: value.isOdd, color: valueColor(pen, value, color) });
}

/** The ink of a value: softer for a track, a warning where no part has it. */
export function valueColor(pen: Pen, { role, isOdd }: ValueTarget, color = pen.inks.ink): string {
  return isOdd ? pen.inks.warning : role === "track" ? pen.inks.inkSoft : color;
}

function drawPart(pen: Pen, part: PartSymbol, at: { x: number; y: number }, grid: number, isPresent: boolean, color: string): void {
  if (!isPresent && part.absent === "nothing") return;
  const half = (SYMBOL_LENGTH[part.symbol] * grid) / 2;
  const line = lineOf(grid);
  // Along the symbol and across it, whichever way it lies.
  const lead = (from: number, to: number): void => {
    pen.line(part.isFlat ? [at.x + from, at.y, at.x + to, at.y] : [at.x, at.y + from, at.x, at.y + to], color, line);
  };
  if (!isPresent) {
    lead(-half, half);
    return;
  }
  if (part.symbol === "resistor") {
    const [body, across] = [grid * 5.4, grid * 2.2];
    lead(-half, -body / 2);
    lead(body / 2, half);
    pen.box(at.x, at.y, part.isFlat ? body : across, part.isFlat ? across : body, { fill: pen.inks.paper, stroke: color, lineWidth: line });
  } else if (part.symbol === "capacitor") {
    // Two plates stay two plates however small they get.
    const [gap, plate] = [Math.max(grid * 0.62, 1.75), grid * 2];
    lead(-half, -gap);
    lead(gap, half);
    for (const side of [-gap, gap]) {
      pen.line(part.isFlat ? [at.x + side, at.y - plate, at.x + side, at.y + plate] : [at.x - plate, at.y + side, at.x + plate, at.y + side], color, grid >= 3 ? line * 1.5 : line);
    }
  } else drawWinding(pen, at, grid, half, color, lead);
}

/** Four arcs beside the axis. */
function drawWinding(pen: Pen, at: { x: number; y: number }, grid: number, half: number, color: string, lead: (from: number, to: number) => void): void {
  const radius = grid * 0.85;
  lead(-half, -radius * 4);
  lead(radius * 4, half);
  const { ctx } = pen;
  ctx.strokeStyle = color;
  ctx.lineWidth = pen.width(lineOf(grid) * 1.1);
  ctx.beginPath();
  const x = pen.snap(at.x, ctx.lineWidth);
  for (let turn = -3; turn <= 3; turn += 2) ctx.arc(x, at.y + turn * radius, radius, -Math.PI / 2, Math.PI / 2);
  ctx.stroke();
}

function drawAmplifier(pen: Pen, amp: AmplifierSymbol, at: { x: number; y: number }, grid: number, color: string): void {
  const { ctx } = pen;
  const [length, half] = [amp.length * grid, (amp.width * grid) / 2];
  const line = lineOf(grid);
  ctx.save();
  ctx.translate(pen.snap(at.x, pen.width(line)), pen.snap(at.y, pen.width(line)));
  // Drawn pointing right; −1 mirrors it to the left.
  const mirror = amp.points === "left" ? -1 : 1;
  if (amp.points === "up") ctx.rotate(-Math.PI / 2);
  ctx.beginPath();
  ctx.moveTo(0, 0);
  ctx.lineTo(-length * mirror, -half);
  ctx.lineTo(-length * mirror, half);
  ctx.closePath();
  ctx.fillStyle = pen.inks.paper;
  ctx.fill();
  ctx.strokeStyle = color;
  ctx.lineWidth = pen.width(line);
  ctx.stroke();
  ctx.restore();
  if (grid < 2) return;
  const sign = grid * 0.65;
  const signLine = Math.max(1, Math.min(1.5, grid * 0.28));
  for (const [side, which] of [[-2 * grid, amp.first], [2 * grid, amp.first === "+" ? "-" : "+"]] as const) {
    const along = length - 1.5 * grid;
    const [x, y] = amp.points === "up" ? [at.x + side, at.y + along] : [at.x - along * mirror, at.y + side];
    pen.line([x - sign, y, x + sign, y], color, signLine);
    if (which === "+") pen.line([x, y - sign, x, y + sign], color, signLine);
  }
}

function drawMark(pen: Pen, mark: MarkSymbol, at: { x: number; y: number }, grid: number, color: string): void {
  const line = lineOf(grid);
  const { ctx } = pen;
  if (mark.symbol === "ground") {
    pen.line([at.x, at.y, at.x, at.y + grid], color, line);
    [2.2, 1.4, 0.6].forEach((half, i) => pen.line([at.x - half * grid, at.y + (1 + i * 0.8) * grid, at.x + half * grid, at.y + (1 + i * 0.8) * grid], color, line * 1.1));
  } else if (mark.symbol === "reference") {
    const top = at.y + grid;
    pen.line([at.x, at.y, at.x, top], color, line);
    pen.line([at.x - 2 * grid, top, at.x + 2 * grid, top, at.x, top + 2 * grid, at.x - 2 * grid, top], color, line);
  } else {
    const radius = mark.symbol === "source" ? 2 * grid : 0.8 * grid;
    ctx.beginPath();
    ctx.arc(at.x, at.y, radius, 0, 2 * Math.PI);
    ctx.fillStyle = pen.inks.paper;
    ctx.fill();
    ctx.strokeStyle = color;
    ctx.lineWidth = pen.width(line);
    ctx.stroke();
    if (mark.symbol === "source") {
      ctx.beginPath();
      ctx.arc(at.x - radius * 0.3, at.y, radius * 0.3, Math.PI, 0);
      ctx.arc(at.x + radius * 0.3, at.y, radius * 0.3, Math.PI, 0, true);
      ctx.stroke();
    }
  }
}

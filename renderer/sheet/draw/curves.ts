import type { BandFigures } from "../../../core/analysis/bands.ts";
import { levelY, lowsBelow, type LevelSpan } from "../../../core/geometry/levels.ts";
import { pixelOf, type Ruling } from "../../../core/geometry/ruling.ts";
import type { Box } from "../../../core/geometry/units.ts";
import type { Curve, Ghost } from "../sheet-props.ts";
import { drawNames } from "./curve-names.ts";
import { formatDb } from "../../../core/units.ts";
import { faint, type Pen } from "./pen.ts";

export interface CurveScene {
  readonly response: Box;
  readonly ruling: Ruling;
  readonly levels: LevelSpan;
  readonly phase: LevelSpan | null;
  readonly total: Curve | null;
  readonly alone: Curve | null;
  /** The end of its slider at which it is shown. */
  readonly aloneEnd: "boost" | "cut";
  /** Name of the band that is shown alone. */
  readonly aloneLabel: string;
  /** Its figures, from which the name's numbers come: the curve's own points are only as fine as the screen. */
  readonly aloneFigures: BandFigures | null;
  readonly ghost?: Ghost | null;
  /** The board oscillates: the curves are faded, their figures struck. */
  readonly isVoid: boolean;
  /** It does at the end at which the band is shown alone. */
  readonly isAloneVoid: boolean;
}

/** Curves that mean nothing are this faint. */
const VOID_ALPHA = 0.45;

/** The response: what the sliders do together in ink, the selected band alone dashed and named. */
export function drawCurves(pen: Pen, scene: CurveScene): void {
  const { response, total, alone, ghost, inks, phase } = { ...scene, inks: pen.inks };
  pen.clipped(response.left, response.top, response.right, response.bottom, () => {
    if (scene.isVoid) pen.ctx.globalAlpha = VOID_ALPHA;
    if (total) fillBetween(pen, scene, total);
    if (phase && total) stroke(pen, scene, total.frequency, total.phase, phase, inks.accent, 1.2, [2, 3]);
    if (alone) {
      pen.ctx.globalAlpha = scene.isVoid || scene.isAloneVoid ? VOID_ALPHA : 1;
      stroke(pen, scene, alone.frequency, alone.gain, scene.levels, inks[scene.aloneEnd], 1.6, [6, 4]);
      pen.ctx.globalAlpha = scene.isVoid ? VOID_ALPHA : 1;
    }
    if (total) stroke(pen, scene, total.frequency, total.gain, scene.levels, inks.ink, 2.2);
    // Dots over the lines, so that what stays the same shows as much as what moves.
    if (ghost) for (const curve of [ghost.total, ...(ghost.alone ? [ghost.alone] : [])]) stroke(pen, scene, curve.frequency, curve.gain, scene.levels, inks.accent, 2.4, [0.1, 5]);
  });
  if (total) drawLows(pen, scene, total);
  drawNames(pen, scene);
}

/** Where the curve leaves the plot below: an arrow, and how far down it goes. */
function drawLows(pen: Pen, { response, ruling, levels, isVoid }: CurveScene, total: Curve): void {
  const color = isVoid ? pen.inks.inkSoft : pen.inks.ink;
  const size = 10;
  const y = response.bottom - 9;
  let free = response.left;
  for (const { frequency, gain } of lowsBelow(levels, total, ruling)) {
    const text = `▼ ${formatDb(gain, 0)}`;
    const width = pen.widthOf(text, size, true);
    const left = Math.max(free, Math.min(response.right - width - 4, pixelOf(ruling, frequency) + 4));
    if (left + width > response.right) return;
    pen.text(text, left, y, { size, isBold: true, color, isStruck: isVoid, halo: pen.inks.paper });
    free = left + width + 8;
  }
}

/** Pixels from one point of a curve to the next: less cannot be seen and costs time. */
const LEAST_STEP = 1.6;

function trace(pen: Pen, scene: CurveScene, frequency: Float64Array, column: Float64Array, span: LevelSpan): void {
  const { ctx } = pen;
  const { ruling, response } = scene;
  const height = response.bottom - response.top;
  const last = frequency.length - 1;
  let drawn = -Infinity;
  for (let i = 0; i <= last; i++) {
    const x = pixelOf(ruling, frequency[i]);
    // Out of sight but for the next point on either side, or no further on than the eye can tell.
    const isSkipped = i < last && (pixelOf(ruling, frequency[i + 1]) < ruling.left || x - drawn < LEAST_STEP);
    if (isSkipped) continue;
    ctx.lineTo(x, levelY(span, response.top, height, column[i]));
    drawn = x;
    if (x > ruling.right) break;
  }
}

function stroke(pen: Pen, scene: CurveScene, frequency: Float64Array, column: Float64Array, span: LevelSpan, color: string, width: number, dash: number[] = []): void {
  const { ctx } = pen;
  ctx.strokeStyle = color;
  ctx.lineWidth = width;
  ctx.setLineDash(dash);
  ctx.beginPath();
  trace(pen, scene, frequency, column, span);
  ctx.stroke();
  ctx.setLineDash([]);
}

/** A wash between the curve and 0 dB: ochre above, slate below. */
function fillBetween(pen: Pen, scene: CurveScene, curve: Curve): void {
  const { ctx, inks } = pen;
  const { response, ruling, levels } = scene;
  const zero = levelY(levels, response.top, response.bottom - response.top, 0);
  const last = curve.frequency.length - 1;
  for (const [color, top, bottom] of [[inks.boost, response.top, zero], [inks.cut, zero, response.bottom]] as const) {
    pen.clipped(response.left, top, response.right, bottom, () => {
      ctx.beginPath();
      ctx.moveTo(pixelOf(ruling, curve.frequency[0]), zero);
      trace(pen, scene, curve.frequency, curve.gain, levels);
      ctx.lineTo(pixelOf(ruling, curve.frequency[last]), zero);
      ctx.closePath();
      ctx.fillStyle = faint(color, 0.11);
      ctx.fill();
    });
  }
}

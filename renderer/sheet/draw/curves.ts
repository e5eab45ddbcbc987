import type { BandFigures } from "../../../core/analysis/bands.ts";
import { BLOCKS } from "../../../core/blocks/index.ts";
import { levelY, type LevelSpan } from "../../../core/geometry/levels.ts";
import { extremeIndex } from "../../../core/geometry/reading.ts";
import { pixelOf, type Ruling } from "../../../core/geometry/ruling.ts";
import type { Box } from "../../../core/geometry/units.ts";
import { formatDb, formatFigure } from "../../../core/units.ts";
import type { Curve, Ghost } from "../sheet-props.ts";
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
  if (alone) nameAlone(pen, scene, alone);
  if (ghost) nameGhost(pen, scene, ghost);
}

/** Index of the highest point at full boost, of the lowest at full cut. */
function peakIndex({ gain }: Curve, isUp: boolean): number {
  let best = 0;
  for (let i = 1; i < gain.length; i++) if (isUp ? gain[i] > gain[best] : gain[i] < gain[best]) best = i;
  return best;
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

/** `: +11.0 dB, 2.03 kHz` of a peak, `: plateau +13.9 dB` of a shelf or level. */
function aloneNumbers(figures: BandFigures | null, isUp: boolean): string {
  if (!figures) return "";
  const { peak, frequency } = isUp ? figures.boost : figures.cut;
  if (BLOCKS[figures.kind].shape !== "resonance") return `: plateau ${formatDb(peak)}`;
  return `: ${formatDb(peak)}${frequency === null ? "" : `, ${formatFigure(frequency, "frequency")}`}`;
}

/** What the dashed curve is, beside its peak. */
function nameAlone(pen: Pen, scene: CurveScene, alone: Curve): void {
  const { response, ruling, levels, total } = scene;
  const isUp = scene.aloneEnd === "boost";
  const peak = peakIndex(alone, isUp);
  const at = { x: pixelOf(ruling, alone.frequency[peak]), y: levelY(levels, response.top, response.bottom - response.top, alone.gain[peak]) };
  if (at.x < response.left || at.x > response.right) return;
  const text = `${scene.aloneLabel} alone, full ${isUp ? "boost" : "cut"}${aloneNumbers(scene.aloneFigures, isUp)}`;
  const width = pen.widthOf(text);
  // Beside the peak, a little further out than the curve goes, on the side that has the room.
  const isRight = at.x + 14 + width <= response.right - 4;
  const x = Math.max(response.left + 4, isRight ? at.x + 14 : at.x - 14 - width);
  const beside = Math.max(response.top + 9, Math.min(response.bottom - 9, isUp ? at.y - 7 : at.y + 9));
  // Out of the way of the other curve where that runs through the same place.
  const isCrossed = [x, x + width / 2, x + width].some((end) => {
    const y = total && levelAt(total, scene, end);
    return y !== null && Math.abs(y - beside) < 11;
  });
  const y = isCrossed ? (isUp ? response.top + 9 : response.bottom - 9) : beside;
  const isStruck = scene.isVoid || scene.isAloneVoid;
  pen.text(text, x, y, { color: isStruck ? pen.inks.inkSoft : isUp ? pen.inks.boostText : pen.inks.cutText, halo: pen.inks.paper, isStruck });
}

/** What the dotted curves are, where they depart most, on the side away from the line they depart from. */
function nameGhost(pen: Pen, scene: CurveScene, ghost: Ghost): void {
  const { response, ruling, levels } = scene;
  const [now, then] = scene.alone && ghost.alone ? [scene.alone, ghost.alone] : [scene.total, ghost.total];
  if (!now || now.gain.length !== then.gain.length) return;
  let most = extremeIndex(then.gain);
  for (let i = 0; i < then.gain.length; i++) if (Math.abs(then.gain[i] - now.gain[i]) > Math.abs(then.gain[most] - now.gain[most])) most = i;
  const text = `with ${ghost.label}`;
  const width = pen.widthOf(text, 11, true);
  const x = Math.max(response.left + 6, Math.min(response.right - 6 - width, pixelOf(ruling, then.frequency[most]) - width / 2));
  const y = levelY(levels, response.top, response.bottom - response.top, then.gain[most]) + (then.gain[most] >= now.gain[most] ? -13 : 13);
  pen.text(text, x, Math.max(response.top + 9, Math.min(response.bottom - 9, y)), { color: pen.inks.accent, halo: pen.inks.paper, isBold: true });
}

function levelAt(curve: Curve, scene: CurveScene, x: number): number | null {
  const { ruling, response, levels } = scene;
  const log = Math.log(ruling.to / ruling.from) * ((x - ruling.left) / (ruling.right - ruling.left));
  const frequency = ruling.from * Math.exp(log);
  const index = curve.frequency.findIndex((f) => f >= frequency);
  return index < 0 ? null : levelY(levels, response.top, response.bottom - response.top, curve.gain[index]);
}

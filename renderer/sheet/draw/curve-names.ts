/** The words at the curves: each beside what it names, where it hides no curve. */
import type { BandFigures } from "../../../core/analysis/bands.ts";
import { BLOCKS } from "../../../core/blocks/index.ts";
import { boxWithin, clearestBox, type PlotLine } from "../../../core/geometry/clear-box.ts";
import { levelY } from "../../../core/geometry/levels.ts";
import { extremeIndex } from "../../../core/geometry/reading.ts";
import { pixelOf } from "../../../core/geometry/ruling.ts";
import type { Box } from "../../../core/geometry/units.ts";
import { formatDb, formatFigure } from "../../../core/units.ts";
import type { Curve, Ghost } from "../sheet-props.ts";
import type { CurveScene } from "./curves.ts";
import type { Pen } from "./pen.ts";

interface Name {
  readonly text: string;
  readonly color: string;
  readonly isBold: boolean;
  readonly isStruck: boolean;
  readonly box: Box;
}

const SIZE = 11;
const HEIGHT = 15;

/** All lines of the response. */
export function linesOf({ total, alone, ghost, phase, levels }: CurveScene): PlotLine[] {
  const curves = [total, alone, ghost?.total ?? null, ghost?.alone ?? null].filter((curve) => curve !== null);
  return [
    ...curves.map(({ frequency, gain }): PlotLine => ({ frequency, column: gain, span: levels })),
    ...(phase && total ? [{ frequency: total.frequency, column: total.phase, span: phase }] : []),
  ];
}

/** The names of the curves that have one, and where they stand. */
export function namesOf(pen: Pen, scene: CurveScene): Name[] {
  const lines = linesOf(scene);
  const alone = scene.alone ? aloneName(pen, scene, scene.alone, lines) : null;
  const ghost = scene.ghost ? ghostName(pen, scene, scene.ghost, lines, alone ? [alone.box] : []) : null;
  return [alone, ghost].filter((name) => name !== null);
}

export function drawNames(pen: Pen, scene: CurveScene): void {
  for (const { text, color, isBold, isStruck, box } of namesOf(pen, scene)) {
    pen.text(text, box.left, (box.top + box.bottom) / 2, { size: SIZE, color, isBold, isStruck, halo: pen.inks.paper });
  }
}

/** The place of a curve's point on the response. */
function pointOf({ ruling, response, levels }: CurveScene, curve: Curve, index: number): { x: number; y: number } {
  return { x: pixelOf(ruling, curve.frequency[index]), y: levelY(levels, response.top, response.bottom - response.top, curve.gain[index]) };
}

/** Index of the highest point at full boost, of the lowest at full cut. */
function peakIndex({ gain }: Curve, isUp: boolean): number {
  let best = 0;
  for (let i = 1; i < gain.length; i++) if (isUp ? gain[i] > gain[best] : gain[i] < gain[best]) best = i;
  return best;
}

/** `: +11.0 dB, 2.03 kHz` of a peak, `: plateau +13.9 dB` of a shelf or level. */
function aloneNumbers(figures: BandFigures | null, isUp: boolean): string {
  if (!figures) return "";
  const { peak, frequency } = isUp ? figures.boost : figures.cut;
  if (BLOCKS[figures.kind].shape !== "resonance") return `: plateau ${formatDb(peak)}`;
  return `: ${formatDb(peak)}${frequency === null ? "" : `, ${formatFigure(frequency, "frequency")}`}`;
}

/** What the dashed curve is, beside its peak; null where that is out of sight. */
function aloneName(pen: Pen, scene: CurveScene, alone: Curve, lines: readonly PlotLine[]): Name | null {
  const { response, ruling, inks } = { ...scene, inks: pen.inks };
  const isUp = scene.aloneEnd === "boost";
  const at = pointOf(scene, alone, peakIndex(alone, isUp));
  if (at.x < response.left || at.x > response.right) return null;
  const text = `${scene.aloneLabel} alone, full ${isUp ? "boost" : "cut"}${aloneNumbers(scene.aloneFigures, isUp)}`;
  const width = pen.widthOf(text, SIZE);
  // A little further out than the curve goes, else past it on either side, else at the edge that it rises or falls to.
  const [above, below] = [at.y - 5 - HEIGHT, at.y + 5];
  const rows = isUp ? [at.y - 7 - HEIGHT / 2, above, below, response.top, response.bottom] : [at.y + 9 - HEIGHT / 2, below, above, response.bottom, response.top];
  const within = { left: response.left + 4, right: response.right - 4, top: response.top + 1, bottom: response.bottom - 1 };
  const boxes = rows.flatMap((top) => [at.x + 14, at.x - 14 - width].map((left) => boxWithin(left, top, width, HEIGHT, within)));
  const isStruck = scene.isVoid || scene.isAloneVoid;
  return { text, isBold: false, isStruck, color: isStruck ? inks.inkSoft : isUp ? inks.boostText : inks.cutText, box: clearestBox(ruling, response, lines, [], boxes) };
}

/** What the dotted curves are, near where they depart most from those that they are held against. */
function ghostName(pen: Pen, scene: CurveScene, ghost: Ghost, lines: readonly PlotLine[], words: readonly Box[]): Name | null {
  const { response, ruling } = scene;
  const [now, then] = scene.alone && ghost.alone ? [scene.alone, ghost.alone] : [scene.total, ghost.total];
  if (!now || now.gain.length !== then.gain.length) return null;
  let most = extremeIndex(then.gain);
  for (let i = 0; i < then.gain.length; i++) if (Math.abs(then.gain[i] - now.gain[i]) > Math.abs(then.gain[most] - now.gain[most])) most = i;
  const text = `with ${ghost.label}`;
  const width = pen.widthOf(text, SIZE, true);
  const at = pointOf(scene, then, most);
  const isAbove = then.gain[most] >= now.gain[most];
  const [above, below] = [at.y - 6 - HEIGHT, at.y + 6];
  const within = { left: response.left + 6, right: response.right - 6, top: response.top + 1, bottom: response.bottom - 1 };
  const places = (tops: readonly number[]): Box[] => tops.flatMap((top) => [at.x - width / 2, at.x + 12, at.x - 12 - width].map((left) => boxWithin(left, top, width, HEIGHT, within)));
  // Near the place; else in line with the other name, as in a legend; else at an edge.
  const inLine = words.flatMap((other) => [
    ...[other.right + 14, other.left - 14 - width].map((left) => boxWithin(left, other.top, width, HEIGHT, within)),
    ...[other.bottom + 1, other.top - 1 - HEIGHT].flatMap((top) => [other.left, other.right - width].map((left) => boxWithin(left, top, width, HEIGHT, within))),
  ]);
  const boxes = [...places(isAbove ? [above, below] : [below, above]), ...inLine, ...places([response.top, response.bottom])];
  return { text, isBold: true, isStruck: false, color: pen.inks.accent, box: clearestBox(ruling, response, lines, words, boxes) };
}

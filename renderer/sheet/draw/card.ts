/** The figures of the selected band in full, in free space near it, where its slot has no room for them. */
import type { BandFigures } from "../../../core/analysis/bands.ts";
import type { BandPlace } from "../../../core/geometry/band-place.ts";
import { placeCard, type CardPlace, type CardSize } from "../../../core/geometry/card.ts";
import type { SheetLayout } from "../../../core/geometry/layout.ts";
import { bandValues, showsValues } from "../../../core/geometry/values.ts";
import type { Block } from "../../../core/model/project.ts";
import { formatDb } from "../../../core/units.ts";
import { bandFigureTexts, type Run, type VoidEnds } from "../figure-texts.ts";
import { SIGN_WIDTH, type Pen } from "./pen.ts";
import { drawRuns, widthOfRuns } from "./runs.ts";

const LINE = 13;
const PAD = { x: 9, y: 2.5 };
/** Stands for the gain now when the card's size is settled: the card stays as it is while a slider moves. */
const WIDEST_NOW = "now −00.0 dB";
const TITLE_SIZE = 12;
const SIZE = 11;

interface Line {
  readonly title: string;
  readonly runs: readonly Run[];
}

/** A card whose place is known, to be drawn from frame to frame. */
export interface Card {
  readonly figures: BandFigures;
  readonly voids: VoidEnds;
  readonly place: CardPlace | null;
}

/** The lines of the card in its forms: one fact a line, two lines, one line. */
function formsOf(figures: BandFigures, voids: VoidEnds, now: Run | null): readonly (readonly Line[])[] {
  const texts = bandFigureTexts(figures);
  const title = figures.label;
  const peaks = [{ text: texts.boost.replace(" dB", ""), isVoid: voids.boost }, { text: texts.cut, isVoid: voids.cut }];
  const where = { text: `${texts.centre} · ${texts.quality}`, isVoid: voids.boost };
  const last = now ? [now] : [];
  return [
    [{ title, runs: [] }, { title: "", runs: peaks }, { title: "", runs: [where] }, ...(now ? [{ title: "", runs: last }] : [])],
    [{ title, runs: last }, { title: "", runs: [...peaks, { ...where, text: `· ${where.text}` }] }],
    [{ title, runs: [...peaks, { ...where, text: `· ${where.text}` }, ...(now ? [{ ...now, text: `· ${now.text}` }] : [])] }],
  ];
}

function titleWidth(pen: Pen, title: string, hasSign: boolean): number {
  return title === "" ? 0 : pen.widthOf(title, TITLE_SIZE, true) + (hasSign ? SIGN_WIDTH : 0);
}

function lineWidth(pen: Pen, { title, runs }: Line, hasSign: boolean): number {
  const written = runs.length === 0 ? 0 : widthOfRuns(pen, runs, SIZE);
  return titleWidth(pen, title, hasSign) + written + (title !== "" && runs.length > 0 ? PAD.x : 0);
}

/** Settles where the card of a band goes. */
export function settleCard(pen: Pen, layout: SheetLayout, band: BandPlace, block: Block, figures: BandFigures, voids: VoidEnds): Card {
  const hasSign = voids.boost || voids.cut;
  const sizes = formsOf(figures, voids, { text: WIDEST_NOW, isVoid: false }).map((lines): CardSize => ({
    width: Math.ceil(Math.max(...lines.map((line) => lineWidth(pen, line, hasSign)))) + 2 * PAD.x,
    height: Math.ceil(lines.length * LINE) + 2 * PAD.y,
  }));
  const written = showsValues(band, true) ? bandValues(band, block).map((value) => value.box) : [];
  return { figures, voids, place: placeCard(layout, band, sizes, written) };
}

/** Draws a settled card with the gain as it stands. */
export function drawCard(pen: Pen, { figures, voids, place }: Card, now: number | undefined, isVoid: boolean): void {
  if (!place) return;
  const { inks } = pen;
  const { box, form } = place;
  const hasSign = voids.boost || voids.cut;
  pen.box((box.left + box.right) / 2, (box.top + box.bottom) / 2, box.right - box.left, box.bottom - box.top, { fill: inks.card, stroke: inks.accent, lineWidth: 1.4, radius: 6 });
  const lines = formsOf(figures, voids, now === undefined ? null : { text: `now ${formatDb(now)}`, isVoid })[form];
  lines.forEach((line, i) => {
    const y = box.top + PAD.y + (i + 0.5) * LINE;
    let left = (box.left + box.right - lineWidth(pen, line, hasSign)) / 2;
    if (line.title !== "") {
      if (hasSign) pen.warningSign(left + 5, y);
      pen.text(line.title, left + (hasSign ? SIGN_WIDTH : 0), y, { size: TITLE_SIZE, isBold: true, color: inks.accent });
      left += titleWidth(pen, line.title, hasSign) + PAD.x;
    }
    if (line.runs.length > 0) drawRuns(pen, line.runs, left + widthOfRuns(pen, line.runs, SIZE) / 2, y, { size: SIZE });
  });
}

import type { BandFigures } from "../../../core/analysis/bands.ts";
import { BLOCKS } from "../../../core/blocks/index.ts";
import type { BandPlace } from "../../../core/geometry/band-place.ts";
import { bandValues } from "../../../core/geometry/values.ts";
import { partsOf, type Block } from "../../../core/model/project.ts";
import { bandFigureTexts, fittedLabel, peakForms, type VoidEnds } from "../figure-texts.ts";
import { figureLine } from "./figure-line.ts";
import { SIGN_WIDTH, type Pen } from "./pen.ts";
import { drawRuns, widthOfRuns } from "./runs.ts";
import { drawDrawing, drawValues, lineOf } from "./symbols.ts";

export interface BandState {
  readonly isSelected: boolean;
  /** Ends at which the figures mean nothing: they are struck. */
  readonly voids: VoidEnds;
  /** The band itself is marked: the board oscillates with this slider at an end, as it may not as it stands. */
  readonly isMarked: boolean;
}

/** All of a band that stays while its slider moves: leader, track, leg, values and figures, struck where they are void. */
export function drawBand(pen: Pen, place: BandPlace, block: Block, figures: BandFigures | undefined, state: BandState): void {
  const { isSelected } = state;
  drawLeader(pen, place, isSelected);
  drawTrack(pen, place);
  const parts = partsOf(block);
  const { drawing } = BLOCKS[block.kind];
  drawDrawing(pen, drawing, { x: place.legX, y: place.legY, grid: place.legGrid }, (role) => parts[role] !== undefined);
  if (place.hasValues) drawValues(pen, bandValues(place, block));
  drawFigures(pen, place, block, figures, state);
}

/** The ground of a selected band: under every band, since labels of neighbours may reach into it. */
export function drawBandGround(pen: Pen, { box }: BandPlace): void {
  pen.box((box.left + box.right) / 2, (box.top + box.bottom) / 2, box.right - box.left, box.bottom - box.top, { fill: pen.inks.accentWash, stroke: pen.inks.accent, lineWidth: 1.4, radius: 8 });
}

/** A dotted line from the ruling at the band's own frequency to where the band had room. */
function drawLeader(pen: Pen, place: BandPlace, isSelected: boolean): void {
  const { trueX, x, leaderTop, boostRailY } = place;
  if (trueX === null || place.isLoose) return;
  const turn = Math.min(boostRailY - 8, leaderTop + 14);
  pen.line([trueX, leaderTop, trueX, turn, x, boostRailY - 4], isSelected ? pen.inks.accent : pen.inks.ruleStrong, 1, [1.5, 3]);
  pen.dot(trueX, leaderTop, 1.8, isSelected ? pen.inks.accent : pen.inks.ruleStrong);
}

/** The slider's resistance between both sides of the bus. The lead to its boost end crosses the cut rail unjoined. */
function drawTrack(pen: Pen, place: BandPlace): void {
  const { inks } = pen;
  const { x, returnX, trackTop, trackBottom, boostRailY, cutRailY, isLoose } = place;
  const line = place.slot < 44 ? 1 : Math.max(1.25, lineOf(place.legGrid));
  if (isLoose) pen.line([x, trackTop - 6, x, trackTop], inks.ink, line);
  else {
    pen.line([x, boostRailY, x, trackTop], inks.ink, line);
    pen.line([returnX, cutRailY, returnX, trackBottom + 3, x, trackBottom + 3, x, trackBottom], inks.ink, line);
    pen.dot(x, boostRailY, 2.2, inks.ink);
    pen.dot(returnX, cutRailY, 2.2, inks.ink);
  }
  const half = Math.max(2, place.knobHalf * 0.34);
  pen.box(x, (trackTop + trackBottom) / 2, half * 2, trackBottom - trackTop, { fill: inks.card, stroke: inks.ink, lineWidth: line });
  if (place.slot >= 44) {
    for (let step = 0; step <= 4; step++) {
      const y = trackTop + (step * (trackBottom - trackTop)) / 4;
      pen.line([x - half - (step === 2 ? 6 : 4), y, x - half - 2, y], step === 2 ? inks.ink : inks.ruleStrong, 1);
    }
  }
}

function drawFigures(pen: Pen, place: BandPlace, block: Block, figures: BandFigures | undefined, { isSelected, voids, isMarked }: BandState): void {
  const { inks } = pen;
  const isSlim = place.detail === "slim";
  const size = place.detail === "full" ? 12.5 : isSlim ? 10.5 : 11.5;
  const sign = isMarked ? SIGN_WIDTH : 0;
  // Slim labels share two lines, so each may be nearly two slots wide.
  const room = (isSlim ? place.slot * 1.8 : place.slot - 4) - sign;
  const over = isSelected ? {} : { halo: inks.paper };
  const label = fittedLabel(block.label ?? block.id, (text) => pen.widthOf(text, size, true) <= room);
  const labelY = figureLine(place, place.isStaggered ? "staggered" : "label");
  pen.text(label, place.x + sign / 2, labelY, { size, isBold: true, align: "center", color: isSelected ? inks.accent : inks.ink, ...over });
  if (isMarked) pen.warningSign(place.x - pen.widthOf(label, size, true) / 2 - 2, labelY);
  if (!figures) return;
  const texts = bandFigureTexts(figures);
  const write = (text: string, line: Parameters<typeof figureLine>[1], textSize: number, color: string, isStruck: boolean): void =>
    pen.text(text, place.x, figureLine(place, line), { align: "center", size: textSize, color: isStruck ? inks.inkSoft : color, isStruck, ...over });
  if (place.detail === "full") {
    write(texts.boost, "peak", 11.5, inks.boostText, voids.boost);
    write(texts.cut, "cut", 11.5, inks.cutText, voids.cut);
    write(texts.centre, "centre", 11, inks.inkSoft, voids.boost);
    write(texts.quality, "quality", 11, inks.inkSoft, voids.boost);
  } else if (place.figureRoom > 0) {
    const small = isSlim ? 10 : 11;
    const forms = peakForms(texts, voids);
    const runs = forms.find((form) => widthOfRuns(pen, form, small) <= place.figureRoom - 2) ?? forms.at(-1)!;
    drawRuns(pen, runs, place.x, figureLine(place, "peak"), { size: small, ...over });
    if (place.detail === "medium") {
      const fitted = (text: string): number => [11, 10.5, 10].find((s) => pen.widthOf(text, s) <= place.slot - 2) ?? 10;
      write(texts.centre, "centre", fitted(texts.centre), inks.inkSoft, voids.boost);
      write(texts.quality, "quality", fitted(texts.quality), inks.inkSoft, voids.boost);
    }
  }
}

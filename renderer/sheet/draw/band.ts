import type { BandFigures } from "../../../core/analysis/bands.ts";
import { BLOCKS } from "../../../core/blocks/index.ts";
import type { BandPlace } from "../../../core/geometry/band-place.ts";
import { bandValues } from "../../../core/geometry/values.ts";
import { partsOf, type Block } from "../../../core/model/project.ts";
import { bandFigureTexts, fittedLabel } from "../figure-texts.ts";
import { figureLine } from "./figure-line.ts";
import { drawDrawing, drawValues, lineOf } from "./symbols.ts";
import type { Pen } from "./pen.ts";

/** All of a band that stays while its slider moves: leader, track, leg, values and figures, struck where they are void. */
export function drawBand(pen: Pen, place: BandPlace, block: Block, figures: BandFigures | undefined, isSelected: boolean, isVoid: boolean): void {
  const { inks } = pen;
  if (isSelected) {
    const { box } = place;
    pen.box((box.left + box.right) / 2, (box.top + box.bottom) / 2, box.right - box.left, box.bottom - box.top, { fill: inks.accentWash, stroke: inks.accent, lineWidth: 1.4, radius: 8 });
  }
  drawLeader(pen, place, isSelected);
  drawTrack(pen, place);
  const parts = partsOf(block);
  const { drawing } = BLOCKS[block.kind];
  drawDrawing(pen, drawing, { x: place.legX, y: place.legY, grid: place.legGrid }, (role) => parts[role] !== undefined);
  if (place.hasValues) drawValues(pen, bandValues(place, block));
  drawFigures(pen, place, block, figures, isSelected, isVoid);
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

function drawFigures(pen: Pen, place: BandPlace, block: Block, figures: BandFigures | undefined, isSelected: boolean, isVoid: boolean): void {
  const { inks } = pen;
  const isSlim = place.detail === "slim";
  const size = place.detail === "full" ? 12.5 : isSlim ? 10.5 : 11.5;
  // Slim labels share two lines, so each may be nearly two slots wide.
  const room = isSlim ? place.slot * 1.8 : place.slot - 4;
  const over = isSelected ? {} : { halo: inks.paper };
  const label = fittedLabel(block.label ?? block.id, (text) => pen.widthOf(text, size, true) <= room);
  pen.text(label, place.x, figureLine(place, place.isStaggered ? "staggered" : "label"), { size, isBold: true, align: "center", color: isSelected ? inks.accent : inks.ink, ...over });
  if (!figures) return;
  const texts = bandFigureTexts(figures);
  const style = { align: "center", isStruck: isVoid, ...over } as const;
  if (place.detail === "full") {
    pen.text(texts.boost, place.x, figureLine(place, "peak"), { ...style, size: 11.5, color: isVoid ? inks.inkSoft : inks.boostText });
    pen.text(texts.cut, place.x, figureLine(place, "cut"), { ...style, size: 11.5, color: isVoid ? inks.inkSoft : inks.cutText });
    pen.text(texts.centre, place.x, figureLine(place, "centre"), { ...style, color: inks.inkSoft });
    pen.text(texts.quality, place.x, figureLine(place, "quality"), { ...style, color: inks.inkSoft });
  } else {
    const small = isSlim ? 10 : 11;
    const short = [texts.barePeak, texts.shortPeak].find((text) => pen.widthOf(text, small) <= place.slot - 2) ?? texts.shortPeak.slice(1);
    pen.text(short, place.x, figureLine(place, "peak"), { ...style, size: small, color: isVoid ? inks.inkSoft : inks.ink });
  }
}

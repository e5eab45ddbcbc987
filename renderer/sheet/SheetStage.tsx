import { memo, useCallback, useMemo, type RefObject } from "react";
import { Layer, Stage } from "react-konva";
import { useStore } from "zustand";
import type { ChainPlace } from "../../core/geometry/chain.ts";
import type { SheetLayout } from "../../core/geometry/layout.ts";
import { levelSpan, phaseSpan, type LevelSpan } from "../../core/geometry/levels.ts";
import { readCurve } from "../../core/geometry/reading.ts";
import type { Box } from "../../core/geometry/units.ts";
import { showsValues } from "../../core/geometry/values.ts";
import type { Block, Project } from "../../core/model/project.ts";
import { BandScene } from "./BandScene.tsx";
import { drawBandGround } from "./draw/band.ts";
import { drawChainBlock, drawRails, drawReference, drawWires } from "./draw/chain.ts";
import { drawCard, settleCard, type Card } from "./draw/card.ts";
import { drawCurves, type CurveScene } from "./draw/curves.ts";
import { drawChosenValues, drawHeldTag, drawKnob } from "./draw/live.ts";
import { drawCursor, drawMarquee } from "./draw/overlay.ts";
import { drawPaper } from "./draw/paper.ts";
import type { Pen } from "./draw/pen.ts";
import { BOTH_ENDS_VOID, NO_END_VOID, voidEndsOf } from "./figure-texts.ts";
import type { OverlayStore } from "./overlay-store.ts";
import { Scene } from "./Scene.tsx";
import type { SheetProps, SheetResults } from "./sheet-props.ts";
import type { Inks } from "./tokens.ts";

interface SheetStageProps {
  readonly layout: SheetLayout;
  /** As laid out: slider positions may be older than those of `blocks`. */
  readonly drawn: Project;
  readonly blocks: ReadonlyMap<string, Block>;
  readonly results: SheetResults | null;
  readonly selection: readonly string[];
  readonly held: string | null;
  readonly inks: Inks;
  readonly ratio: number;
  readonly isPhaseShown: boolean;
  readonly isVoid: boolean;
  readonly unstableEnds: NonNullable<SheetProps["unstableEnds"]>;
  readonly overlay: OverlayStore;
  /** Takes where the selected band's card lies, for hands that point at it. */
  readonly cardPlace: RefObject<Box | null>;
}

/**
 * Four layers, from what changes least to what changes most: the ruling, the board, the curves and knobs, the cursor.
 * A knob that moves redraws the third alone.
 */
export function SheetStage(props: SheetStageProps) {
  const { layout, drawn, blocks, results, selection, held, inks, ratio, isPhaseShown, isVoid, unstableEnds, overlay, cardPlace } = props;
  const { frame } = layout;
  const figures = results?.figures;
  const { levels, phase } = useSpans(results, isPhaseShown);

  const paper = useCallback(
    (pen: Pen) => drawPaper(pen, frame, levels, phase),
    [frame, levels, phase],
  );
  const hasFigures = figures !== undefined && figures.size > 0;
  const rails = useCallback(
    (pen: Pen) => {
      const { board, ruling } = frame;
      // The rails come from the stage without a gap, the captions stand in the margin.
      pen.clipped(0, board.top, ruling.right, board.bottom, () => drawRails(pen, layout, hasFigures));
      pen.clipped(0, board.top, frame.width, board.bottom, () => {
        drawWires(pen, layout);
        drawReference(pen, layout, drawn.supply);
      });
    },
    [frame, layout, hasFigures, drawn.supply],
  );
  const selected = useMemo(() => new Set(selection), [selection]);
  const grounds = useCallback(
    (pen: Pen) => {
      const { board, ruling } = frame;
      pen.clipped(ruling.left, board.top, ruling.right, board.bottom, () => {
        for (const place of layout.bands) if (selected.has(place.id)) drawBandGround(pen, place);
      });
    },
    [frame, layout, selected],
  );
  const drawnBlocks = useMemo(() => new Map(drawn.blocks.map((block) => [block.id, block])), [drawn]);
  const ordered = useMemo(() => layout.bands.toSorted((a, b) => Number(selected.has(a.id)) - Number(selected.has(b.id))), [layout, selected]);
  const voidEnds = useMemo(() => voidEndsOf(unstableEnds), [unstableEnds]);
  const chosen = selection.length === 1 ? layout.bands.find((b) => b.id === selection[0]) : undefined;
  const chosenFigures = chosen && figures?.get(chosen.id);
  const chosenVoids = isVoid ? BOTH_ENDS_VOID : ((chosen && voidEnds.get(chosen.id)) ?? NO_END_VOID);
  const chosenDrawn = chosen && drawnBlocks.get(chosen.id);
  /** Where the card goes is settled by the first frame that draws it, since only a canvas knows how wide letters are. */
  const card = useMemo((): { settled: Card | null; settle: (pen: Pen) => Card } | null => {
    if (!chosen || !chosenFigures || !chosenDrawn || chosen.detail === "full") return null;
    return { settled: null, settle: (pen) => settleCard(pen, layout, chosen, chosenDrawn, chosenFigures, chosenVoids) };
  }, [layout, chosen, chosenDrawn, chosenFigures, chosenVoids]);

  const chosenBlock = chosen && blocks.get(chosen.id);
  const scene = useMemo((): CurveScene => {
    const aloneEnd = (chosenBlock?.slider?.position ?? 0.5) < 0.5 ? "cut" : "boost";
    return {
      response: frame.response, ruling: frame.ruling, levels, phase, total: results?.total ?? null, alone: results?.alone ?? null, aloneEnd,
      aloneLabel: chosenBlock?.label ?? chosenBlock?.id ?? "", aloneFigures: chosenFigures ?? null, ghost: results?.ghost ?? null, isVoid, isAloneVoid: chosenVoids[aloneEnd],
    };
  }, [frame, levels, phase, results, chosenBlock, chosenFigures, chosenVoids, isVoid]);

  const live = useCallback(
    (pen: Pen) => {
      drawCurves(pen, scene);
      const { ruling, board } = frame;
      pen.clipped(ruling.left, board.top, ruling.right, board.bottom, () => {
        for (const place of layout.bands) {
          if (place.box.right < ruling.left || place.box.left > ruling.right) continue;
          drawKnob(pen, place, blocks.get(place.id)?.slider?.position ?? 0.5, results?.liveGain.get(place.id), { isHeld: place.id === held, isSelected: selected.has(place.id), isVoid });
        }
        if (chosen && chosenBlock && !chosen.hasValues && showsValues(chosen, true)) drawChosenValues(pen, chosen, chosenBlock);
      });
      pen.clipped(ruling.left, board.top, frame.width, board.bottom, () => {
        if (card && chosen) drawCard(pen, (card.settled ??= card.settle(pen)), results?.liveGain.get(chosen.id), isVoid);
        cardPlace.current = card?.settled?.place?.box ?? null;
        const grip = held === null ? undefined : layout.bands.find((b) => b.id === held);
        // The card tells the same, and stays where it is.
        if (grip && !card?.settled?.place) drawHeldTag(pen, layout, grip, blocks.get(grip.id)?.slider?.position ?? 0.5, results?.liveGain.get(grip.id));
      });
    },
    [layout, frame, scene, results, blocks, selected, chosen, chosenBlock, card, cardPlace, held, isVoid],
  );

  return (
    <Stage key={ratio} width={frame.width} height={frame.height} listening={false}>
      <Layer listening={false}>
        <Scene inks={inks} ratio={ratio} draw={paper} />
      </Layer>
      <Layer listening={false}>
        {layout.chain.map((place) => (
          <ChainScene key={place.id} inks={inks} ratio={ratio} layout={layout} place={place} isSelected={selected.has(place.id)} />
        ))}
        <Scene inks={inks} ratio={ratio} draw={grounds} />
        <Scene inks={inks} ratio={ratio} draw={rails} />
        {ordered.map((place) => (
          <BandScene
            key={place.id} inks={inks} ratio={ratio} frame={frame} place={place} block={drawnBlocks.get(place.id)!}
            figures={figures?.get(place.id)} isSelected={selected.has(place.id)}
            voids={isVoid ? BOTH_ENDS_VOID : (voidEnds.get(place.id) ?? NO_END_VOID)} isMarked={voidEnds.has(place.id)}
          />
        ))}
      </Layer>
      <Layer listening={false}>
        <Scene inks={inks} ratio={ratio} draw={live} />
      </Layer>
      <OverlayLayer layout={layout} scene={scene} inks={inks} ratio={ratio} overlay={overlay} />
    </Stage>
  );
}

/** The axes' spans, the same objects as long as their ends are the same. */
function useSpans(results: SheetResults | null, isPhaseShown: boolean): { levels: LevelSpan; phase: LevelSpan | null } {
  const peaks = useMemo(() => (results ? [...results.figures.values()].flatMap((f) => [f.boost.peak, f.cut.peak]) : []), [results]);
  const { top, bottom } = levelSpan(peaks, results ? [results.total.gain, ...(results.alone ? [results.alone.gain] : [])] : []);
  const levels = useMemo(() => ({ top, bottom }), [top, bottom]);
  const most = results && isPhaseShown ? phaseSpan(results.total.phase).top : null;
  const phase = useMemo(() => (most === null ? null : { top: most, bottom: -most }), [most]);
  return { levels, phase };
}

interface ChainSceneProps {
  readonly inks: Inks;
  readonly ratio: number;
  readonly layout: SheetLayout;
  readonly place: ChainPlace;
  readonly isSelected: boolean;
}

const ChainScene = memo(function ChainScene({ inks, ratio, layout, place, isSelected }: ChainSceneProps) {
  const { board, width } = layout.frame;
  const draw = useCallback(
    (pen: Pen) => pen.clipped(0, board.top, width, board.bottom, () => drawChainBlock(pen, place, isSelected)),
    [board, width, place, isSelected],
  );
  return <Scene inks={inks} ratio={ratio} draw={draw} />;
});

interface OverlayLayerProps {
  readonly layout: SheetLayout;
  readonly scene: CurveScene;
  readonly inks: Inks;
  readonly ratio: number;
  readonly overlay: OverlayStore;
}

function OverlayLayer({ layout, scene, inks, ratio, overlay }: OverlayLayerProps) {
  const { cursor, marquee } = useStore(overlay);
  const draw = useCallback(
    (pen: Pen) => {
      if (marquee) drawMarquee(pen, marquee);
      const reading = cursor !== null && scene.total ? readCurve(scene.total, cursor) : null;
      if (cursor !== null && reading) drawCursor(pen, layout.frame, scene, { frequency: cursor, ...reading });
    },
    [layout, scene, cursor, marquee],
  );
  return (
    <Layer listening={false}>
      <Scene inks={inks} ratio={ratio} draw={draw} />
    </Layer>
  );
}

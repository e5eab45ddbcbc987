import { memo, useCallback } from "react";
import type { BandFigures } from "../../core/analysis/bands.ts";
import type { BandPlace } from "../../core/geometry/band-place.ts";
import type { Frame } from "../../core/geometry/frame.ts";
import type { Block } from "../../core/model/project.ts";
import { drawBand } from "./draw/band.ts";
import type { Pen } from "./draw/pen.ts";
import type { VoidEnds } from "./figure-texts.ts";
import { Scene } from "./Scene.tsx";
import type { Inks } from "./tokens.ts";

interface BandSceneProps {
  readonly inks: Inks;
  readonly ratio: number;
  readonly frame: Frame;
  readonly place: BandPlace;
  readonly block: Block;
  readonly figures: BandFigures | undefined;
  readonly isSelected: boolean;
  readonly voids: VoidEnds;
  readonly isMarked: boolean;
}

/** A band but for its knob: drawn again only when its parts, its place or its figures change. */
export const BandScene = memo(function BandScene({ inks, ratio, frame, place, block, figures, isSelected, voids, isMarked }: BandSceneProps) {
  const draw = useCallback(
    (pen: Pen) => {
      const { ruling, board } = frame;
      if (place.box.right < ruling.left || place.box.left > ruling.right) return;
      pen.clipped(ruling.left, board.top, ruling.right, board.bottom, () => drawBand(pen, place, block, figures, { isSelected, voids, isMarked }));
    },
    [frame, place, block, figures, isSelected, voids, isMarked],
  );
  return <Scene inks={inks} ratio={ratio} draw={draw} />;
});

import type { Context } from "konva/lib/Context.js";
import { memo } from "react";
import { Shape } from "react-konva";
import { Pen } from "./draw/pen.ts";
import type { Inks } from "./tokens.ts";

export interface SceneProps {
  readonly inks: Inks;
  readonly ratio: number;
  /** Kept between renders while nothing that it draws has changed: a new one redraws the layer. */
  readonly draw: (pen: Pen) => void;
}

/** One drawing on a layer. */
export const Scene = memo(function Scene({ inks, ratio, draw }: SceneProps) {
  // Konva's name for the canvas context that it wraps.
  // oxlint-disable-next-line no-underscore-dangle
  return <Shape listening={false} perfectDrawEnabled={false} sceneFunc={(context: Context) => draw(new Pen(context._context, inks, ratio))} />;
});

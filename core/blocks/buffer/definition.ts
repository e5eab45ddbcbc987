import type { BlockDefinition } from "../definition.ts";
import { bufferDrawing } from "./drawing.ts";

export const buffer: BlockDefinition = {
  kind: "buffer",
  label: "Buffer",
  place: "chain",
  ports: ["in", "out"],
  roles: [],
  hasSlider: false,
  hasOpAmp: true,
  drawing: bufferDrawing,
  expand(x) {
    x.opAmp(x.port("in"), x.port("out"), x.port("out"));
  },
  laws: [],
};

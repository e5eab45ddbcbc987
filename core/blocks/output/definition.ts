import { capacitorRole, resistorRole, type BlockDefinition } from "../definition.ts";
import { outputDrawing } from "./drawing.ts";

export const output: BlockDefinition = {
  kind: "output",
  label: "Output",
  place: "load",
  ports: ["in"],
  roles: [
    resistorRole("seriesR", "series R", 100),
    capacitorRole("couplingC", "coupling C", 10e-6, { isOptional: true, tolerance: 0.2 }),
    resistorRole("loadR", "load R", 10e3),
  ],
  hasSlider: false,
  hasOpAmp: false,
  drawing: outputDrawing,
  expand(x) {
    const inner = x.node("series");
    const load = x.node("load");
    x.place("seriesR", x.port("in"), inner);
    x.placeOrWire("couplingC", inner, load);
    x.place("loadR", load, x.ground);
  },
  laws: [],
};

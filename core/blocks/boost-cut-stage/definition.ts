import { capacitorRole, resistorRole, type BlockDefinition } from "../definition.ts";
import { stageDrawing } from "./drawing.ts";

export const boostCutStage: BlockDefinition = {
  kind: "boost-cut-stage",
  label: "Boost/cut stage",
  place: "chain",
  ports: ["in", "out", "bus"],
  roles: [
    resistorRole("inputR", "input R", 3300),
    resistorRole("feedbackR", "feedback R", 3300),
    capacitorRole("feedbackC", "feedback C", 22e-12, { isOptional: true }),
  ],
  hasSlider: false,
  hasOpAmp: true,
  drawing: stageDrawing,
  expand(x) {
    x.place("inputR", x.port("in"), x.bus.cut);
    x.place("feedbackR", x.port("out"), x.bus.boost);
    x.place("feedbackC", x.port("out"), x.bus.boost);
    x.opAmp(x.bus.cut, x.bus.boost, x.port("out"));
  },
  laws: [],
};

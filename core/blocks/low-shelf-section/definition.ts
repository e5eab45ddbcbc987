import { placeGyrator } from "../gyrator-section/circuit.ts";
import { gyratorLeg } from "../gyrator-section/equations.ts";
import { capacitorRole, resistorRole, type BlockDefinition } from "../definition.ts";
import { lowShelfDrawing } from "./drawing.ts";

export const lowShelfSection: BlockDefinition = {
  kind: "low-shelf-section",
  label: "Low shelf section",
  place: "band",
  ports: ["bus"],
  roles: [
    resistorRole("seriesR", "series R", 1000),
    capacitorRole("gyratorC", "gyrator C", 47e-9),
    resistorRole("gyratorR", "gyrator R", 100e3),
    capacitorRole("blockingC", "blocking C", 47e-6, { isOptional: true, tolerance: 0.2 }),
  ],
  hasSlider: true,
  hasOpAmp: true,
  drawing: lowShelfDrawing,
  expand: (x) => placeGyrator(x, "blockingC"),
  leg: (values, opAmp) => gyratorLeg(values.blockingC, values, opAmp),
  shape: "low-shelf",
  laws: [
    { symbol: "L", label: "inductance", quantity: "inductance", expression: "seriesR * gyratorR * gyratorC" },
    { symbol: "fc", label: "leg corner", quantity: "frequency", expression: "seriesR / (2 * pi * L)" },
    { symbol: "G", label: "isolated boost", quantity: "plain", expression: "1 + feedbackR / seriesR" },
  ],
};

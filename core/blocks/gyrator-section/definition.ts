import { capacitorRole, resistorRole, type BlockDefinition } from "../definition.ts";
import { placeGyrator } from "./circuit.ts";
import { gyratorLeg } from "./equations.ts";
import { gyratorDrawing } from "./drawing.ts";

export const gyratorSection: BlockDefinition = {
  kind: "gyrator-section",
  label: "Gyrator section",
  place: "band",
  ports: ["bus"],
  roles: [
    capacitorRole("seriesC", "series C", 220e-9),
    resistorRole("seriesR", "series R", 470),
    capacitorRole("gyratorC", "gyrator C", 3.9e-9),
    resistorRole("gyratorR", "gyrator R", 68e3),
  ],
  hasSlider: true,
  hasOpAmp: true,
  drawing: gyratorDrawing,
  expand: (x) => placeGyrator(x, "seriesC"),
  leg: (values, opAmp) => gyratorLeg(values.seriesC, values, opAmp),
  shape: "resonance",
  laws: [
    { symbol: "L", label: "inductance", quantity: "inductance", expression: "seriesR * gyratorR * gyratorC" },
    { symbol: "f0", label: "leg resonance", quantity: "frequency", expression: "1 / (2 * pi * sqrt(L * seriesC))" },
    { symbol: "Q", label: "leg Q", quantity: "plain", expression: "sqrt(L / seriesC) / seriesR" },
    { symbol: "G", label: "isolated boost", quantity: "plain", expression: "1 + feedbackR / seriesR" },
  ],
};

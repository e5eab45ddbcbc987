import { capacitorRole, resistorRole, type BlockDefinition } from "../definition.ts";
import { seriesLeg } from "../series-leg.ts";
import { inductorDrawing } from "./drawing.ts";

export const inductorSection: BlockDefinition = {
  kind: "inductor-section",
  label: "Inductor section",
  place: "band",
  ports: ["bus"],
  roles: [
    capacitorRole("seriesC", "series C", 220e-9),
    resistorRole("seriesR", "series R", 390),
    { role: "inductor", label: "inductor", quantity: "inductance", isOptional: false, value: 0.12, tolerance: 0.05 },
  ],
  hasSlider: true,
  hasOpAmp: false,
  drawing: inductorDrawing,
  expand(x) {
    const c = x.node("c");
    const l = x.node("l");
    x.place("seriesC", x.wiper, c);
    x.place("seriesR", c, l);
    x.place("inductor", l, x.ground);
  },
  leg: (values) => seriesLeg({ c: values.seriesC, r: values.seriesR, l: values.inductor, windingR: values.windingR, selfC: values.selfC }),
  shape: "resonance",
  laws: [
    { symbol: "L", label: "inductance", quantity: "inductance", expression: "inductor" },
    { symbol: "f0", label: "leg resonance", quantity: "frequency", expression: "1 / (2 * pi * sqrt(L * seriesC))" },
    { symbol: "Q", label: "leg Q", quantity: "plain", expression: "sqrt(L / seriesC) / (seriesR + windingR)" },
    { symbol: "G", label: "isolated boost", quantity: "plain", expression: "1 + feedbackR / (seriesR + windingR)" },
  ],
};

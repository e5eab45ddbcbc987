import { capacitorRole, resistorRole, type BlockDefinition } from "../definition.ts";
import { seriesLeg } from "../series-leg.ts";
import { levelDrawing } from "./drawing.ts";

export const levelSection: BlockDefinition = {
  kind: "level-section",
  label: "Level section",
  place: "band",
  ports: ["bus"],
  roles: [resistorRole("seriesR", "series R", 680), capacitorRole("blockingC", "blocking C", 47e-6, { isOptional: true, tolerance: 0.2 })],
  hasSlider: true,
  hasOpAmp: false,
  drawing: levelDrawing,
  expand(x) {
    const c = x.node("c");
    x.placeOrWire("blockingC", x.wiper, c);
    x.place("seriesR", c, x.ground);
  },
  leg: (values) => seriesLeg({ c: values.blockingC, r: values.seriesR }),
  shape: "level",
  laws: [{ symbol: "G", label: "isolated boost", quantity: "plain", expression: "1 + feedbackR / seriesR" }],
};

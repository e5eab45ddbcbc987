import { capacitorRole, resistorRole, type BlockDefinition } from "../definition.ts";
import { seriesLeg } from "../series-leg.ts";
import { shelfDrawing } from "./drawing.ts";

export const shelfSection: BlockDefinition = {
  kind: "shelf-section",
  label: "High shelf section",
  place: "band",
  ports: ["bus"],
  roles: [capacitorRole("seriesC", "series C", 10e-9), resistorRole("seriesR", "series R", 470)],
  hasSlider: true,
  hasOpAmp: false,
  drawing: shelfDrawing,
  expand(x) {
    const c = x.node("c");
    x.place("seriesC", x.wiper, c);
    x.place("seriesR", c, x.ground);
  },
  leg: (values) => seriesLeg({ c: values.seriesC, r: values.seriesR }),
  shape: "high-shelf",
  laws: [
    { symbol: "fc", label: "leg corner", quantity: "frequency", expression: "1 / (2 * pi * seriesC * seriesR)" },
    { symbol: "G", label: "isolated boost", quantity: "plain", expression: "1 + feedbackR / seriesR" },
  ],
};

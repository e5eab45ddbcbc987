import { capacitorRole, resistorRole, type BlockDefinition } from "../definition.ts";
import { inputDrawing } from "./drawing.ts";

export const input: BlockDefinition = {
  kind: "input",
  label: "Input",
  place: "source",
  ports: ["out"],
  roles: [
    resistorRole("sourceR", "source R", 100),
    capacitorRole("couplingC", "coupling C", 4.7e-6, { isOptional: true, tolerance: 0.2 }),
    resistorRole("loadR", "load R", 100e3, { isOptional: true }),
  ],
  hasSlider: false,
  hasOpAmp: false,
  drawing: inputDrawing,
  expand(x) {
    const emf = x.node("emf");
    const source = x.node("source");
    x.emf(emf);
    x.place("sourceR", emf, source);
    x.placeOrWire("couplingC", source, x.port("out"));
    x.place("loadR", x.port("out"), x.reference);
  },
  laws: [],
};

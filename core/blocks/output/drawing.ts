import { partDown, type Drawing } from "../drawing.ts";

/** The in at (0, 0); seriesR, couplingC or a wire, then the out terminal with loadR across it. */
export const outputDrawing: Drawing = {
  symbols: [
    partDown("resistor", "seriesR", 4, 5),
    partDown("capacitor", "couplingC", 4, 12, "wire"),
    { symbol: "terminal", x: 12, y: 16.5 },
    partDown("resistor", "loadR", 4, 22),
    { symbol: "ground", x: 4, y: 26 },
  ],
  wires: [{ points: [0, 0, 4, 0, 4, 1] }, { points: [4, 15, 4, 18] }, { points: [4, 16.5, 11.2, 16.5] }],
  joints: [{ x: 4, y: 16.5 }],
  left: 0, right: 16, top: -2, bottom: 29,
};

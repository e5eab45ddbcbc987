import { partDown, type Drawing } from "../drawing.ts";

/** From the wiper at (0, 0) straight down: blockingC or a wire, seriesR, ground. */
export const levelDrawing: Drawing = {
  symbols: [partDown("capacitor", "blockingC", 0, 3, "wire"), partDown("resistor", "seriesR", 0, 10), { symbol: "ground", x: 0, y: 14 }],
  wires: [],
  joints: [],
  left: -2, right: 9, top: 0, bottom: 17,
};

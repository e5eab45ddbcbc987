import { partDown, type Drawing } from "../drawing.ts";

/** From the wiper at (0, 0): seriesC to a; seriesR from a to the output; gyratorC from a to the + input; gyratorR on to the reference. */
export const gyratorDrawing: Drawing = {
  symbols: [
    partDown("capacitor", "seriesC", 0, 3),
    partDown("resistor", "seriesR", -10, 12),
    partDown("capacitor", "gyratorC", 0, 11),
    { symbol: "amplifier", x: -9, y: 19, points: "left", length: 6, width: 8, first: "+" },
    partDown("resistor", "gyratorR", 0, 22),
    { symbol: "reference", x: 0, y: 26 },
  ],
  wires: [
    { points: [0, 6, 0, 8] },
    { points: [0, 7, -10, 7, -10, 8] },
    { points: [-10, 16, -10, 24, -2, 24, -2, 21, -3, 21] },
    { points: [-9, 19, -10, 19] },
    { points: [0, 14, 0, 18] },
    { points: [0, 17, -3, 17] },
  ],
  joints: [{ x: 0, y: 7 }, { x: -10, y: 19 }, { x: 0, y: 17 }],
  left: -11.5, right: 9, top: 0, bottom: 29,
};

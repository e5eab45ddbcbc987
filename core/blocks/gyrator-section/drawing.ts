import { partDown, type Drawing } from "../drawing.ts";

/** From the wiper at (0, 0): seriesC to a; seriesR from a to the output; gyratorC from a to the + input; gyratorR on to the reference. */
export const gyratorDrawing: Drawing = {
  symbols: [
    partDown("capacitor", "seriesC", 0, 3),
    { ...partDown("resistor", "seriesR", -10, 12), value: { x: -8.6, y: 14.3, align: "left" } },
    partDown("capacitor", "gyratorC", 0, 11),
    { symbol: "amplifier", x: -9, y: 20, points: "left", length: 6, width: 8, first: "+" },
    partDown("resistor", "gyratorR", 0, 23),
    { symbol: "reference", x: 0, y: 27 },
  ],
  wires: [
    { points: [0, 6, 0, 8] },
    { points: [0, 7, -10, 7, -10, 8] },
    { points: [-10, 16, -10, 25, -2, 25, -2, 22, -3, 22] },
    { points: [-9, 20, -10, 20] },
    { points: [0, 14, 0, 19] },
    { points: [0, 18, -3, 18] },
  ],
  joints: [{ x: 0, y: 7 }, { x: -10, y: 20 }, { x: 0, y: 18 }],
  left: -11.5, right: 9, top: 0, bottom: 30,
};

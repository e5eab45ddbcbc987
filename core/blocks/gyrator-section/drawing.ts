import { partDown, type Drawing } from "../drawing.ts";

/** From the wiper at (0, 0): seriesC to a; seriesR from a to the output; gyratorC from a to the + input; gyratorR on to the reference. */
export const gyratorDrawing: Drawing = {
  symbols: [
    partDown("capacitor", "seriesC", 0, 3),
    { ...partDown("resistor", "seriesR", -10, 12), value: { x: -9.2, y: 15.7, align: "left" } },
    partDown("capacitor", "gyratorC", 0, 11),
    { symbol: "amplifier", x: -9, y: 21.5, points: "left", length: 6, width: 8, first: "+" },
    partDown("resistor", "gyratorR", 0, 24.5),
    { symbol: "reference", x: 0, y: 28.5 },
  ],
  wires: [
    { points: [0, 6, 0, 8] },
    { points: [0, 7, -10, 7, -10, 8] },
    { points: [-10, 16, -10, 26.5, -2, 26.5, -2, 23.5, -3, 23.5] },
    { points: [-9, 21.5, -10, 21.5] },
    { points: [0, 14, 0, 20.5] },
    { points: [0, 19.5, -3, 19.5] },
  ],
  joints: [{ x: 0, y: 7 }, { x: -10, y: 21.5 }, { x: 0, y: 19.5 }],
  left: -11.5, right: 9, top: 0, bottom: 31.5,
};

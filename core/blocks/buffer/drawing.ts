import type { Drawing } from "../drawing.ts";

/** A follower: the in at (0, 0), the out at (14, 0), the output led back to the − input. */
export const bufferDrawing: Drawing = {
  symbols: [{ symbol: "amplifier", x: 10, y: 2, points: "right", length: 7, width: 8, first: "+" }],
  wires: [{ points: [0, 0, 3, 0] }, { points: [10, 2, 12, 2, 12, 0, 14, 0] }, { points: [12, 2, 12, 8, 1.5, 8, 1.5, 4, 3, 4] }],
  joints: [{ x: 12, y: 2 }],
  left: 0, right: 14, top: -3, bottom: 9,
};

/** The same standing up, for a signal that comes from below: the out at (0, 0), the in at (0, 14). */
export const risingBufferDrawing: Drawing = {
  symbols: [{ symbol: "amplifier", x: 0, y: 3, points: "up", length: 7, width: 8, first: "+" }],
  wires: [{ points: [0, 14, 0, 12, -2, 12, -2, 10] }, { points: [0, 3, 0, 0] }, { points: [0, 1.5, 6, 1.5, 6, 12, 2, 12, 2, 10] }],
  joints: [{ x: 0, y: 1.5 }],
  left: -5, right: 7, top: 0, bottom: 14,
};

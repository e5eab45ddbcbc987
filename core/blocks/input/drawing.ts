import type { Drawing } from "../drawing.ts";

/** The out at (0, 0); from the source upwards: sourceR, couplingC or a wire, with loadR across the out. */
export const inputDrawing: Drawing = {
  symbols: [
    { symbol: "capacitor", role: "couplingC", x: 0, y: 8, value: { x: 2.7, y: 9, align: "left" }, absent: "wire" },
    { symbol: "resistor", role: "sourceR", x: 0, y: 15, value: { x: 1.9, y: 15, align: "left" } },
    { symbol: "source", x: 0, y: 21 },
    { symbol: "ground", x: 0, y: 23 },
    { symbol: "resistor", role: "loadR", x: 14, y: 9, value: { x: 15.9, y: 9, align: "left" }, absent: "nothing" },
    { symbol: "reference", x: 14, y: 13, needs: "loadR" },
  ],
  wires: [{ points: [0, 0, 0, 5] }, { points: [0, 4, 14, 4, 14, 5], needs: "loadR" }],
  joints: [{ x: 0, y: 4, needs: "loadR" }],
  left: -3, right: 23, top: 0, bottom: 26,
};

import type { Drawing } from "../drawing.ts";

/** Grid units between the two rails of a bus. */
export const RAIL_GAP = 2;

/**
 * The rails leave at x = 0: boost side (m) at y = 0, cut side (p) at y = RAIL_GAP. The in is at (−46, 2), the out at
 * (−0.5, −14). The + input takes the outer way down to p, so that no wire crosses another.
 */
export const stageDrawing: Drawing = {
  symbols: [
    { symbol: "resistor", role: "inputR", x: -39, y: 2, isFlat: true, value: { x: -39, y: -0.6, align: "center" } },
    { symbol: "amplifier", x: -19, y: -14, points: "right", length: 8, width: 9, first: "+" },
    { symbol: "resistor", role: "feedbackR", x: -15.5, y: -7, value: { x: -17.4, y: -7, align: "right" } },
    { symbol: "capacitor", role: "feedbackC", x: -10.5, y: -7, value: { x: -7.8, y: -7, align: "left" }, absent: "nothing" },
  ],
  wires: [
    { points: [-46, 2, -43, 2] },
    { points: [-35, 2, 0, 2] },
    { points: [-27, -16, -32, -16, -32, 2] },
    { points: [-27, -12, -29.5, -12, -29.5, 0, 0, 0] },
    { points: [-19, -14, -0.5, -14] },
    { points: [-15.5, -14, -15.5, -11] },
    { points: [-15.5, -3, -15.5, 0] },
    { points: [-10.5, -14, -10.5, -10], needs: "feedbackC" },
    { points: [-10.5, -4, -10.5, 0], needs: "feedbackC" },
  ],
  joints: [
    { x: -32, y: 2 },
    { x: -15.5, y: -14 },
    { x: -15.5, y: 0 },
    { x: -10.5, y: -14, needs: "feedbackC" },
    { x: -10.5, y: 0, needs: "feedbackC" },
  ],
  left: -46, right: 0, top: -22, bottom: 4,
};

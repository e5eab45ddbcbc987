import { partDown, type Drawing } from "../blocks/drawing.ts";

/** The reference of a single supply, drawn once: supply at the top, divider, bypass, the signal reference at the right. */
export function referenceDrawing(hasOpAmp: boolean): Drawing {
  return {
    symbols: [
      { symbol: "terminal", x: 5, y: 0 },
      partDown("resistor", "upperR", 5, 5),
      { ...partDown("resistor", "lowerR", 5, 14), value: { x: 6.9, y: 16.4, align: "left" } },
      { symbol: "ground", x: 5, y: 18 },
      { symbol: "capacitor", role: "bypassC", x: 15, y: 14, value: { x: 17.5, y: 15.9, align: "left" } },
      { symbol: "ground", x: 15, y: 18 },
      ...(hasOpAmp ? [{ symbol: "amplifier", x: 21, y: 7, points: "right", length: 5, width: 7, first: "-" } as const] : []),
      { symbol: "reference", x: hasOpAmp ? 22.5 : 21, y: hasOpAmp ? 8 : 9.5 },
    ],
    wires: [
      { points: [5, 0.8, 5, 1] },
      { points: [5, 9, 5, 10] },
      { points: [15, 17, 15, 18] },
      ...(hasOpAmp
        ? [{ points: [5, 9.5, 15, 9.5, 15, 11] }, { points: [15, 9.5, 15, 9, 16, 9] }, { points: [21, 7, 22.5, 7, 22.5, 8] }, { points: [22.5, 7, 22.5, 2.5, 15, 2.5, 15, 5, 16, 5] }]
        : [{ points: [5, 9.5, 21, 9.5] }, { points: [15, 9.5, 15, 11] }]),
    ],
    joints: [{ x: 5, y: 9.5 }, { x: 15, y: 9.5 }, ...(hasOpAmp ? [{ x: 22.5, y: 7 }] : [])],
    left: 0, right: 23, top: -1, bottom: 23,
  };
}

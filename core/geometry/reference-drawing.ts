import { partDown, type Drawing } from "../blocks/drawing.ts";

/** The reference of a single supply, drawn once: supply at the top, divider, bypass, the signal reference at the right. */
export function referenceDrawing(hasOpAmp: boolean): Drawing {
  return {
    symbols: [
      { symbol: "terminal", x: 5, y: 0 },
      partDown("resistor", "upperR", 5, 5),
      partDown("resistor", "lowerR", 5, 14),
      { symbol: "ground", x: 5, y: 18 },
      { symbol: "capacitor", role: "bypassC", x: 13, y: 13, value: { x: 10.5, y: 18.5, align: "left" } },
      { symbol: "ground", x: 13, y: 20 },
      ...(hasOpAmp ? [{ symbol: "amplifier", x: 20.5, y: 7, points: "right", length: 5, width: 7, first: "-" } as const] : []),
      { symbol: "reference", x: hasOpAmp ? 21.5 : 18, y: hasOpAmp ? 11 : 9.5 },
    ],
    wires: [
      { points: [5, 0.8, 5, 1] },
      { points: [5, 9, 5, 10] },
      { points: [13, 16, 13, 20] },
      ...(hasOpAmp
        ? [{ points: [5, 9.5, 15.5, 9.5, 15.5, 9] }, { points: [13, 9.5, 13, 10] }, { points: [20.5, 7, 21.5, 7, 21.5, 11] }, { points: [21.5, 7, 21.5, 2.5, 15.5, 2.5, 15.5, 5] }]
        : [{ points: [5, 9.5, 18, 9.5] }, { points: [13, 9.5, 13, 10] }]),
    ],
    joints: [{ x: 5, y: 9.5 }, { x: 13, y: 9.5 }, ...(hasOpAmp ? [{ x: 21.5, y: 7 }] : [])],
    left: 0, right: 23, top: -1, bottom: 23,
  };
}

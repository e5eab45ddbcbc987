import { gyratorDrawing } from "../gyrator-section/drawing.ts";
import { partDown, type Drawing } from "../drawing.ts";

/** The gyrator section with blockingC, or a wire, in place of the resonating capacitor. */
export const lowShelfDrawing: Drawing = {
  ...gyratorDrawing,
  symbols: gyratorDrawing.symbols.map((s) => ("role" in s && s.role === "seriesC" ? partDown("capacitor", "blockingC", s.x, s.y, "wire") : s)),
};

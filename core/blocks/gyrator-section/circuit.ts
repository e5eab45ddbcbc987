import type { Expander } from "../definition.ts";

/** The gyrator leg, element by element, with the part of a role between wiper and the gyrator: a wire where it is absent. */
export function placeGyrator(x: Expander, role: string): void {
  const a = x.node("a");
  const n = x.node("n");
  const o = x.node("o");
  x.placeOrWire(role, x.wiper, a);
  x.place("seriesR", a, o);
  x.place("gyratorC", a, n);
  x.place("gyratorR", n, x.reference);
  x.opAmp(n, o, o);
}

import { formatValue } from "../units.ts";
import type { BoardRole } from "./roles.ts";
import { isPolarised, type StockedLine } from "./stock.ts";
import { polarityProblems, powerProblems, ratingProblems, type BoardStress, type Problem } from "./stress.ts";
import { taperProblems } from "./taper.ts";

/** What speaks against a line in a place of the board: voltage, heat and polarity (where `stress` is known), a track's taper, a coil's winding. */
export function placeProblems(role: BoardRole, line: StockedLine, stress: BoardStress | undefined): Problem[] {
  const at = stress?.get(role.name);
  switch (role.kind) {
    case "capacitor":
      return at ? [...ratingProblems(line.rating, at), ...(isPolarised(line) ? polarityProblems(line.rating, at) : [])] : [];
    case "resistor":
      return at ? powerProblems(line.rating, at) : [];
    case "potentiometer":
      return [...taperProblems(role.law ?? "linear", line), ...(at ? powerProblems(line.rating, at) : [])];
    case "inductor":
      return windingProblems(role, line);
    case "op-amp":
      return [];
  }
}

/** What is not known of a coil is taken from the part before. */
function windingProblems({ part }: BoardRole, line: StockedLine): Problem[] {
  const problems: Problem[] = [];
  if (line.windingR === null) problems.push({ level: "caution", about: "winding", message: `winding resistance not stated: ${part?.windingR ? `the ${formatValue(part.windingR, "resistance")} of the part before are kept` : "none is reckoned with"}` });
  if (part?.selfC) problems.push({ level: "note", about: "winding", message: `the self-capacitance of the part before, ${formatValue(part.selfC, "capacitance")}, is kept` });
  return problems;
}

/** Whether anything bars it. */
export function hasFault({ problems }: { readonly problems: readonly Problem[] }): boolean {
  return problems.some((p) => p.level === "fault");
}

/** Whether there is anything to weigh: notes weigh nothing. */
export function isSound({ problems }: { readonly problems: readonly Problem[] }): boolean {
  return problems.every((p) => p.level === "note");
}

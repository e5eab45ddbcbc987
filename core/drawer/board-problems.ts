import type { Board } from "../net/board.ts";
import { formatValue } from "../units.ts";
import { QUANTITY_OF } from "./check-line.ts";
import { placeProblems } from "./place-problems.ts";
import { boardRoles, type BoardRole } from "./roles.ts";
import { boardStress, type BoardStress, type Problem } from "./stress.ts";
import type { StockedLine } from "./stock.ts";

/** What is wrong with the line that a role names. */
export interface RoleProblems {
  readonly role: BoardRole;
  readonly line: StockedLine;
  readonly problems: readonly Problem[];
}

/**
 * Checks the lines that a board names against what its parts have to bear and what they should be: ratings, polarity,
 * kind and value. Roles without a line, and lines that the drawer does not have, are the bill's business.
 */
export function boardProblems(board: Board, lines: readonly StockedLine[], stress: BoardStress = boardStress(board)): RoleProblems[] {
  const byId = new Map(lines.map((l) => [l.id, l]));
  return boardRoles(board).flatMap((role): RoleProblems[] => {
    return namedLines(role).flatMap(([id, wanted]): RoleProblems[] => {
      const line = id === null ? undefined : byId.get(id);
      if (!line) return [];
      // What is not known of a line matters when it is chosen; the board has its figures by now.
      const problems = namedProblems(role, line, wanted, stress).filter((p) => p.level !== "note");
      return problems.length > 0 ? [{ role, line, problems }] : [];
    });
  });
}

/** The lines that a role names, two for a pair, each with the value that the board says it has; null where it names none. */
export function namedLines(role: BoardRole): readonly (readonly [id: string | null, wanted: number | null])[] {
  const { second } = role.part ?? {};
  return second ? [[role.stock, second.firstValue], [second.stock ?? null, second.value]] : [[role.stock, role.value]];
}

/** What speaks against a line that a role names: kind, value and type, and what the part has to bear. */
export function namedProblems(role: BoardRole, line: StockedLine, wanted: number | null, stress: BoardStress): Problem[] {
  // Of the wrong kind, its ratings say nothing here. The board has a winding already.
  const bears = line.kind === role.kind ? placeProblems(role, line, stress).filter((p) => p.about !== "winding") : [];
  return [...sortProblems(role, line, wanted), ...bears];
}

/** In one list, faults first. */
export function listedProblems(found: readonly RoleProblems[]): { readonly role: BoardRole; readonly line: StockedLine; readonly problem: Problem }[] {
  const listed = found.flatMap(({ role, line, problems }) => problems.map((problem) => ({ role, line, problem })));
  return listed.toSorted((a, b) => Number(b.problem.level === "fault") - Number(a.problem.level === "fault"));
}

/** More than rounding, less than any step of a series. */
const OTHER_VALUE = 1e-3;

function sortProblems(role: BoardRole, line: StockedLine, wanted: number | null): Problem[] {
  if (line.kind !== role.kind) return [{ level: "fault", about: "kind", message: `${line.id} is no ${role.kind} but a ${line.kind}` }];
  if (role.kind === "op-amp") return line.type?.toLowerCase() === role.type?.toLowerCase() ? [] : [{ level: "fault", about: "kind", message: `the board says ${role.type}, and ${line.id} is a ${line.type}` }];
  const problems: Problem[] = [];
  const quantity = QUANTITY_OF[role.kind];
  const text = (value: number): string => (quantity === null ? "" : formatValue(value, quantity, { significant: 4 }));
  const isOther = (a: number, b: number): boolean => Math.abs(a - b) > OTHER_VALUE * b;
  if (wanted !== null && line.value !== null && isOther(line.value, wanted)) problems.push({ level: "fault", about: "value", message: `the board says ${text(wanted)}, and ${line.id} is ${text(line.value)}` });
  const winding = role.part?.windingR ?? 0;
  if (line.windingR !== null && isOther(line.windingR, winding)) problems.push({ level: "caution", about: "winding", message: `the board says ${formatValue(winding, "resistance")} of winding resistance, and ${line.id} has ${formatValue(line.windingR, "resistance")}` });
  return problems;
}

import { lineProblems } from "../../core/drawer/candidates.ts";
import { boardRoles, type BoardRole } from "../../core/drawer/roles.ts";
import { boardStress, type Problem } from "../../core/drawer/stress.ts";
import type { StockedLine } from "../../core/drawer/stock.ts";
import type { Board } from "../../core/net/board.ts";

/** What is to be said about a line in its place: voltage, heat, polarity. */
export interface Finding {
  readonly role: BoardRole;
  readonly line: StockedLine;
  readonly problem: Problem;
}

/** Ratings and polarity of every part that names a line, faults first. */
export function findingsOf(board: Board, lines: readonly StockedLine[]): readonly Finding[] {
  const byId = new Map(lines.map((line) => [line.id, line]));
  const stress = boardStress(board);
  const found = boardRoles(board).flatMap((role): Finding[] => {
    const ids = [role.stock, role.part?.second?.stock ?? null];
    return [...new Set(ids)].flatMap((id) => {
      const line = id === null ? undefined : byId.get(id);
      return line ? lineProblems(role, line, stress).map((problem) => ({ role, line, problem })) : [];
    });
  });
  return found.toSorted((a, b) => Number(b.problem.level === "fault") - Number(a.problem.level === "fault"));
}

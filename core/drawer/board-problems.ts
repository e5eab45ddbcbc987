import type { Board } from "../net/board.ts";
import { formatValue } from "../units.ts";
import { lineProblems } from "./candidates.ts";
import { boardRoles, type BoardRole } from "./roles.ts";
import { boardStress, type BoardStress, type Problem } from "./stress.ts";
import type { StockedLine } from "./stock.ts";

/** What is wrong with the line that a role names. */
export interface RoleProblems {
  readonly role: BoardRole;
  readonly line: StockedLine;
  readonly problems: readonly Problem[];
}

const QUANTITY = { resistor: "resistance", potentiometer: "resistance", capacitor: "capacitance", inductor: "inductance" } as const;

/**
 * Checks the lines that a board names against what its parts have to bear and what they should be: ratings, polarity,
 * kind and value. Roles without a line, and lines that the drawer does not have, are the bill's business.
 */
export function boardProblems(board: Board, lines: readonly StockedLine[], stress: BoardStress = boardStress(board)): RoleProblems[] {
  const byId = new Map(lines.map((l) => [l.id, l]));
  return boardRoles(board).flatMap((role): RoleProblems[] => {
    const { second } = role.part ?? {};
    const named = [[role.stock, second ? second.firstValue : role.value], ...(second ? [[second.stock ?? null, second.value] as const] : [])] as const;
    return named.flatMap(([id, wanted]): RoleProblems[] => {
      const line = id === null ? undefined : byId.get(id);
      if (!line) return [];
      // Of the wrong kind, its ratings say nothing here.
      const bears = line.kind === role.kind ? lineProblems(role, line, stress).filter((p) => p.about !== "model") : [];
      const problems = [...sortProblems(role, line, wanted), ...bears];
      return problems.length > 0 ? [{ role, line, problems }] : [];
    });
  });
}

/** More than rounding, less than any step of a series. */
const OTHER_VALUE = 1e-3;

function sortProblems(role: BoardRole, line: StockedLine, wanted: number | null): Problem[] {
  if (line.kind !== role.kind) return [{ level: "fault", about: "kind", message: `${line.id} is no ${role.kind} but a ${line.kind}` }];
  if (role.kind === "op-amp") return line.type?.toLowerCase() === role.type?.toLowerCase() ? [] : [{ level: "fault", about: "kind", message: `the board says ${role.type}, and ${line.id} is a ${line.type}` }];
  if (wanted === null || line.value === null || Math.abs(line.value / wanted - 1) <= OTHER_VALUE) return [];
  const text = (value: number): string => formatValue(value, QUANTITY[role.kind as keyof typeof QUANTITY], { significant: 4 });
  return [{ level: "fault", about: "value", message: `the board says ${text(wanted)}, and ${line.id} is ${text(line.value)}` }];
}

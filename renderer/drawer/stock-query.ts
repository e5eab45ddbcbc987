import { EVERY_LINE, type DrawerLine } from "../../core/contract/drawer-schemas.ts";
import { isHostFailure } from "../../core/contract/failures.ts";
import { boardRoles, type BoardRole } from "../../core/drawer/roles.ts";
import type { StockPiece } from "../../core/drawer/stock.ts";
import type { Board } from "../../core/net/board.ts";
import type { HostClient } from "../host/client.ts";

/** What choosing looks at: single parts near a value, and for pairs every line of the kind. */
const NEAR = 0.2;
const MOST_SINGLES = 400;
const MOST_FOR_PAIRS = 20_000;
/** For a whole board, values further off are still worth naming where nothing fits. */
const NAMED_NEAR = 1;
const MOST_A_ROLE = 100;
const MOST_OP_AMPS = 2000;
const PAGE = 1000;

const ANY = { technology: [], ratingFrom: null, toleranceTo: null, availableFrom: 0 };

/** Lines that could go into a role. @param withPairs every line of its kind that has pieces, since any two may join */
export async function linesForRole(host: HostClient, role: BoardRole, withPairs: boolean): Promise<readonly DrawerLine[]> {
  if (role.kind === "op-amp") return (await host.call("drawer.candidates", { ...ANY, kind: "op-amp", value: null, within: 0, type: null, limit: MOST_OP_AMPS })).lines;
  if (!withPairs) return (await host.call("drawer.candidates", { ...ANY, kind: role.kind, value: role.value, within: NEAR, type: null, limit: MOST_SINGLES })).lines;
  const lines: DrawerLine[] = [];
  for (let offset = 0; offset < MOST_FOR_PAIRS; offset += PAGE) {
    const answer = await host.call("drawer.lines", { filter: { ...EVERY_LINE, kind: [role.kind], onlyAvailable: true }, sort: { by: "value", descending: false }, offset, limit: PAGE });
    lines.push(...answer.lines);
    if (offset + PAGE >= answer.total) break;
  }
  return lines;
}

/** The lines that a board's parts name, retired ones too; a line that the drawer does not have is left out. */
export async function namedLines(host: HostClient, board: Board): Promise<readonly DrawerLine[]> {
  const found = await Promise.all(namedIds(board).map((id) => host.call("drawer.line", { id }).then(({ line }) => line, (error: unknown) => missing(error, null))));
  return found.filter((line) => line !== null);
}

/** Lines that could go anywhere on a board, those it names included; each once. */
export async function linesForBoard(host: HostClient, board: Board): Promise<readonly DrawerLine[]> {
  const wanted = new Map<string, BoardRole>();
  for (const role of boardRoles(board)) wanted.set(role.kind === "op-amp" ? "op-amp" : `${role.kind} ${role.value}`, role);
  const near = [...wanted.values()].map((role) =>
    host.call("drawer.candidates", { ...ANY, kind: role.kind, value: role.value, within: role.value === null ? 0 : NAMED_NEAR, type: null, limit: role.value === null ? MOST_OP_AMPS : MOST_A_ROLE }).then(({ lines }) => lines),
  );
  const all = (await Promise.all([namedLines(host, board), ...near])).flat();
  return [...new Map(all.map((line) => [line.id, line])).values()];
}

/** The measured pieces of the lines that a board names. */
export async function piecesForBoard(host: HostClient, board: Board): Promise<readonly StockPiece[]> {
  const found = await Promise.all(namedIds(board).map((line) => host.call("drawer.pieces", { line }).then(({ pieces }) => pieces, (error: unknown) => missing(error, []))));
  return found.flat();
}

function namedIds(board: Board): string[] {
  return [...new Set(boardRoles(board).flatMap((role) => [role.stock, role.part?.second?.stock ?? null]).filter((id) => id !== null))];
}

/** A project may name lines of another drawer; anything else that goes wrong is passed on. */
function missing<T>(error: unknown, instead: T): T {
  if (isHostFailure(error, "drawer-missing")) return instead;
  throw error;
}

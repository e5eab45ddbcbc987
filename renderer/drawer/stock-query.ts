import { EVERY_LINE, type DrawerLine, type LineFilter } from "../../core/contract/drawer-schemas.ts";
import { isHostFailure } from "../../core/contract/failures.ts";
import { buildReference } from "../../core/drawer/bill.ts";
import { boardRoles, type BoardRole } from "../../core/drawer/roles.ts";
import { freeForBuild, type StockPiece } from "../../core/drawer/stock.ts";
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

/** Lines as a build of the board sees them: what it holds itself is there for it. */
async function seenByBuild(host: HostClient, board: Board, asked: Promise<readonly DrawerLine[]>): Promise<readonly DrawerLine[]> {
  const [lines, { held }] = await Promise.all([asked, host.call("drawer.held", { reference: buildReference(board.project) })]);
  return freeForBuild(lines, new Map(held.map(({ line, count }) => [line, count])));
}

/** Lines that could go into a role. @param withPairs every line of its kind that has pieces for this board, since any two may join */
export function linesForRole(host: HostClient, board: Board, role: BoardRole, withPairs: boolean): Promise<readonly DrawerLine[]> {
  if (withPairs) return seenByBuild(host, board, linesOfKind(host, board, role.kind));
  const near = role.value === null ? { value: null, within: 0, limit: MOST_OP_AMPS } : { value: role.value, within: NEAR, limit: MOST_SINGLES };
  return seenByBuild(host, board, host.call("drawer.candidates", { ...ANY, kind: role.kind, type: null, ...near }).then(({ lines }) => lines));
}

async function linesOfKind(host: HostClient, board: Board, kind: BoardRole["kind"]): Promise<readonly DrawerLine[]> {
  const page = (filter: Partial<LineFilter>, offset: number) => host.call("drawer.lines", { filter: { ...EVERY_LINE, kind: [kind], ...filter }, sort: { by: "value", descending: false }, offset, limit: PAGE });
  const lines = [...(await page({ heldBy: buildReference(board.project) }, 0)).lines];
  for (let offset = 0; offset < MOST_FOR_PAIRS; offset += PAGE) {
    const answer = await page({ onlyAvailable: true }, offset);
    lines.push(...answer.lines);
    if (offset + PAGE >= answer.total) break;
  }
  return onceEach(lines);
}

function onceEach(lines: readonly DrawerLine[]): readonly DrawerLine[] {
  return [...new Map(lines.map((line) => [line.id, line])).values()];
}

/** The lines that a board's parts name, retired ones too; a line that the drawer does not have is left out. */
export function namedLines(host: HostClient, board: Board): Promise<readonly DrawerLine[]> {
  return seenByBuild(host, board, askedByName(host, board));
}

async function askedByName(host: HostClient, board: Board): Promise<readonly DrawerLine[]> {
  const found = await Promise.all(namedIds(board).map((id) => host.call("drawer.line", { id }).then(({ line }) => line, (error: unknown) => missing(error, null))));
  return found.filter((line) => line !== null);
}

/** Lines that could go anywhere on a board, those it names included; each once. */
export function linesForBoard(host: HostClient, board: Board): Promise<readonly DrawerLine[]> {
  const wanted = new Map<string, BoardRole>();
  for (const role of boardRoles(board)) wanted.set(role.kind === "op-amp" ? "op-amp" : `${role.kind} ${role.value}`, role);
  const near = [...wanted.values()].map((role) =>
    host.call("drawer.candidates", { ...ANY, kind: role.kind, value: role.value, within: role.value === null ? 0 : NAMED_NEAR, type: null, limit: role.value === null ? MOST_OP_AMPS : MOST_A_ROLE }).then(({ lines }) => lines),
  );
  return seenByBuild(host, board, Promise.all([askedByName(host, board), ...near]).then((all) => onceEach(all.flat())));
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

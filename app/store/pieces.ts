import type { PutPiece } from "../../core/contract/drawer-schemas.ts";
import { HostFailure } from "../../core/contract/failures.ts";
import type { StockPiece } from "../../core/drawer/stock.ts";
import type { Db } from "./db.ts";
import { isSame, requireLine } from "./lines.ts";
import type { Fields, Step } from "./steps.ts";

/** A piece's row as it is kept: its line by key. */
interface PieceRow {
  readonly id: number;
  readonly line: number;
  readonly mark: string;
  readonly value: number;
  readonly frequency: number | null;
}

const NAMED = "SELECT p.id, l.id AS line, p.mark, p.value, p.frequency FROM pieces p JOIN lines l ON l.key = p.line";

/** The measured items of a line, in the order of their marks. */
export function piecesOf(db: Db, lineId: string): StockPiece[] {
  return db.all<StockPiece>(`${NAMED} WHERE p.line = ? ORDER BY p.mark, p.id`, requireLine(db, lineId).key);
}

/** The measured items of all lines. */
export function allPieces(db: Db): StockPiece[] {
  return db.all<StockPiece>(`${NAMED} ORDER BY l.id, p.mark, p.id`);
}

/** Makes a piece, or changes the one with that id. */
export function putPiece(db: Db, step: Step, piece: PutPiece): number {
  const { key, line } = requireLine(db, piece.line);
  const fields = { line: key, mark: piece.mark.trim(), value: piece.value, frequency: piece.frequency };
  const name = fields.mark === "" ? `a piece of ${line.id}` : `${line.id}, piece ${fields.mark}`;
  const problems: string[] = [];
  if (line.kind === "op-amp") problems.push(`${name}: op amps are not measured one by one`);
  if (!(fields.value > 0)) problems.push(`${name}: its value must be a number above 0, got ${fields.value}`);
  if (fields.frequency !== null && !(fields.frequency > 0)) problems.push(`${name}: it must be measured at a frequency above 0, or at DC, got ${fields.frequency}`);
  const twin = fields.mark === "" ? undefined : db.value<number>("SELECT id FROM pieces WHERE line = ? AND mark = ?", key, fields.mark);
  if (twin !== undefined && twin !== piece.id) problems.push(`${line.id}: there is a piece marked ${fields.mark} already`);
  if (problems.length > 0) throw new HostFailure("drawer-refused", { problems });

  if (piece.id === null) {
    const id = writePiece(db, null, fields);
    step.change("piece", id, null, fields);
    return id;
  }
  const { id, ...before } = requirePiece(db, piece.id);
  if (!isSame(before, fields)) {
    writePiece(db, id, fields);
    step.change("piece", id, before, fields);
  }
  return id;
}

export function removePiece(db: Db, step: Step, pieceId: number): void {
  const { id, ...before } = requirePiece(db, pieceId);
  db.run("DELETE FROM pieces WHERE id = ?", id);
  step.change("piece", id, before, null);
}

export function pieceById(db: Db, id: number): StockPiece {
  const piece = db.get<StockPiece>(`${NAMED} WHERE p.id = ?`, id);
  if (piece === undefined) throw new HostFailure("drawer-missing", { what: "piece", id: String(id) });
  return piece;
}

/** A piece's fields as the history keeps them; null where there is none. */
export function pieceFields(db: Db, id: number): Fields | null {
  return db.get<Record<string, unknown>>("SELECT line, mark, value, frequency FROM pieces WHERE id = ?", id) ?? null;
}

/** Writes a piece as the history names its fields; null takes it away. */
export function restorePiece(db: Db, id: number, fields: Fields | null): void {
  if (fields === null) db.run("DELETE FROM pieces WHERE id = ?", id);
  else writePiece(db, id, fields as unknown as Omit<PieceRow, "id">);
}

function writePiece(db: Db, id: number | null, { line, mark, value, frequency }: Omit<PieceRow, "id">): number {
  return db.run("INSERT INTO pieces (id, line, mark, value, frequency) VALUES (?, ?, ?, ?, ?) ON CONFLICT (id) DO UPDATE SET line = excluded.line, mark = excluded.mark, value = excluded.value, frequency = excluded.frequency", id, line, mark, value, frequency);
}

function requirePiece(db: Db, id: number): PieceRow {
  const row = db.get<PieceRow>("SELECT id, line, mark, value, frequency FROM pieces WHERE id = ?", id);
  if (row === undefined) throw new HostFailure("drawer-missing", { what: "piece", id: String(id) });
  return row;
}

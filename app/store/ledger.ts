import { MOST_MOVEMENT_NOTE, type LedgerEntry, type Move } from "../../core/contract/drawer-schemas.ts";
import { HostFailure } from "../../core/contract/failures.ts";
import { MOST_CHARACTERS } from "../../core/drawer/check-line.ts";
import type { Db } from "./db.ts";
import { holdersOf, requireLine, type KeyedLine } from "./lines.ts";
import type { Step } from "./steps.ts";

/** What one reference holds of a line. */
export function heldBy(db: Db, reference: string, key: number): number {
  return db.value<number>("SELECT count FROM holdings WHERE reference = ? AND line = ?", reference, key) ?? 0;
}

/** What one reference holds, by line id. */
export function heldOf(db: Db, reference: string): ReadonlyMap<string, number> {
  const rows = db.all<{ id: string; count: number }>("SELECT l.id, h.count FROM holdings h JOIN lines l ON l.key = h.line WHERE h.reference = ? ORDER BY l.id", reference);
  return new Map(rows.map(({ id, count }) => [id, count]));
}

/** Books one movement of a line, after looking whether there are pieces for it. @throws HostFailure drawer-short, drawer-refused, drawer-missing */
export function bookMove(db: Db, step: Step, move: Move): void {
  const found = requireLine(db, move.line);
  const { key, line } = found;
  const { kind, count, reference, note } = move;
  if (count === 0 && kind !== "counted") refuse(`${line.id}: the number of pieces ${kind} must be above 0`);
  if (reference.length > MOST_CHARACTERS) refuse(`${line.id}: the name of what the pieces are for has more than ${MOST_CHARACTERS} characters`);
  if (note.length > MOST_MOVEMENT_NOTE) refuse(`${line.id}: the note has more than ${MOST_MOVEMENT_NOTE} characters`);
  switch (kind) {
    case "bought":
      requireKeepable(line.id, line.quantity + count);
      step.book(key, kind, count, reference, note);
      break;
    case "counted":
      requireKeepable(line.id, count);
      requireCountable(db, found, count);
      step.book(key, kind, count - line.quantity, reference, note);
      break;
    case "used":
    case "scrapped":
      takeOut(db, step, found, kind, count, reference, note);
      break;
    case "reserved":
      if (reference === "") refuse(`${line.id}: pieces are held for a project or a build: name it`);
      requireFree(db, found, count);
      step.book(key, kind, count, reference, note);
      break;
    case "released": {
      const held = heldBy(db, reference, key);
      if (count > held) refuse(`${line.id}: ${reference === "" ? "name who holds the pieces that are released" : `${reference} holds ${held} pieces, so ${count} cannot be released`}`);
      step.book(key, kind, -count, reference, note);
      break;
    }
  }
}

/** Takes pieces out for good: first those that the reference holds, then free ones. */
export function takeOut(db: Db, step: Step, found: KeyedLine, kind: "used" | "scrapped", count: number, reference: string, note: string): void {
  const held = reference === "" ? 0 : Math.min(heldBy(db, reference, found.key), count);
  requireFree(db, found, count - held, reference);
  if (held > 0) step.book(found.key, "released", -held, reference, note);
  step.book(found.key, kind, -count, reference, note);
}

/** @throws HostFailure drawer-short, naming who holds the rest */
export function requireFree(db: Db, { key, line }: KeyedLine, wanted: number, besides?: string): void {
  const available = line.quantity - line.reserved;
  if (wanted <= available) return;
  const holders = holdersOf(db, key).filter((holder) => holder.reference !== besides);
  throw new HostFailure("drawer-short", { line: line.id, wanted, quantity: line.quantity, available, holders });
}

/** Far more than anybody has, and far from where numbers lose their last digit. */
const MOST_PIECES = 1_000_000_000;

/** @throws HostFailure drawer-refused */
export function requireKeepable(id: string, quantity: number): void {
  if (quantity > MOST_PIECES) refuse(`${id}: ${quantity} pieces are more than a line can have (${MOST_PIECES})`);
}

/** A count may not take away what somebody holds. @throws HostFailure drawer-refused */
export function requireCountable(db: Db, { key, line }: KeyedLine, count: number): void {
  if (count >= line.reserved) return;
  const holders = holdersOf(db, key).map((holder) => `${holder.reference} (${holder.count})`).join(", ");
  refuse(`${line.id}: ${count} counted, but ${line.reserved} are spoken for, by ${holders}. Release some first`);
}

/** Movements, the newest first. */
export function readLedger(db: Db, query: { readonly line: string | null; readonly reference: string | null; readonly before: number | null; readonly limit: number }): { movements: LedgerEntry[]; hasMore: boolean } {
  const where: string[] = [];
  const values: (string | number)[] = [];
  const add = (condition: string, value: string | number | null): void => {
    if (value === null) return;
    where.push(condition);
    values.push(value);
  };
  add("g.line = ?", query.line === null ? null : requireLine(db, query.line).key);
  add("g.reference = ?", query.reference);
  add("g.id < ?", query.before);
  const rows = db.all<LedgerEntry>(
    `SELECT g.id, s.at, l.id AS line, g.kind, g.change, g.reference, g.note, g.step, g.reverses
     FROM ledger g JOIN steps s ON s.id = g.step JOIN lines l ON l.key = g.line
     ${where.length === 0 ? "" : `WHERE ${where.join(" AND ")}`} ORDER BY g.id DESC LIMIT ?`,
    ...values,
    query.limit + 1,
  );
  return { movements: rows.slice(0, query.limit), hasMore: rows.length > query.limit };
}

function refuse(problem: string): never {
  throw new HostFailure("drawer-refused", { problems: [`${problem}.`] });
}

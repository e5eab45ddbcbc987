import type { BillEntry, Build } from "../../core/contract/drawer-schemas.ts";
import { HostFailure } from "../../core/contract/failures.ts";
import type { Db } from "./db.ts";
import { requireFree, takeOut } from "./ledger.ts";
import { lineByKey, requireLine } from "./lines.ts";
import type { Fields, Step } from "./steps.ts";

/** Pieces a unit takes; lines by key, so that a line may be named twice in what the user gave. */
type Bill = readonly { readonly line: number; readonly count: number }[];

interface BuildFields {
  readonly reference: string;
  readonly units: number;
  readonly unitsUsed: number;
  readonly state: Build["state"];
  readonly at: string;
  readonly bill: Bill;
}

interface BuildRow extends Omit<BuildFields, "bill"> {
  readonly key: number;
  readonly bill: string;
}

const SELECT = "SELECT key, reference, units, units_used AS unitsUsed, state, at, bill FROM builds";

/** Holds what a number of units takes. What the reference held before is let go first, so that asking again is changing one's mind. */
export function reserveBuild(db: Db, step: Step, reference: string, units: number, entries: readonly BillEntry[]): void {
  letGo(db, step, reference);
  const bill = addUp(db, entries);
  for (const { line: key, count } of bill) {
    const line = lineByKey(db, key);
    if (line.retired) throw new HostFailure("drawer-refused", { problems: [`${line.id}: it is retired, so nothing of it can be held.`] });
    requireFree(db, { key, line }, count * units, reference);
    step.book(key, "reserved", count * units, reference, "");
  }
  const old = findBuild(db, reference);
  put(db, step, old, { reference, units, unitsUsed: old?.fields.unitsUsed ?? 0, state: "reserved", at: step.at, bill });
}

/** Lets everything go that a reference holds, part of a build or not. @throws HostFailure drawer-missing where nobody knows the reference */
export function releaseBuild(db: Db, step: Step, reference: string): void {
  const hasHeld = letGo(db, step, reference);
  const old = findBuild(db, reference);
  if (old === null && !hasHeld) throw new HostFailure("drawer-missing", { what: "build", id: reference });
  if (old !== null && old.fields.state === "reserved") put(db, step, old, { ...old.fields, units: 0, state: "released", at: step.at });
}

/** Books what finished units took, held pieces first. */
export function useBuild(db: Db, step: Step, reference: string, units: number): void {
  const old = findBuild(db, reference);
  if (old === null) throw new HostFailure("drawer-missing", { what: "build", id: reference });
  if (old.fields.state !== "reserved") throw new HostFailure("drawer-refused", { problems: [`${reference}: nothing is held for it any more, so there are no units to book.`] });
  if (units > old.fields.units) throw new HostFailure("drawer-refused", { problems: [`${reference}: pieces are held for ${old.fields.units} units, so ${units} cannot be booked.`] });
  for (const { line: key, count } of old.fields.bill) takeOut(db, step, { key, line: lineByKey(db, key) }, "used", count * units, reference, "");
  const left = old.fields.units - units;
  put(db, step, old, { ...old.fields, units: left, unitsUsed: old.fields.unitsUsed + units, state: left === 0 ? "used" : "reserved", at: step.at });
}

/** Everything that was ever planned, the latest first. */
export function allBuilds(db: Db): Build[] {
  return db.all<BuildRow>(`${SELECT} ORDER BY at DESC, key DESC`).map((row) => toBuild(db, fieldsOf(row)));
}

/** @throws HostFailure drawer-missing */
export function requireBuild(db: Db, reference: string): Build {
  const found = findBuild(db, reference);
  if (found === null) throw new HostFailure("drawer-missing", { what: "build", id: reference });
  return toBuild(db, found.fields);
}

/** A build's fields as the history keeps them; null where there is none. */
export function buildFields(db: Db, key: number): Fields | null {
  const row = db.get<BuildRow>(`${SELECT} WHERE key = ?`, key);
  return row === undefined ? null : { ...fieldsOf(row) };
}

/** Writes a build as the history names its fields; null takes it away. */
export function restoreBuild(db: Db, key: number, fields: Fields | null): void {
  if (fields === null) db.run("DELETE FROM builds WHERE key = ?", key);
  else write(db, key, fields as unknown as BuildFields);
}

function letGo(db: Db, step: Step, reference: string): boolean {
  const held = db.all<{ line: number; count: number }>("SELECT line, count FROM holdings WHERE reference = ? ORDER BY line", reference);
  for (const { line, count } of held) step.book(line, "released", -count, reference, "");
  return held.length > 0;
}

function addUp(db: Db, entries: readonly BillEntry[]): Bill {
  const counts = new Map<number, number>();
  for (const { line, count } of entries) {
    const { key } = requireLine(db, line);
    counts.set(key, (counts.get(key) ?? 0) + count);
  }
  return [...counts].map(([line, count]) => ({ line, count }));
}

function put(db: Db, step: Step, old: { readonly key: number; readonly fields: BuildFields } | null, fields: BuildFields): void {
  const key = write(db, old?.key ?? null, fields);
  step.change("build", old?.key ?? key, old === null ? null : { ...old.fields }, { ...fields });
}

function write(db: Db, key: number | null, { reference, units, unitsUsed, state, at, bill }: BuildFields): number {
  return db.run(
    `INSERT INTO builds (key, reference, units, units_used, state, at, bill) VALUES (?, ?, ?, ?, ?, ?, ?)
     ON CONFLICT (key) DO UPDATE SET reference = excluded.reference, units = excluded.units, units_used = excluded.units_used, state = excluded.state, at = excluded.at, bill = excluded.bill`,
    key, reference, units, unitsUsed, state, at, JSON.stringify(bill),
  );
}

function findBuild(db: Db, reference: string): { readonly key: number; readonly fields: BuildFields } | null {
  const row = db.get<BuildRow>(`${SELECT} WHERE reference = ?`, reference);
  return row === undefined ? null : { key: row.key, fields: fieldsOf(row) };
}

function fieldsOf({ reference, units, unitsUsed, state, at, bill }: BuildRow): BuildFields {
  return { reference, units, unitsUsed, state, at, bill: JSON.parse(bill) as Bill };
}

function toBuild(db: Db, { reference, units, unitsUsed, state, at, bill }: BuildFields): Build {
  return {
    reference, units, unitsUsed, state, at,
    bill: bill.map(({ line, count }) => ({
      line: lineByKey(db, line).id,
      count,
      held: db.value<number>("SELECT count FROM holdings WHERE reference = ? AND line = ?", reference, line) ?? 0,
    })),
  };
}

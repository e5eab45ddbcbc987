import type { BillEntry, Build, DrawerLine } from "../../core/contract/drawer-schemas.ts";
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
  hold(db, step, reference, units, bill);
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

/**
 * Books what finished units took, held pieces first. Units that are planned beyond these stay planned; where the bill is
 * another than they were held for, they are held anew with it.
 */
export function useBuild(db: Db, step: Step, reference: string, units: number, entries: readonly BillEntry[]): void {
  const bill = addUp(db, entries);
  const old = findBuild(db, reference);
  const planned = old?.fields.state === "reserved" ? old.fields.units : 0;
  const left = Math.max(0, planned - units);
  const isOther = planned > 0 && !isSameBill(old!.fields.bill, bill);
  if (isOther) letGo(db, step, reference);
  for (const { line: key, count } of bill) takeOut(db, step, { key, line: lineInUse(db, key) }, "used", count * units, reference, "");
  if (isOther && left > 0) hold(db, step, reference, left, bill);
  put(db, step, old, { reference, units: left, unitsUsed: (old?.fields.unitsUsed ?? 0) + units, state: left === 0 ? "used" : "reserved", at: step.at, bill });
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

function hold(db: Db, step: Step, reference: string, units: number, bill: Bill): void {
  for (const { line: key, count } of bill) {
    const line = lineInUse(db, key);
    requireFree(db, { key, line }, count * units, reference);
    step.book(key, "reserved", count * units, reference, "");
  }
}

/** @throws HostFailure drawer-refused where it is retired */
function lineInUse(db: Db, key: number): DrawerLine {
  const line = lineByKey(db, key);
  if (line.retired) throw new HostFailure("drawer-refused", { problems: [`${line.id}: it is retired, so no build can take from it.`] });
  return line;
}

function isSameBill(a: Bill, b: Bill): boolean {
  const counts = new Map(a.map(({ line, count }) => [line, count]));
  return a.length === b.length && b.every(({ line, count }) => counts.get(line) === count);
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

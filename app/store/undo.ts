import { HostFailure } from "../../core/contract/failures.ts";
import type { MovementKind } from "../../core/drawer/stock.ts";
import { buildFields, restoreBuild } from "./builds.ts";
import type { Db } from "./db.ts";
import { heldBy } from "./ledger.ts";
import { isSame, lineByKey, writeFields } from "./lines.ts";
import { pieceFields, restorePiece } from "./pieces.ts";
import { beginStep, type Fields, type Step, type Subject } from "./steps.ts";

interface MovementRow {
  readonly id: number;
  readonly line: number;
  readonly kind: MovementKind;
  readonly change: number;
  readonly reference: string;
}

interface ChangeRow {
  readonly what: Subject;
  readonly key: number;
  readonly before: string | null;
  readonly after: string | null;
}

/** After so many records the work pauses, so that whoever drives it can do something else. */
const PAUSE_EVERY = 1000;
const MOST_PROBLEMS = 20;

/**
 * Takes a step back as a step of its own: every movement is booked the other way, every field gets its earlier value.
 * A line that the step made is retired. To be run inside a transaction; yields now and then.
 * @throws HostFailure drawer-missing, or drawer-moved-on where later steps build on this one
 */
export function* undoStep(db: Db, now: Date, id: number): Generator<number, { readonly step: number; readonly label: string }> {
  const old = db.get<{ label: string; undoes: number | null; undoneBy: number | null }>("SELECT s.label, s.undoes, u.id AS undoneBy FROM steps s LEFT JOIN steps u ON u.undoes = s.id WHERE s.id = ?", id);
  if (old === undefined) throw new HostFailure("drawer-missing", { what: "step", id: String(id) });
  if (old.undoneBy !== null) throw new HostFailure("drawer-moved-on", { step: id, problems: ["it has been undone already."] });
  const label = labelOf(old.label, old.undoes !== null);
  const step = beginStep(db, now, label, id);
  const problems: string[] = [];
  let done = 0;
  // Read whole first: rows that are being added must not be met.
  for (const movement of db.all<MovementRow>("SELECT id, line, kind, change, reference FROM ledger WHERE step = ? ORDER BY id DESC", id)) {
    takeBackMovement(db, step, movement, problems);
    if (++done % PAUSE_EVERY === 0) yield done;
    if (problems.length >= MOST_PROBLEMS) break;
  }
  for (const change of db.all<ChangeRow>("SELECT what, key, before, after FROM changes WHERE step = ? ORDER BY id DESC", id)) {
    if (problems.length >= MOST_PROBLEMS) break;
    takeBackChange(db, step, change, problems);
    if (++done % PAUSE_EVERY === 0) yield done;
  }
  if (problems.length > 0) throw new HostFailure("drawer-moved-on", { step: id, problems });
  step.finish();
  return { step: step.id, label };
}

function labelOf(label: string, isUndo: boolean): string {
  if (!isUndo) return `Undo: ${label}`;
  return label.startsWith("Undo: ") ? `Redo: ${label.slice("Undo: ".length)}` : label.replace(/^Redo: /, "Undo: ");
}

function takeBackMovement(db: Db, step: Step, { id, line: key, kind, change, reference }: MovementRow, problems: string[]): void {
  const line = lineByKey(db, key);
  const isHold = kind === "reserved" || kind === "released";
  const free = line.quantity - line.reserved;
  if (isHold && change > 0 && heldBy(db, reference, key) < change) problems.push(`${line.id}: ${reference} does not hold its ${change} pieces any more.`);
  else if (isHold && change < 0 && free < -change) problems.push(`${line.id}: ${-change} pieces were free again for ${reference}, and only ${free} are free now.`);
  else if (!isHold && change > 0 && free < change) problems.push(`${line.id}: ${change} pieces came in, and only ${free} of them are free to be taken out again.`);
  else step.book(key, kind, -change, reference, "", id);
}

function takeBackChange(db: Db, step: Step, change: ChangeRow, problems: string[]): void {
  const before = parse(change.before);
  const after = parse(change.after);
  const { key } = change;
  if (change.what === "line") {
    const line = lineByKey(db, key);
    // A line is never deleted: what the step made is taken out of use.
    const [wanted, expected] = before === null ? [{ retired: true }, { retired: line.retired }] : [before, after ?? {}];
    const current = Object.fromEntries(Object.keys(wanted).map((field) => [field, line[field as keyof typeof line]]));
    const moved = Object.keys(wanted).filter((field) => !isSame(current[field], expected[field]));
    if (moved.length > 0) {
      problems.push(`${line.id}: its ${moved.join(", ")} ${moved.length === 1 ? "has" : "have"} been changed since.`);
      return;
    }
    // Its own pieces have been booked out by now: what is left came later.
    if (before === null && line.quantity > 0) problems.push(`${line.id}: it has got ${line.quantity} pieces since.`);
    else if (Object.hasOwn(wanted, "retired") && wanted.retired === true && line.reserved > 0) problems.push(`${line.id}: ${line.reserved} of its pieces are spoken for.`);
    writeFields(db, step, { key, line }, wanted);
    step.change("line", key, current, wanted);
    return;
  }
  const current = change.what === "piece" ? pieceFields(db, key) : buildFields(db, key);
  if (!isSame(current, after)) {
    problems.push(`${nameOf(change.what, after ?? before ?? {})} has been changed since.`);
    return;
  }
  if (change.what === "piece") restorePiece(db, key, before);
  else restoreBuild(db, key, before);
  step.change(change.what, key, after, before);
}

function nameOf(what: "piece" | "build", fields: Fields): string {
  return what === "build" ? String(fields["reference"]) : `Piece ${String(fields["mark"])}`;
}

function parse(text: string | null): Fields | null {
  return text === null ? null : (JSON.parse(text) as Fields);
}

import type { DrawerStep } from "../../core/contract/drawer-schemas.ts";
import type { MovementKind } from "../../core/drawer/stock.ts";
import type { Db } from "./db.ts";
import { addWords, dropWords, type LineTexts } from "./words.ts";

/** What the history keeps changes of. */
export type Subject = "line" | "piece" | "build";

export type Fields = Readonly<Record<string, unknown>>;

/** One command of the user in the making: everything it does is written down under its number. */
export class Step {
  readonly id: number;
  readonly at: string;
  private readonly db: Db;
  private records = 0;
  /** Lines whose texts are not those of the index any more, with the texts that it has. */
  private readonly stale = new Map<number, LineTexts | null>();

  constructor(db: Db, id: number, at: string) {
    this.db = db;
    this.id = id;
    this.at = at;
  }

  /** Whether anything has been done. */
  get isEmpty(): boolean {
    return this.records === 0;
  }

  /** Notes that a line's texts have changed; before is null for a new line. */
  reword(key: number, before: LineTexts | null): void {
    if (!this.stale.has(key)) this.stale.set(key, before);
  }

  /** To be called once, before the transaction ends. */
  finish(): void {
    for (const [key, before] of this.stale) if (before !== null) dropWords(this.db, key, before);
    if (this.stale.size > 0) addWords(this.db, [...this.stale.keys()]);
  }

  /** Writes down what fields were and are. No before: it was made. No after: it was taken away. */
  change(what: Subject, key: number, before: Fields | null, after: Fields | null): void {
    this.records += 1;
    this.db.run("INSERT INTO changes (step, what, key, before, after) VALUES (?, ?, ?, ?, ?)", this.id, what, key, before && JSON.stringify(before), after && JSON.stringify(after));
  }

  /** Books a movement as it stands; quantities follow. */
  book(line: number, kind: MovementKind, change: number, reference: string, note: string, reverses: number | null = null): void {
    this.records += 1;
    this.db.run("INSERT INTO ledger (step, line, kind, change, reference, note, reverses) VALUES (?, ?, ?, ?, ?, ?, ?)", this.id, line, kind, change, reference, note, reverses);
  }
}

/** Begins a step; to be called inside a transaction. */
export function beginStep(db: Db, now: Date, label: string, undoes: number | null = null): Step {
  const at = now.toISOString();
  return new Step(db, db.run("INSERT INTO steps (at, label, undoes) VALUES (?, ?, ?)", at, label, undoes), at);
}

/** Runs a command as one step in one transaction. A command that had nothing to do leaves no step: `step` is null. */
export function asStep<T>(db: Db, now: Date, label: string, work: (step: Step) => T): { readonly step: number | null; readonly result: T } {
  db.begin();
  try {
    const step = beginStep(db, now, label);
    const result = work(step);
    step.finish();
    if (step.isEmpty) db.rollback();
    else db.commit();
    return { step: step.isEmpty ? null : step.id, result };
  } catch (error) {
    db.rollback();
    throw error;
  }
}

/** The latest steps, the newest first. */
export function latestSteps(db: Db, limit: number): DrawerStep[] {
  return db.all<DrawerStep>(
    `SELECT s.id, s.at, s.label, s.undoes, u.id AS undoneBy FROM steps s LEFT JOIN steps u ON u.undoes = s.id ORDER BY s.id DESC LIMIT ?`,
    limit,
  );
}

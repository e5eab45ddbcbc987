import type {
  BillEntry, Build, CandidateQuery, DrawerLine, DrawerStep, Facets, Holder, LedgerEntry, LineFields, LineFilter, LineSort, Move, OwnedValue, PutPiece,
} from "../../core/contract/drawer-schemas.ts";
import { HostFailure } from "../../core/contract/failures.ts";
import type { StockLine, StockPiece } from "../../core/drawer/stock.ts";
import { allBuilds, releaseBuild, requireBuild, reserveBuild, useBuild } from "./builds.ts";
import { openBeside, openDb, type Db } from "./db.ts";
import { importRows, type ImportCounts, type ImportRow } from "./import-lines.ts";
import { bookMove, heldOf, readLedger } from "./ledger.ts";
import { eachLine, findLine, holdersOf, insertLine, namesOf, requireLine, requireSoundLine, selectLines, updateLine } from "./lines.ts";
import { allPieces, pieceById, piecesOf, putPiece, removePiece } from "./pieces.ts";
import { candidatesOf, countOf, facetsOf, valuesOf, windowOf } from "./query.ts";
import { asStep, latestSteps } from "./steps.ts";
import { TextHits } from "./text-hits.ts";
import { undoStep } from "./undo.ts";
import { wordProblems } from "./words.ts";

export interface DrawerOpts {
  readonly path: string;
  /** The clock: every movement and change is dated by it. */
  readonly now: () => Date;
}

/** What a change did: the step that `undo` takes back, null where nothing had to be changed. */
export interface Changed {
  readonly step: number | null;
  readonly changed: number;
}

/** A change of a line's fields, as the history keeps it. */
export interface LineChange {
  readonly step: number;
  readonly at: string;
  readonly label: string;
  readonly before: Record<string, unknown> | null;
  readonly after: Record<string, unknown>;
}

/** How long work is followed and stopped. */
export interface LongWork {
  /** Called now and then with the number of things done. */
  readonly onProgress?: (done: number) => void;
  /** Asked as often; true ends the work, and nothing of it stays. */
  readonly isCancelled?: () => boolean;
}

const MOST_HISTORY = 500;

/** An open drawer. Every change is one transaction and one step; what fails changes nothing and throws a `HostFailure`. */
export class DrawerStore {
  readonly path: string;
  private readonly db: Db;
  private readonly now: () => Date;
  private readonly hits: TextHits;
  private readonly totals = new Map<string, number>();
  private totalsStamp = "";

  constructor(db: Db, now: () => Date) {
    this.db = db;
    this.path = db.path;
    this.now = now;
    this.hits = new TextHits(db);
  }

  info(): { path: string; lines: number; retired: number; pieces: number; version: number } {
    const { db } = this;
    return {
      path: this.path,
      lines: db.value<number>("SELECT count(*) FROM lines WHERE retired = 0") ?? 0,
      retired: db.value<number>("SELECT count(*) FROM lines WHERE retired = 1") ?? 0,
      pieces: db.value<number>("SELECT count(*) FROM pieces") ?? 0,
      version: db.value<number>("PRAGMA user_version") ?? 0,
    };
  }

  /** Changes whenever another program has written to this drawer. */
  foreignStamp(): string {
    return this.db.foreignStamp();
  }

  /** A window on the lines that fit, and how many there are. */
  lines(filter: LineFilter, sort: LineSort, offset: number, limit: number): { total: number; lines: DrawerLine[] } {
    return this.db.snapshot(() => ({ total: this.totalOf(filter), lines: windowOf(this.db, this.hits, filter, sort, offset, limit) }));
  }

  /** All lines in use, by id. */
  allLines(): DrawerLine[] {
    return selectLines(this.db, "WHERE l.retired = 0 ORDER BY l.id");
  }

  /** Every line by id, retired ones too, one at a time. */
  eachLine(): Generator<DrawerLine> {
    return eachLine(this.db);
  }

  facets(filter: LineFilter): Facets {
    return this.db.snapshot(() => facetsOf(this.db, this.hits, filter));
  }

  values(filter: LineFilter): OwnedValue[] {
    return this.db.snapshot(() => valuesOf(this.db, this.hits, filter));
  }

  candidates(query: CandidateQuery): DrawerLine[] {
    return candidatesOf(this.db, query);
  }

  /** The line of that id, or null. */
  find(id: string): DrawerLine | null {
    return findLine(this.db, id)?.line ?? null;
  }

  /** One line with all that is known of it. */
  line(id: string): { line: DrawerLine; holders: Holder[]; pieces: StockPiece[]; history: LineChange[] } {
    return this.db.snapshot(() => {
      const { key, line } = requireLine(this.db, id);
      const rows = this.db.all<{ step: number; at: string; label: string; before: string | null; after: string }>(
        "SELECT c.step, s.at, s.label, c.before, c.after FROM changes c JOIN steps s ON s.id = c.step WHERE c.what = 'line' AND c.key = ? ORDER BY c.id DESC LIMIT ?",
        key,
        MOST_HISTORY,
      );
      const history = rows.map((row) => ({ ...row, before: row.before === null ? null : (JSON.parse(row.before) as Record<string, unknown>), after: JSON.parse(row.after) as Record<string, unknown> }));
      return { line, holders: holdersOf(this.db, key), pieces: piecesOf(this.db, id), history };
    });
  }

  addLine(asked: StockLine, quantity: number): { step: number; line: DrawerLine } {
    const line = tidy(asked);
    requireSoundLine(line);
    const { step } = asStep(this.db, this.now(), `Add ${line.id}`, (one) => {
      if (findLine(this.db, line.id) !== null) throw new HostFailure("drawer-refused", { problems: [`${line.id}: there is a line of that name already.`] });
      insertLine(this.db, one, line);
      if (quantity > 0) bookMove(this.db, one, { line: line.id, kind: "counted", count: quantity, reference: "", note: "" });
    });
    return { step: certain(step), line: requireLine(this.db, line.id).line };
  }

  editLines(ids: readonly string[], fields: LineFields): Changed {
    return this.edit(`Edit ${namesOf(ids)}`, ids, tidy(fields));
  }

  retireLines(ids: readonly string[], retired: boolean): Changed {
    return this.edit(`${retired ? "Retire" : "Put back"} ${namesOf(ids)}`, ids, { retired });
  }

  private edit(label: string, ids: readonly string[], fields: LineFields & { retired?: boolean }): Changed {
    const { step, result } = asStep(this.db, this.now(), label, (one) => {
      let changed = 0;
      for (const id of ids) {
        const found = requireLine(this.db, id);
        if (updateLine(this.db, one, found, fields)) changed += 1;
      }
      return changed;
    });
    return { step, changed: result };
  }

  /** Books movements, all or none; gives the lines as they are then. */
  move(moves: readonly Move[]): { step: number; lines: DrawerLine[] } {
    const ids = [...new Set(moves.map((move) => move.line))];
    const words = [...new Set(moves.map((move) => move.kind))].map((kind) => kind[0].toUpperCase() + kind.slice(1)).join(", ");
    const { step } = asStep(this.db, this.now(), `${words}: ${namesOf(ids)}`, (one) => {
      for (const move of moves) bookMove(this.db, one, move);
    });
    return { step: certain(step), lines: ids.map((id) => requireLine(this.db, id).line) };
  }

  ledger(query: { readonly line: string | null; readonly reference: string | null; readonly before: number | null; readonly limit: number }): { movements: LedgerEntry[]; hasMore: boolean } {
    return readLedger(this.db, query);
  }

  pieces(line: string): StockPiece[] {
    return piecesOf(this.db, line);
  }

  allPieces(): StockPiece[] {
    return allPieces(this.db);
  }

  putPieces(pieces: readonly PutPiece[]): { step: number | null; pieces: StockPiece[] } {
    const label = `Measured: ${namesOf([...new Set(pieces.map((piece) => piece.line))])}`;
    const { step, result } = asStep(this.db, this.now(), label, (one) => pieces.map((piece) => putPiece(this.db, one, piece)));
    return { step, pieces: result.map((id) => pieceById(this.db, id)) };
  }

  removePieces(ids: readonly number[]): Changed {
    const { step } = asStep(this.db, this.now(), `Remove ${ids.length === 1 ? "a measured piece" : `${ids.length} measured pieces`}`, (one) => {
      for (const id of ids) removePiece(this.db, one, id);
    });
    return { step, changed: ids.length };
  }

  reserve(reference: string, units: number, bill: readonly BillEntry[]): { step: number; build: Build } {
    const { step } = asStep(this.db, this.now(), `Reserve for ${reference}`, (one) => reserveBuild(this.db, one, reference, units, bill));
    return { step: certain(step), build: requireBuild(this.db, reference) };
  }

  release(reference: string): { step: number | null } {
    const { step } = asStep(this.db, this.now(), `Release ${reference}`, (one) => releaseBuild(this.db, one, reference));
    return { step };
  }

  /** Books the pieces of finished units as used, as one step whether they were held before or not. */
  use(reference: string, units: number, bill: readonly BillEntry[]): { step: number; build: Build } {
    const { step } = asStep(this.db, this.now(), `Use for ${reference}`, (one) => useBuild(this.db, one, reference, units, bill));
    return { step: certain(step), build: requireBuild(this.db, reference) };
  }

  /** Pieces that a reference holds, by line id. */
  heldBy(reference: string): ReadonlyMap<string, number> {
    return heldOf(this.db, reference);
  }

  builds(): Build[] {
    return this.db.snapshot(() => allBuilds(this.db));
  }

  steps(limit: number): DrawerStep[] {
    return latestSteps(this.db, limit);
  }

  /** Takes a step back; a long one pauses now and then. */
  async undo(step: number): Promise<{ step: number; label: string }> {
    return this.long((db) => undoStep(db, this.now(), step), { keep: () => true });
  }

  /**
   * Takes rows in as one step. Where rows are refused, `keep` decides whether the others stay; it sees what was done.
   * @throws HostFailure import-cancelled
   */
  async importRows(opts: { readonly label: string; readonly note: string; readonly job: string; readonly rows: readonly ImportRow[]; readonly keep: (counts: ImportCounts) => boolean } & LongWork): Promise<ImportCounts> {
    return this.long((db) => importRows(db, this.now(), opts.label, opts.note, opts.rows), opts);
  }

  /** What a full check finds wrong with the file; nothing where all is well. */
  integrityProblems(): readonly string[] {
    return [...this.db.integrityProblems(), ...wordProblems(this.db)];
  }

  close(): void {
    this.db.close();
  }

  /** One transaction on a connection of its own: whoever reads meanwhile sees the state before it, and the screen stays awake. */
  private async long<T extends { readonly step: number | null }>(work: (db: Db) => Generator<number, T>, opts: { readonly job?: string; readonly keep: (result: T) => boolean } & LongWork): Promise<T> {
    const beside = await openBeside(this.db);
    try {
      beside.begin();
      const running = work(beside);
      for (;;) {
        const next = running.next();
        if (next.done === true) {
          if (next.value.step !== null && opts.keep(next.value)) {
            beside.commit();
            beside.checkpoint();
          }
          return next.value;
        }
        opts.onProgress?.(next.value);
        await new Promise((resolve) => setImmediate(resolve));
        if (opts.isCancelled?.() === true) throw new HostFailure("import-cancelled", { job: opts.job ?? "" });
      }
    } finally {
      // Closing rolls back what was not committed.
      beside.close();
    }
  }

  /** Counting is the slow half of a window, and scrolling changes nothing about it. */
  private totalOf(filter: LineFilter): number {
    const stamp = this.db.stamp();
    if (stamp !== this.totalsStamp || this.totals.size > 50) this.totals.clear();
    this.totalsStamp = stamp;
    const key = JSON.stringify(filter);
    const known = this.totals.get(key);
    if (known !== undefined) return known;
    const total = countOf(this.db, this.hits, filter);
    this.totals.set(key, total);
    return total;
  }
}

/** Opens the drawer file at a path, or makes it. @throws HostFailure drawer-unusable */
export async function openDrawer(opts: DrawerOpts): Promise<DrawerStore> {
  return new DrawerStore(await openDb(opts.path), opts.now);
}

/** Texts without spaces around them, as a table would bring them. */
function tidy<T extends object>(fields: T): T {
  return Object.fromEntries(Object.entries(fields).map(([field, value]: [string, unknown]) => [field, typeof value === "string" ? value.trim() : value])) as T;
}

function certain(step: number | null): number {
  if (step === null) throw new Error("a change was to be written down, and was not");
  return step;
}

import { existsSync, mkdirSync } from "node:fs";
import { dirname } from "node:path";
import type Database from "better-sqlite3";
import { BUSY_TIMEOUT_MS, requireSound, toFailure } from "./damage.ts";
import { migrate, readMigrations } from "./migrate.ts";
import { loadSqlite } from "./sqlite.ts";

type Value = string | number | null;

/** An open drawer file: statements are prepared once, and errors come out as failures a person can read. */
export class Db {
  readonly path: string;
  private readonly raw: Database.Database;
  private readonly statements = new Map<string, Database.Statement<Value[]>>();
  private ownWrites = 0;

  constructor(raw: Database.Database, path: string) {
    this.raw = raw;
    this.path = path;
  }

  all<T>(sql: string, ...values: Value[]): T[] {
    return this.call(() => this.statement(sql).all(...values) as T[]);
  }

  get<T>(sql: string, ...values: Value[]): T | undefined {
    return this.call(() => this.statement(sql).get(...values) as T | undefined);
  }

  /** The first column of the first row; undefined where there is no row. */
  value<T extends Value>(sql: string, ...values: Value[]): T | undefined {
    const row = this.get<Record<string, T>>(sql, ...values);
    return row === undefined ? undefined : Object.values(row)[0];
  }

  /** Row by row, for more than should be held at once. No other statement may write meanwhile. */
  *each<T>(sql: string, ...values: Value[]): Generator<T> {
    try {
      for (const row of this.raw.prepare<Value[]>(sql).iterate(...values)) yield row as T;
    } catch (error) {
      throw toFailure(error, this.path);
    }
  }

  /** Runs a change; gives the new row's key. */
  run(sql: string, ...values: Value[]): number {
    return this.call(() => Number(this.statement(sql).run(...values).lastInsertRowid));
  }

  /** Work that is taken whole or not at all; nobody else writes meanwhile. */
  transaction<T>(work: () => T): T {
    this.begin();
    try {
      const result = work();
      this.commit();
      return result;
    } catch (error) {
      this.rollback();
      throw error;
    }
  }

  /** Several reads of one and the same state. */
  snapshot<T>(work: () => T): T {
    this.call(() => this.raw.exec("BEGIN"));
    try {
      return work();
    } finally {
      // Not a rollback: what was put into temporary tables is to stay.
      if (this.raw.inTransaction) this.raw.exec("COMMIT");
    }
  }

  begin(): void {
    this.call(() => this.raw.exec("BEGIN IMMEDIATE"));
  }

  commit(): void {
    this.call(() => this.raw.exec("COMMIT"));
    this.ownWrites += 1;
  }

  /** Moves a long write from the log into the file, so that reading need not look in both. */
  checkpoint(): void {
    this.call(() => this.raw.pragma("wal_checkpoint(PASSIVE)"));
  }

  rollback(): void {
    if (this.raw.inTransaction) this.raw.exec("ROLLBACK");
  }

  /** Changes whenever anybody has written. */
  stamp(): string {
    return `${this.foreignStamp()}/${this.ownWrites}`;
  }

  /** Changes whenever another connection has written, this one's own work apart. */
  foreignStamp(): string {
    return this.call(() => String(this.raw.pragma("data_version", { simple: true })));
  }

  /** Complaints of the database's own full check; none where all is well. */
  integrityProblems(): readonly string[] {
    const rows = this.all<{ integrity_check: string }>("PRAGMA integrity_check").map((row) => row.integrity_check);
    const orphans = this.all<{ table: string }>("PRAGMA foreign_key_check").map((row) => `${row.table} refers to something that is not there`);
    return [...rows.filter((row) => row !== "ok"), ...orphans];
  }

  /** Puts everything into the one file and closes it. May be called again. */
  close(): void {
    if (!this.raw.open) return;
    this.rollback();
    // Helps the planner to choose between indexes; looks at what needs it only.
    try {
      this.raw.pragma("analysis_limit = 400");
      this.raw.pragma("optimize");
    } catch {
      // Another program is writing: it will look itself.
    }
    this.raw.close();
  }

  private statement(sql: string): Database.Statement<Value[]> {
    let statement = this.statements.get(sql);
    if (statement === undefined) {
      statement = this.raw.prepare<Value[]>(sql);
      this.statements.set(sql, statement);
    }
    return statement;
  }

  private call<T>(work: () => T): T {
    try {
      return work();
    } catch (error) {
      throw toFailure(error, this.path);
    }
  }
}

/**
 * Opens a drawer file, makes it where there is none, and brings an older one up to date.
 * @throws HostFailure drawer-unusable; the file is then as it was
 */
export async function openDb(path: string): Promise<Db> {
  const sqlite = await loadSqlite(path);
  const migrations = readMigrations();
  try {
    mkdirSync(dirname(path), { recursive: true });
    if (existsSync(path)) requireSound(sqlite, path, migrations.length);
    const raw = new sqlite(path, { timeout: BUSY_TIMEOUT_MS });
    try {
      prepareConnection(raw);
      migrate(raw, migrations);
    } catch (error) {
      raw.close();
      throw error;
    }
    return new Db(raw, path);
  } catch (error) {
    throw toFailure(error, path);
  }
}

/** A further connection to a file that is open already, for long work that others should not see half of. */
export async function openBeside(db: Db): Promise<Db> {
  const sqlite = await loadSqlite(db.path);
  try {
    const raw = new sqlite(db.path, { timeout: BUSY_TIMEOUT_MS, fileMustExist: true });
    prepareConnection(raw);
    // Long work touches every index, all over: what fits in memory is written once.
    raw.pragma("cache_size = -100000");
    return new Db(raw, db.path);
  } catch (error) {
    throw toFailure(error, db.path);
  }
}

function prepareConnection(raw: Database.Database): void {
  raw.pragma("journal_mode = WAL");
  // What is committed outlives a power cut too, not only the end of the program.
  raw.pragma("synchronous = FULL");
  raw.pragma("foreign_keys = ON");
  raw.pragma("trusted_schema = OFF");
  raw.pragma("temp_store = MEMORY");
}

import { readdirSync, readFileSync } from "node:fs";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import type Database from "better-sqlite3";

/** In the header of every drawer: "BwDr". */
export const APPLICATION_ID = 0x42774472;

/** Beside this file in a checkout, beside the program's one module when built. */
const FOLDER = join(dirname(fileURLToPath(import.meta.url)), "migrations");

/** One step from a schema version to the next. */
export interface Migration {
  readonly version: number;
  readonly sql: string;
}

/** All migrations in order; the last one's version is the newest that this program knows. */
export function readMigrations(folder: string = FOLDER): readonly Migration[] {
  const names = readdirSync(folder).filter((name) => /^\d{4}-.+\.sql$/.test(name)).sort();
  const migrations = names.map((name) => ({ version: Number(name.slice(0, 4)), sql: readFileSync(join(folder, name), "utf8") }));
  migrations.forEach(({ version }, index) => {
    if (version !== index + 1) throw new Error(`migrations must be numbered without a gap, found ${names[index]}`);
  });
  return migrations;
}

/** Brings a database to the newest version, or to `upTo`; each migration is taken whole or not at all. */
export function migrate(raw: Database.Database, migrations: readonly Migration[], upTo = migrations.length): void {
  for (const { version, sql } of migrations.slice(0, upTo)) {
    raw.exec("BEGIN IMMEDIATE");
    try {
      // Asked under the lock: another program may have migrated meanwhile.
      if (Number(raw.pragma("user_version", { simple: true })) < version) {
        if (version === 1) raw.pragma(`application_id = ${APPLICATION_ID}`);
        raw.exec(sql);
        raw.pragma(`user_version = ${version}`);
      }
      raw.exec("COMMIT");
    } catch (error) {
      if (raw.inTransaction) raw.exec("ROLLBACK");
      throw error;
    }
  }
}

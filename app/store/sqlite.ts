import type Database from "better-sqlite3";
import { HostFailure } from "../../core/contract/failures.ts";

export type SqliteModule = typeof Database;

/** The oldest Node whose native interface the database needs: on an older one it ends the process without a word. */
const OLDEST = [22, 14] as const;

/** Whether this Node can load the database. */
export function canLoadSqlite(version: string): boolean {
  const [major = 0, minor = 0] = version.split(".").map(Number);
  // The 23 line has the interface from 23.6 on.
  if (major === 23) return minor >= 6;
  return major > OLDEST[0] || (major === OLDEST[0] && minor >= OLDEST[1]);
}

/** Loads the database library, or says why it cannot be. @throws HostFailure drawer-unusable */
export async function loadSqlite(path: string, version: string = process.versions.node): Promise<SqliteModule> {
  if (!canLoadSqlite(version)) {
    throw new HostFailure("drawer-unusable", { path, reason: "old-runtime", detail: `this is ${version}`, backup: null, fileVersion: null, programVersion: null });
  }
  return (await import("better-sqlite3")).default;
}

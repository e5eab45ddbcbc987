import { createHash } from "node:crypto";
import { closeSync, constants, copyFileSync, existsSync, openSync, readFileSync, readSync, statSync } from "node:fs";
import { extname } from "node:path";
import { HostFailure, type FailureData } from "../../core/contract/failures.ts";
import { APPLICATION_ID } from "./migrate.ts";
import type { SqliteModule } from "./sqlite.ts";

type Unusable = FailureData<"drawer-unusable">;

const MAGIC = "SQLite format 3\0";
const HEADER_BYTES = 100;

/** A failure about the file itself. */
export function unusable(path: string, reason: Unusable["reason"], detail: string, more: Partial<Unusable> = {}): HostFailure {
  return new HostFailure("drawer-unusable", { path, reason, detail, backup: null, fileVersion: null, programVersion: null, ...more });
}

/**
 * Looks at an existing file without writing to it: is it a drawer, is it sound, does this program know its version?
 * A damaged file is copied before anybody is told, and left as it is.
 * @throws HostFailure drawer-unusable
 */
export function requireSound(sqlite: SqliteModule, path: string, newestVersion: number): void {
  const header = readHeader(path);
  // What a first start leaves behind that was ended before it had written anything.
  if (header.length === 0) return;
  if (header.length < HEADER_BYTES) throw unusable(path, "damaged", "it is cut short", { backup: keepCopy(path) });
  if (header.toString("latin1", 0, MAGIC.length) !== MAGIC) throw unusable(path, "not-a-drawer", "its first bytes are not those of a database", { backup: keepCopy(path) });

  let db;
  try {
    db = new sqlite(path, { readonly: true, fileMustExist: true, timeout: BUSY_TIMEOUT_MS });
    const version = Number(db.pragma("user_version", { simple: true }));
    const applicationId = Number(db.pragma("application_id", { simple: true }));
    const tables = Number(db.prepare("SELECT count(*) FROM sqlite_schema").pluck().get());
    if (applicationId !== APPLICATION_ID && (applicationId !== 0 || tables > 0)) throw unusable(path, "not-a-drawer", "it is another program's database");
    if (version > newestVersion) throw unusable(path, "newer", "", { fileVersion: version, programVersion: newestVersion });
    const complaint = String(db.pragma("quick_check(1)", { simple: true }));
    if (complaint !== "ok") throw unusable(path, "damaged", complaint.replaceAll(/\s+/g, " "), { backup: keepCopy(path) });
  } catch (error) {
    throw toFailure(error, path);
  } finally {
    db?.close();
  }
}

/** How long to wait for another program's write, ms. */
export const BUSY_TIMEOUT_MS = 5000;

/** What an error of the database means to the user; anything else comes back as it is. */
export function toFailure(error: unknown, path: string): unknown {
  if (error instanceof HostFailure || !(error instanceof Error) || !("code" in error) || typeof error.code !== "string") return error;
  const { code, message } = error;
  if (code.startsWith("SQLITE_CORRUPT") || code === "SQLITE_NOTADB") return unusable(path, "damaged", message, { backup: keepCopy(path) });
  if (code.startsWith("SQLITE_BUSY") || code.startsWith("SQLITE_LOCKED")) return unusable(path, "busy", message);
  if (code === "SQLITE_FULL" || code === "ENOSPC") return unusable(path, "full", message);
  if (code.startsWith("SQLITE_READONLY") || code === "SQLITE_PERM" || code === "EACCES" || code === "EPERM" || code === "EROFS") return unusable(path, "permission", message);
  if (code === "SQLITE_CANTOPEN" && !isReadable(path)) return unusable(path, "permission", message);
  if (code === "SQLITE_CANTOPEN" || code.startsWith("SQLITE_IOERR") || /^E[A-Z]+$/.test(code)) return unusable(path, "system", message);
  return error;
}

function isReadable(path: string): boolean {
  try {
    closeSync(openSync(path, constants.O_RDWR));
    return true;
  } catch (error) {
    return !(error instanceof Error && "code" in error && (error.code === "EACCES" || error.code === "EPERM" || error.code === "EROFS"));
  }
}

function readHeader(path: string): Buffer {
  try {
    if (!statSync(path).isFile()) throw unusable(path, "not-a-drawer", "it is not an ordinary file");
    const file = openSync(path, "r");
    try {
      const bytes = Buffer.alloc(HEADER_BYTES);
      return bytes.subarray(0, readSync(file, bytes, 0, HEADER_BYTES, 0));
    } finally {
      closeSync(file);
    }
  } catch (error) {
    throw toFailure(error, path);
  }
}

/** A copy beside the file, named by its contents: the same damage is copied once, however often it is met. Null where no copy could be made. */
function keepCopy(path: string): string | null {
  try {
    const print = createHash("sha256").update(readFileSync(path)).digest("hex").slice(0, 8);
    const extension = extname(path);
    const copy = `${extension === "" ? path : path.slice(0, -extension.length)}.damaged-${print}${extension}`;
    if (!existsSync(copy)) copyFileSync(path, copy, constants.COPYFILE_EXCL);
    // Writes that had not reached the file itself yet.
    if (existsSync(`${path}-wal`) && !existsSync(`${copy}-wal`)) copyFileSync(`${path}-wal`, `${copy}-wal`, constants.COPYFILE_EXCL);
    return copy;
  } catch {
    return null;
  }
}

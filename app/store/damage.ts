import { createHash } from "node:crypto";
import { closeSync, constants, copyFileSync, existsSync, openSync, readFileSync, readSync, statSync } from "node:fs";
import { extname } from "node:path";
import { HostFailure, type FailureData } from "../../core/contract/failures.ts";
import { APPLICATION_ID } from "./migrate.ts";
import type { SqliteModule } from "./sqlite.ts";

type Unusable = FailureData<"drawer-unusable">;

const MAGIC = "SQLite format 3\0";
/** The database's own header of 100 bytes, and that of its first page. */
const HEADER_BYTES = 108;
/** How a schema row begins on its page: kind, name and table without anything between them, as no text about a drawer has them. */
const SCHEMA_ROW = Buffer.from("triggerledger_is_never_changedledger");
/** The schema was written first, so it lies near the beginning. */
const SCHEMA_WITHIN = 32 * 1024 * 1024;

/** A failure about the file itself. */
export function unusable(path: string, reason: Unusable["reason"], detail: string, more: Partial<Unusable> = {}): HostFailure {
  return new HostFailure("drawer-unusable", { path, reason, detail, backup: null, fileVersion: null, programVersion: null, ...more });
}

/**
 * Looks at an existing file without writing to it: is it a drawer, is it sound, does this program know its version?
 *
 * A damaged drawer is copied before anybody is told, and left as it is. A file that never was one is left as it is with
 * nothing put beside it, so it has to be known which of the two a file is, the more so where the header itself is what
 * was damaged. A file is a drawer if it has the database's first bytes and the drawer's mark in its header, or either of
 * them (a header damaged in part; other databases have the first bytes too, but then another mark or none), or a row of
 * the drawer's schema on one of its pages, which outlives the loss of the whole first page. Where neither mark nor schema
 * is left, nothing tells the file from any other: it is refused without a copy, and nothing is lost by that, since it is
 * not written to.
 *
 * The header is read as plain bytes, since opening a foreign database could leave its log beside it.
 * @throws HostFailure drawer-unusable
 */
export function requireSound(sqlite: SqliteModule, path: string, newestVersion: number): void {
  const header = readHeader(path);
  // What a first start leaves behind that was ended before it had written anything.
  if (header.length === 0) return;
  const isDatabase = header.toString("latin1", 0, MAGIC.length) === MAGIC;
  const isWhole = header.length === HEADER_BYTES;
  const mark = header.length >= 72 ? header.readUInt32BE(68) : null;
  const isDrawer = mark === APPLICATION_ID || (isDatabase && (!isWhole || isEmptyDatabase(header))) || hasOurSchema(path);
  if (!isDrawer) throw unusable(path, "not-a-drawer", isDatabase ? "it is another program's database" : "its first bytes are not those of a database");
  if (!isDatabase || !isWhole) throw unusable(path, "damaged", isDatabase ? "it is cut short" : "its first bytes are not those of a database any more", { backup: keepCopy(path) });
  requireKnown(path, header.readUInt32BE(60), newestVersion);

  let db;
  try {
    db = new sqlite(path, { readonly: true, fileMustExist: true, timeout: BUSY_TIMEOUT_MS });
    // Asked of the database, since the newest pages may be in its log only.
    const version = Number(db.pragma("user_version", { simple: true }));
    const applicationId = Number(db.pragma("application_id", { simple: true }));
    const tables = Number(db.prepare("SELECT count(*) FROM sqlite_schema").pluck().get());
    if (applicationId !== APPLICATION_ID && tables > 0) {
      if (hasOurSchema(path)) throw unusable(path, "damaged", "its header does not say any more that it is a drawer", { backup: keepCopy(path) });
      throw unusable(path, "not-a-drawer", "it is another program's database");
    }
    requireKnown(path, version, newestVersion);
    const complaint = String(db.pragma("quick_check(1)", { simple: true }));
    if (complaint !== "ok") throw unusable(path, "damaged", complaint.replaceAll(/\s+/g, " "), { backup: keepCopy(path) });
  } catch (error) {
    throw toFailure(error, path);
  } finally {
    db?.close();
  }
}

function requireKnown(path: string, version: number, newestVersion: number): void {
  if (version > newestVersion) throw unusable(path, "newer", "", { fileVersion: version, programVersion: newestVersion });
}

/** A database of nobody's, with nothing in it: its first page is a leaf without a cell. */
function isEmptyDatabase(header: Buffer): boolean {
  return header.readUInt32BE(68) === 0 && header[100] === 13 && header.readUInt16BE(103) === 0;
}

/** Whether a page of the file, or of its log, holds a row of a drawer's schema. */
function hasOurSchema(path: string): boolean {
  return [path, `${path}-wal`].some((file) => {
    let descriptor;
    try {
      descriptor = openSync(file, "r");
    } catch (error) {
      if (file === path) throw toFailure(error, path);
      return false;
    }
    try {
      const chunk = Buffer.alloc(1024 * 1024);
      // Each chunk begins with the end of the one before, so that no row is cut in two.
      const overlap = SCHEMA_ROW.length - 1;
      for (let at = 0; at < SCHEMA_WITHIN; at += chunk.length - overlap) {
        const length = readSync(descriptor, chunk, 0, chunk.length, at);
        if (chunk.subarray(0, length).includes(SCHEMA_ROW)) return true;
        if (length < chunk.length) return false;
      }
      return false;
    } finally {
      closeSync(descriptor);
    }
  });
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

import { HostFailure } from "../../core/contract/failures.ts";

/** The system's code of a failed call (`ENOENT`, `EACCES`, …), or "" for any other error. */
export function systemCode(error: unknown): string {
  return error instanceof Error && "code" in error && typeof error.code === "string" ? error.code : "";
}

/** What a failed read means to the user. */
export function readFailure(path: string, error: unknown): HostFailure {
  const code = systemCode(error);
  if (code === "ENOENT" || code === "ENOTDIR") return new HostFailure("file-not-found", { path });
  const reason = code === "EISDIR" ? "folder" : isPermission(code) ? "permission" : "system";
  return new HostFailure("file-unreadable", { path, reason, detail: reason === "system" ? detail(error) : "" });
}

/** What a failed write means to the user. */
export function writeFailure(path: string, error: unknown): HostFailure {
  const code = systemCode(error);
  if (isPermission(code)) return new HostFailure("file-unwritable", { path, reason: "permission", detail: "" });
  if (code === "ENOSPC" || code === "EDQUOT" || code === "EFBIG") return new HostFailure("file-unwritable", { path, reason: "full", detail: "" });
  if (code === "EISDIR" || code === "ENOENT" || code === "ENOTDIR") return new HostFailure("file-unwritable", { path, reason: "folder", detail: "" });
  return new HostFailure("file-unwritable", { path, reason: "system", detail: detail(error) });
}

function isPermission(code: string): boolean {
  return code === "EACCES" || code === "EPERM" || code === "EROFS";
}

function detail(error: unknown): string {
  return systemCode(error) || (error instanceof Error ? error.message : String(error));
}

import { open, stat } from "node:fs/promises";
import { HostFailure } from "../../core/contract/failures.ts";
import { readFailure } from "./system-error.ts";

/** An ordinary file's bytes, `most` of them at most. @throws HostFailure */
export async function readWhole(path: string, most: number): Promise<Buffer> {
  try {
    // Asked before opening: opening a pipe would wait for ever.
    const info = await stat(path);
    if (info.isDirectory()) throw new HostFailure("file-unreadable", { path, reason: "folder", detail: "" });
    if (!info.isFile()) throw new HostFailure("file-unreadable", { path, reason: "system", detail: "not an ordinary file" });
    if (info.size > most) throw new HostFailure("file-unreadable", { path, reason: "too-large", detail: "" });
    const handle = await open(path, "r");
    try {
      return await handle.readFile();
    } finally {
      await handle.close();
    }
  } catch (error) {
    throw error instanceof HostFailure ? error : readFailure(path, error);
  }
}

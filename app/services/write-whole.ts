import { randomBytes } from "node:crypto";
import { open, realpath, rename, stat, unlink } from "node:fs/promises";
import { dirname, join } from "node:path";

/**
 * Writes a file whole or not at all: into a temporary file beside it, flushed, then renamed over it.
 * A crash, a full disk or a pulled plug leaves the old file as it was. The old file's mode and owner are kept. Where the
 * path is a link, the file behind it is the one that is replaced; what is no file (a folder, a device) never is.
 * The node file handle writes on until every byte is down, so that a short write cannot pass for a whole one.
 */
export async function writeWhole(path: string, text: string): Promise<void> {
  const target = await realpath(path).catch(() => path);
  const folder = dirname(target);
  const old = await stat(target).catch(() => null);
  if (old !== null && !old.isFile()) throw new Error("not an ordinary file");
  // A short name of its own: one built on the file's name could grow too long for the file system.
  const temp = join(folder, `.bandwright-${randomBytes(8).toString("hex")}.tmp`);
  const handle = await open(temp, "wx", old === null ? 0o666 : 0o600);
  try {
    try {
      await handle.writeFile(text, "utf8");
      if (old !== null) {
        // Owner first: changing it clears some mode bits. Not being allowed to is no reason to lose the save.
        await handle.chown(old.uid, old.gid).catch(() => undefined);
        await handle.chmod(old.mode & 0o777);
      }
      await handle.sync();
    } finally {
      await handle.close();
    }
    await rename(temp, target);
  } catch (error) {
    await unlink(temp).catch(() => undefined);
    throw error;
  }
  await syncFolder(folder);
}

/** Makes the rename itself last. Windows cannot open a folder, and does without. */
async function syncFolder(folder: string): Promise<void> {
  const handle = await open(folder, "r").catch(() => null);
  if (handle === null) return;
  try {
    await handle.sync();
  } catch {
    // Some network file systems refuse; the file's own contents are flushed already.
  } finally {
    await handle.close();
  }
}

import { lstat, realpath } from "node:fs/promises";
import { basename, dirname, isAbsolute, join, relative, resolve, sep } from "node:path";
import { HostFailure } from "../../core/contract/failures.ts";
import { readFailure, systemCode } from "./system-error.ts";

/** A folder whose contents the session may use. */
export interface Root {
  /** As the chooser shows it. */
  readonly name: string;
  readonly path: string;
}

/** Decides which paths a session may touch: those below its roots, and single files the user has picked. */
export interface PathGuard {
  /** The roots with their links followed, as they are now. */
  roots(): Promise<readonly Root[]>;
  /** The path with every link followed; throws `not-allowed` where that is outside. The file itself need not exist. */
  resolve(path: string): Promise<string>;
  /** Lets this one file in: the user picked it in a dialog, or asked for it from outside. */
  grant(path: string): Promise<void>;
}

/** Builds a guard over the given roots. A root may be missing still: the first save can make it. */
export function createPathGuard(roots: readonly Root[]): PathGuard {
  const granted = new Set<string>();

  async function realRoots(): Promise<readonly Root[]> {
    return Promise.all(roots.map(async (root) => ({ name: root.name, path: await followLinks(root.path) })));
  }

  return {
    roots: realRoots,
    async resolve(path) {
      if (!isAbsolute(path)) throw new HostFailure("not-allowed", { path });
      const real = await followLinks(path);
      if (granted.has(real)) return real;
      for (const root of await realRoots()) if (isInside(root.path, real)) return real;
      throw new HostFailure("not-allowed", { path });
    },
    async grant(path) {
      granted.add(await followLinks(resolve(path)));
    },
  };
}

/** Whether `path` is `folder` or below it; both with their links followed. */
export function isInside(folder: string, path: string): boolean {
  const rest = relative(folder, path);
  return rest === "" || (rest !== ".." && !rest.startsWith(`..${sep}`) && !isAbsolute(rest));
}

/**
 * Follows every link in a path, also where its last parts do not exist yet.
 * A link that leads nowhere is refused: writing "to it" would make a file in a place nobody checked.
 */
async function followLinks(path: string): Promise<string> {
  try {
    return await realpath(path);
  } catch (error) {
    const code = systemCode(error);
    if (code === "ELOOP") throw new HostFailure("not-allowed", { path });
    if (code !== "ENOENT" && code !== "ENOTDIR") throw readFailure(path, error);
  }
  const entry = await lstat(path).catch(() => null);
  if (entry?.isSymbolicLink() === true) throw new HostFailure("not-allowed", { path });
  const normal = resolve(path);
  const parent = dirname(normal);
  if (parent === normal) return normal;
  return join(await followLinks(parent), basename(normal));
}

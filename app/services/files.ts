import { readdir, stat } from "node:fs/promises";
import { dirname, join } from "node:path";
import { HostFailure } from "../../core/contract/failures.ts";
import type { ArgsOf, ResultOf } from "../../core/contract/methods.ts";
import { isInside, type PathGuard } from "./path-guard.ts";
import { isProjectName, isUnlocked } from "./projects.ts";
import { readFailure, systemCode } from "./system-error.ts";

type Listing = ResultOf<"files.list">;
type Entry = Listing["entries"][number];

/** What the file list works on. */
export interface FilesOpts {
  readonly guard: PathGuard;
  readonly projectsFolder: string;
  readonly demoFolder: string;
}

/** Folders and projects below the session's roots, for a chooser in the page. */
export interface Files {
  readonly list: (args: ArgsOf<"files.list">) => Promise<Listing>;
}

/** Builds the file list. */
export function createFiles(opts: FilesOpts): Files {
  return {
    async list({ folder: asked }) {
      const folder = await opts.guard.resolve(asked ?? opts.projectsFolder);
      const roots = await opts.guard.roots();
      // The whole way up has to be allowed, so that a single picked file does not show its neighbours.
      if (!roots.some((root) => isInside(root.path, folder))) throw new HostFailure("not-allowed", { path: folder });
      const projectsFolder = await opts.guard.resolve(opts.projectsFolder);
      const names = await readNames(folder, folder === projectsFolder);
      const entries = (await Promise.all((names ?? []).map((name) => readEntry(opts.guard, folder, name)))).filter((entry) => entry !== null);
      entries.sort((a, b) => (a.kind === b.kind ? a.name.localeCompare(b.name, "en", { numeric: true }) : a.kind === "folder" ? -1 : 1));
      return {
        folder,
        parent: roots.some((root) => root.path !== folder && isInside(root.path, folder)) ? dirname(folder) : null,
        roots,
        entries,
        writable: !isInside(await opts.guard.resolve(opts.demoFolder), folder) && (names === null || (await isUnlocked(folder))),
      };
    },
  };
}

/** Null for the projects folder before its first save, which will make it. */
async function readNames(folder: string, mayBeMissing: boolean): Promise<readonly string[] | null> {
  try {
    return await readdir(folder);
  } catch (error) {
    const code = systemCode(error);
    if (mayBeMissing && code === "ENOENT") return null;
    throw readFailure(folder, error);
  }
}

/** Null for whatever the chooser does not show: hidden files, other files, links that lead outside, the unreadable. */
async function readEntry(guard: PathGuard, folder: string, name: string): Promise<Entry | null> {
  if (name.startsWith(".")) return null;
  const path = join(folder, name);
  try {
    await guard.resolve(path);
    const info = await stat(path);
    if (info.isDirectory()) return { name, kind: "folder", path, modified: info.mtimeMs };
    if (info.isFile() && isProjectName(name)) return { name, kind: "project", path, modified: info.mtimeMs };
    return null;
  } catch {
    return null;
  }
}


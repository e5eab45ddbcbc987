import { createHash } from "node:crypto";
import { access, constants, mkdir, readdir, stat } from "node:fs/promises";
import { basename, dirname, extname, join } from "node:path";
import { HostFailure } from "../../core/contract/failures.ts";
import type { ArgsOf, ResultOf } from "../../core/contract/methods.ts";
import { FaultError, type Fault } from "../../core/errors.ts";
import type { Project } from "../../core/model/project.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { serializeProject } from "../../core/model/serialize.ts";
import { isInside, type PathGuard } from "./path-guard.ts";
import { readWhole } from "./read-whole.ts";
import { readFailure, systemCode, writeFailure } from "./system-error.ts";
import { writeWhole } from "./write-whole.ts";

export const PROJECT_EXTENSION = ".bandwright";

/** A thousand bands take well under a megabyte; anything past this is some other file. */
export const MAX_PROJECT_BYTES = 16 * 1024 * 1024;

/** What the project service works on. */
export interface ProjectsOpts {
  readonly guard: PathGuard;
  /** Made by the first save into it. */
  readonly projectsFolder: string;
  readonly demoFolder: string;
  /** The file the user named at start. */
  readonly launchPath: string | null;
}

/** Opening, saving and the demos. */
export interface Projects {
  readonly launch: () => Promise<ResultOf<"project.launch">>;
  readonly demos: () => Promise<ResultOf<"project.demos">>;
  readonly open: (args: ArgsOf<"project.open">) => Promise<ResultOf<"project.open">>;
  readonly save: (args: ArgsOf<"project.save">) => Promise<ResultOf<"project.save">>;
}

/** Builds the project service. */
export function createProjects(opts: ProjectsOpts): Projects {
  /** What was opened or saved last: a page that is loaded anew goes on with it. */
  let last: string | null = null;

  async function demos(): Promise<ResultOf<"project.demos">> {
    const found: { path: string; name: string; about: string }[] = [];
    for (const listed of await demoPaths(opts.demoFolder)) {
      // As `open` gives it back, so that the two can be compared.
      const path = await opts.guard.resolve(listed);
      const { project } = restore(path, (await readProjectFile(path)).text);
      found.push({ path, name: project.name, about: project.notes ?? "" });
    }
    return { demos: found };
  }

  async function isDemo(path: string): Promise<boolean> {
    return isInside(await opts.guard.resolve(opts.demoFolder), path);
  }

  return {
    demos,

    async launch() {
      if (last !== null && (await isThere(last))) return { path: last };
      if (opts.launchPath !== null) {
        // The user named this file: it is let in even where it is a link to another folder.
        await opts.guard.grant(opts.launchPath);
        return { path: opts.launchPath };
      }
      const shipped = await demoPaths(opts.demoFolder);
      return { path: shipped.find((path) => basename(path) === OPENING_DEMO) ?? shipped[0] ?? null };
    },

    async open({ path: asked }) {
      const path = await opts.guard.resolve(asked);
      const { text, fingerprint } = await readProjectFile(path);
      const { project, warnings } = restore(path, text);
      const writable = !(await isDemo(path)) && (await isWritable(path));
      last = path;
      return { path, writable, fingerprint, project, warnings };
    },

    async save({ path: asked, project, fingerprint, replace }) {
      const path = await opts.guard.resolve(withExtension(asked));
      if (await isDemo(path)) throw new HostFailure("read-only", { path, why: "demo" });
      const text = soundText(path, project);
      await requireReplaceable(path, fingerprint, replace);
      try {
        if (dirname(path) === (await opts.guard.resolve(opts.projectsFolder))) await mkdir(dirname(path), { recursive: true });
        await writeWhole(path, text);
      } catch (error) {
        throw writeFailure(path, error);
      }
      last = path;
      return { path, fingerprint: fingerprintOf(Buffer.from(text, "utf8")) };
    },
  };
}

/** The path as it will be saved: with the project extension, whichever way the user left it off. */
export function withExtension(path: string): string {
  return extname(path).toLowerCase() === PROJECT_EXTENSION ? path : `${path}${PROJECT_EXTENSION}`;
}

/** Whether a file name is a project's. */
export function isProjectName(name: string): boolean {
  return extname(name).toLowerCase() === PROJECT_EXTENSION;
}

/** What a start without a file shows. */
const OPENING_DEMO = "saltmarsh-voice-channel.bandwright";

async function demoPaths(folder: string): Promise<readonly string[]> {
  try {
    const names = await readdir(folder);
    return names.filter(isProjectName).sort().map((name) => join(folder, name));
  } catch (error) {
    if (systemCode(error) === "ENOENT") return [];
    throw readFailure(folder, error);
  }
}

async function isThere(path: string): Promise<boolean> {
  try {
    await access(path);
    return true;
  } catch {
    return false;
  }
}

interface ProjectFile {
  readonly text: string;
  readonly fingerprint: string;
}

async function readProjectFile(path: string): Promise<ProjectFile> {
  const bytes = await readWhole(path, MAX_PROJECT_BYTES);
  try {
    return { text: new TextDecoder("utf-8", { fatal: true }).decode(bytes), fingerprint: fingerprintOf(bytes) };
  } catch {
    throw new HostFailure("file-unreadable", { path, reason: "not-text", detail: "" });
  }
}

function fingerprintOf(bytes: Uint8Array): string {
  return createHash("sha256").update(bytes).digest("hex");
}

function restore(path: string, text: string): { readonly project: Project; readonly warnings: readonly Fault[] } {
  try {
    return restoreProject(text);
  } catch (error) {
    if (error instanceof FaultError) throw new HostFailure("project-faults", { path, faults: error.faults });
    throw error;
  }
}

/**
 * The text to write, proven to open again: what came from the screen is restored like any file,
 * and so is the text made of it. A file is never replaced by something that would not open.
 */
function soundText(path: string, project: Project): string {
  const text = serializeProject(restore(path, JSON.stringify(project)).project);
  restore(path, text);
  return text;
}

/** Throws where writing to `path` would lose somebody's work, or cannot be done. */
async function requireReplaceable(path: string, fingerprint: string | null, replace: boolean): Promise<void> {
  let info;
  try {
    info = await stat(path);
  } catch (error) {
    if (systemCode(error) !== "ENOENT") throw writeFailure(path, error);
    if (fingerprint !== null && !replace) throw new HostFailure("changed-on-disk", { path });
    return;
  }
  if (info.isDirectory()) throw new HostFailure("file-unwritable", { path, reason: "folder", detail: "" });
  if (!info.isFile()) throw new HostFailure("file-unwritable", { path, reason: "system", detail: "not an ordinary file" });
  if (!(await isWritable(path))) throw new HostFailure("read-only", { path, why: "permission" });
  if (replace) return;
  if (fingerprint === null) throw new HostFailure("file-exists", { path });
  if (info.size > MAX_PROJECT_BYTES || fingerprintOf(await readWhole(path, MAX_PROJECT_BYTES)) !== fingerprint) throw new HostFailure("changed-on-disk", { path });
}

/** Whether a save may replace the file: a rename would get past the file's own protection, so that both are asked. */
async function isWritable(path: string): Promise<boolean> {
  return (await isUnlocked(path)) && (await isUnlocked(dirname(path)));
}

/** Whether a file or folder may be written to. Nothing stops an administrator but the mode: whoever locked it meant it. */
export async function isUnlocked(path: string): Promise<boolean> {
  try {
    await access(path, constants.W_OK);
    return ((await stat(path)).mode & 0o222) !== 0;
  } catch {
    return false;
  }
}


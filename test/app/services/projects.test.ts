import { chmod, mkdir, mkdtemp, readdir, readFile, rename, rm, stat, symlink, truncate, utimes, writeFile } from "node:fs/promises";
import { execFileSync } from "node:child_process";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, test } from "vitest";
import { createFiles, type Files } from "../../../app/services/files.ts";
import { createPathGuard, type PathGuard } from "../../../app/services/path-guard.ts";
import { createProjects, type Projects } from "../../../app/services/projects.ts";
import type { ArgsOf } from "../../../core/contract/methods.ts";
import { newProject } from "../../../core/model/new-project.ts";
import type { Project } from "../../../core/model/project.ts";
import { serializeProject } from "../../../core/model/serialize.ts";
import { asOrdinaryUser } from "../../helpers/ordinary-user.ts";

let base = "";
let mine = "";
let demo = "";
let outside = "";
let guard: PathGuard;
let projects: Projects;
let files: Files;

beforeEach(async () => {
  base = await mkdtemp(join(tmpdir(), "bandwright-projects-"));
  // An ordinary user has to get in, see `asOrdinaryUser`.
  await chmod(base, 0o755);
  mine = join(base, "home", "Bandwright");
  demo = join(base, "demo");
  outside = join(base, "outside");
  for (const folder of [mine, demo, outside]) await mkdir(folder, { recursive: true });
  await writeProject(join(demo, "voice.bandwright"), { ...newProject(), name: "Voice channel", notes: "Ten bands." });
  guard = createPathGuard([
    { name: "My projects", path: mine },
    { name: "Demos", path: demo },
  ]);
  const opts = { guard, projectsFolder: mine, demoFolder: demo, launchPath: null };
  projects = createProjects(opts);
  files = createFiles(opts);
});
afterEach(() => rm(base, { recursive: true, force: true }));

async function writeProject(path: string, project: Project = newProject()): Promise<string> {
  await writeFile(path, serializeProject(project));
  return path;
}

function saveArgs(path: string, more: Partial<ArgsOf<"project.save">> = {}): ArgsOf<"project.save"> {
  return { path, project: newProject(), fingerprint: null, replace: false, ...more };
}

describe("opening", () => {
  test.each(["plain.bandwright", "größer Ω 電圧 🎚.bandwright", "with space & 'quotes' \"two\" $HOME.bandwright", "UPPER.BANDWRIGHT", "-dash.bandwright"])("%s", async (name) => {
    const path = await writeProject(join(mine, name), { ...newProject(), name: "Ω" });
    const opened = await projects.open({ path });
    expect(opened).toMatchObject({ path, writable: true, warnings: [] });
    expect(opened.project.name).toBe("Ω");
  });

  test("tells what the file lacks, and changes nothing", async () => {
    const path = join(mine, "bad.bandwright");
    const text = serializeProject(newProject()).replace('"positive": 15', '"positive": -15');
    await writeFile(path, text);
    await expect(projects.open({ path })).rejects.toMatchObject({ code: "project-faults", data: { path, faults: [{ path: "supply.positive" }] } });
    expect(await readFile(path, "utf8")).toBe(text);
  });

  test.each([
    ["empty", ""],
    ["not JSON", "{"],
    ["another program's", '{"format":"something-else","version":1}'],
    ["of a later version", '{"format":"bandwright-project","version":99}'],
  ])("a file that is %s has faults", async (_what, text) => {
    const path = join(mine, "bad.bandwright");
    await writeFile(path, text);
    await expect(projects.open({ path })).rejects.toMatchObject({ code: "project-faults" });
  });

  test("a file that is not there", async () => {
    const path = join(mine, "none.bandwright");
    await expect(projects.open({ path })).rejects.toMatchObject({ code: "file-not-found", data: { path } });
    await expect(projects.open({ path: join(demo, "voice.bandwright", "inner.bandwright") })).rejects.toMatchObject({ code: "file-not-found" });
  });

  test("a folder", async () => {
    await mkdir(join(mine, "folder.bandwright"));
    await expect(projects.open({ path: join(mine, "folder.bandwright") })).rejects.toMatchObject({ code: "file-unreadable", data: { reason: "folder" } });
  });

  test("bytes that are no text", async () => {
    const path = join(mine, "bytes.bandwright");
    await writeFile(path, Buffer.from([0x7b, 0xff, 0xfe, 0x00, 0x7d]));
    await expect(projects.open({ path })).rejects.toMatchObject({ code: "file-unreadable", data: { reason: "not-text" } });
  });

  test("twenty megabytes of nonsense, without reading them", async () => {
    const path = join(mine, "huge.bandwright");
    await writeFile(path, "{");
    await truncate(path, 20_000_000);
    await expect(projects.open({ path })).rejects.toMatchObject({ code: "file-unreadable", data: { reason: "too-large" } });
  });

  test("ten megabytes of nonsense, with a fault", async () => {
    const path = join(mine, "large.bandwright");
    await writeFile(path, `[${"1,".repeat(5_000_000)}1]`);
    await expect(projects.open({ path })).rejects.toMatchObject({ code: "project-faults" });
  });

  test("a pipe, which would keep a reader waiting for ever", async () => {
    const path = join(mine, "pipe.bandwright");
    execFileSync("mkfifo", [path]);
    await expect(projects.open({ path })).rejects.toMatchObject({ code: "file-unreadable", data: { reason: "system" } });
  });

  test("a file that the user may not read", async () => {
    const path = await writeProject(join(mine, "locked.bandwright"));
    await chmod(path, 0o000);
    await expect(asOrdinaryUser(() => projects.open({ path }))).rejects.toMatchObject({ code: "file-unreadable", data: { path, reason: "permission" } });
  });

  test("a write-protected file and a demo are not writable", async () => {
    const path = await writeProject(join(mine, "kept.bandwright"));
    await chmod(path, 0o444);
    expect((await projects.open({ path })).writable).toBe(false);
    expect((await projects.open({ path: join(demo, "voice.bandwright") })).writable).toBe(false);
  });
});

describe("which paths are let in", () => {
  test.each(["/etc/hostname", "relative.bandwright", "", "../up.bandwright"])("not %j", async (path) => {
    await expect(projects.open({ path })).rejects.toMatchObject({ code: "not-allowed" });
  });

  test("not a relative path, even where it would lead inside", async () => {
    await writeProject(join(mine, "a.bandwright"));
    const before = process.cwd();
    process.chdir(mine);
    try {
      await expect(projects.open({ path: "a.bandwright" })).rejects.toMatchObject({ code: "not-allowed" });
    } finally {
      process.chdir(before);
    }
  });

  test("not what is outside the roots, whether it exists or not, and however it is written", async () => {
    const secret = await writeProject(join(outside, "secret.bandwright"));
    for (const path of [secret, join(outside, "none.bandwright"), `${mine}/../../outside/secret.bandwright`, `${mine}-2/a.bandwright`]) {
      await expect(projects.open({ path })).rejects.toMatchObject({ code: "not-allowed" });
      await expect(projects.save(saveArgs(path, { replace: true }))).rejects.toMatchObject({ code: "not-allowed" });
    }
    expect(await readdir(outside)).toEqual(["secret.bandwright"]);
  });

  test("not through links that lead outside: to a file, to a folder, to nowhere, to themselves", async () => {
    const secret = await writeProject(join(outside, "secret.bandwright"));
    await symlink(secret, join(mine, "file.bandwright"));
    await symlink(outside, join(mine, "folder"));
    await symlink(join(outside, "new.bandwright"), join(mine, "dangling.bandwright"));
    await symlink(join(mine, "loop.bandwright"), join(mine, "loop.bandwright"));
    for (const name of ["file.bandwright", "folder/secret.bandwright", "folder/new.bandwright", "dangling.bandwright", "loop.bandwright"]) {
      const path = join(mine, name);
      await expect(projects.open({ path }), name).rejects.toMatchObject({ code: "not-allowed" });
      await expect(projects.save(saveArgs(path, { replace: true })), name).rejects.toMatchObject({ code: "not-allowed" });
    }
    expect(await readdir(outside)).toEqual(["secret.bandwright"]);
    expect((await files.list({ folder: null })).entries).toEqual([]);
  });

  test("a link within the roots is followed, and stays a link when its project is saved", async () => {
    const path = await writeProject(join(mine, "real.bandwright"));
    await symlink(path, join(mine, "link.bandwright"));
    const opened = await projects.open({ path: join(mine, "link.bandwright") });
    expect(opened.path).toBe(path);
    await projects.save(saveArgs(join(mine, "link.bandwright"), { fingerprint: opened.fingerprint, project: { ...newProject(), name: "New" } }));
    expect((await projects.open({ path })).project.name).toBe("New");
    expect((await readdir(mine)).sort()).toEqual(["link.bandwright", "real.bandwright"]);
  });

  test("one picked file is let in, its neighbours are not", async () => {
    const picked = await writeProject(join(outside, "picked.bandwright"));
    const neighbour = await writeProject(join(outside, "neighbour.bandwright"));
    await guard.grant(picked);
    const { fingerprint } = await projects.open({ path: picked });
    await projects.save(saveArgs(picked, { fingerprint }));
    await expect(projects.open({ path: neighbour })).rejects.toMatchObject({ code: "not-allowed" });
    await expect(files.list({ folder: outside })).rejects.toMatchObject({ code: "not-allowed" });
  });

  test("the file named at start is let in even as a link to elsewhere", async () => {
    const real = await writeProject(join(outside, "real.bandwright"));
    const link = join(mine, "link.bandwright");
    await symlink(real, link);
    const started = createProjects({ guard, projectsFolder: mine, demoFolder: demo, launchPath: link });
    expect(await started.launch()).toEqual({ path: link });
    expect((await started.open({ path: link })).path).toBe(real);
  });
});

describe("saving", () => {
  test("a new project: with the extension, into a folder made for it", async () => {
    await rm(mine, { recursive: true });
    const saved = await projects.save(saveArgs(join(mine, "Größe 1.0")));
    expect(saved.path).toBe(join(mine, "Größe 1.0.bandwright"));
    const opened = await projects.open({ path: saved.path });
    expect(opened.fingerprint).toBe(saved.fingerprint);
    expect(opened.project).toEqual(newProject());
    expect(await readFile(saved.path, "utf8")).toBe(serializeProject(newProject()));
  });

  test("again and again, each time with the last fingerprint", async () => {
    let { path, fingerprint } = await projects.save(saveArgs(join(mine, "a.bandwright")));
    for (const name of ["One", "Two", "Three"]) ({ path, fingerprint } = await projects.save(saveArgs(path, { fingerprint, project: { ...newProject(), name } })));
    expect((await projects.open({ path })).project.name).toBe("Three");
    expect(await readdir(mine)).toEqual(["a.bandwright"]);
  });

  test("keeps keys that this version does not know", async () => {
    const project = { ...newProject(), later: { kept: true } };
    const { path } = await projects.save(saveArgs(join(mine, "a.bandwright"), { project }));
    expect((await projects.open({ path })).project).toMatchObject({ later: { kept: true } });
  });

  test("does not replace a file that nobody agreed to replace", async () => {
    const path = join(mine, "a.bandwright");
    await writeFile(path, "somebody's");
    await expect(projects.save(saveArgs(path))).rejects.toMatchObject({ code: "file-exists", data: { path } });
    await expect(projects.save(saveArgs(join(mine, "a")))).rejects.toMatchObject({ code: "file-exists", data: { path } });
    expect(await readFile(path, "utf8")).toBe("somebody's");
    await projects.save(saveArgs(path, { replace: true }));
    expect((await projects.open({ path })).project).toEqual(newProject());
  });

  test("does not undo what somebody else wrote meanwhile, not even at the same size and time", async () => {
    const path = await writeProject(join(mine, "a.bandwright"), { ...newProject(), name: "AAAA" });
    const before = await stat(path);
    const { fingerprint } = await projects.open({ path });
    await writeProject(path, { ...newProject(), name: "BBBB" });
    await utimes(path, before.atime, before.mtime);
    await expect(projects.save(saveArgs(path, { fingerprint }))).rejects.toMatchObject({ code: "changed-on-disk", data: { path } });
    expect((await projects.open({ path })).project.name).toBe("BBBB");
    await projects.save(saveArgs(path, { fingerprint, replace: true, project: { ...newProject(), name: "CCCC" } }));
    expect((await projects.open({ path })).project.name).toBe("CCCC");
  });

  test("asks before it brings back a file that was taken away", async () => {
    const path = await writeProject(join(mine, "a.bandwright"));
    const { fingerprint } = await projects.open({ path });
    await rename(path, join(mine, "b.bandwright"));
    await expect(projects.save(saveArgs(path, { fingerprint }))).rejects.toMatchObject({ code: "changed-on-disk" });
    await projects.save(saveArgs(path, { fingerprint, replace: true }));
    expect((await readdir(mine)).sort()).toEqual(["a.bandwright", "b.bandwright"]);
  });

  test.each<[string, Partial<Record<keyof Project, unknown>>]>([
    ["a value that is not a number", { temperature: Number.NaN }],
    ["a value without end", { temperature: Number.POSITIVE_INFINITY }],
    ["no blocks", { blocks: undefined }],
    ["two blocks of one id", { blocks: [...newProject().blocks, ...newProject().blocks] }],
    ["another format", { format: "other" }],
  ])("refuses a project with %s, and keeps the file", async (_what, fault) => {
    const path = await writeProject(join(mine, "a.bandwright"));
    const text = await readFile(path, "utf8");
    const { fingerprint } = await projects.open({ path });
    const project = { ...newProject(), ...fault } as Project;
    await expect(projects.save(saveArgs(path, { fingerprint, project, replace: true }))).rejects.toMatchObject({ code: "project-faults", data: { path } });
    expect(await readFile(path, "utf8")).toBe(text);
    expect(await readdir(mine)).toEqual(["a.bandwright"]);
  });

  test("leaves the demos alone, old and new", async () => {
    const path = join(demo, "voice.bandwright");
    const text = await readFile(path, "utf8");
    const { fingerprint } = await projects.open({ path });
    await expect(projects.save(saveArgs(path, { fingerprint, replace: true }))).rejects.toMatchObject({ code: "read-only", data: { why: "demo" } });
    await expect(projects.save(saveArgs(join(demo, "mine")))).rejects.toMatchObject({ code: "read-only", data: { why: "demo" } });
    expect(await readFile(path, "utf8")).toBe(text);
    expect(await readdir(demo)).toEqual(["voice.bandwright"]);
  });

  test("leaves a write-protected file alone, whoever asks", async () => {
    const path = await writeProject(join(mine, "kept.bandwright"));
    await chmod(path, 0o444);
    await expect(projects.save(saveArgs(path, { replace: true }))).rejects.toMatchObject({ code: "read-only", data: { path, why: "permission" } });
  });

  test("says so where the user may not write", async () => {
    await chmod(mine, 0o555);
    await expect(asOrdinaryUser(() => projects.save(saveArgs(join(mine, "a"))))).rejects.toMatchObject({ code: "file-unwritable", data: { reason: "permission" } });
    expect(await readdir(mine)).toEqual([]);
  });

  test("does not write over a folder, nor into one that is not there", async () => {
    await mkdir(join(mine, "folder.bandwright"));
    await expect(projects.save(saveArgs(join(mine, "folder"), { replace: true }))).rejects.toMatchObject({ code: "file-unwritable", data: { reason: "folder" } });
    await expect(projects.save(saveArgs(join(mine, "none", "a")))).rejects.toMatchObject({ code: "file-unwritable", data: { reason: "folder" } });
  });
});

describe("the demos", () => {
  test("are listed with their names and what they are about", async () => {
    expect(await projects.demos()).toEqual({ demos: [{ path: join(demo, "voice.bandwright"), name: "Voice channel", about: "Ten bands." }] });
  });

  test("the first one is shown at start, unless a file was named", async () => {
    await writeProject(join(demo, "another.bandwright"));
    expect(await projects.launch()).toEqual({ path: join(demo, "another.bandwright") });
  });

  test("what was opened or saved last comes before them, as long as it is there", async () => {
    const path = await writeProject(join(mine, "mine.bandwright"));
    await projects.open({ path });
    expect(await projects.launch()).toEqual({ path });
    const saved = await projects.save(saveArgs(join(mine, "other.bandwright")));
    expect(await projects.launch()).toEqual({ path: saved.path });
    await expect(projects.open({ path: join(mine, "none.bandwright") })).rejects.toThrow();
    expect(await projects.launch()).toEqual({ path: saved.path });
    await rm(saved.path);
    expect(await projects.launch()).toEqual({ path: join(demo, "voice.bandwright") });
  });

  test("without any, the start is empty", async () => {
    await rm(demo, { recursive: true });
    expect(await projects.launch()).toEqual({ path: null });
    expect(await projects.demos()).toEqual({ demos: [] });
  });
});

describe("the list of files", () => {
  test("shows folders first, then projects, in the order people count", async () => {
    for (const name of ["b 10.bandwright", "b 9.bandwright", "A.bandwright", ".hidden.bandwright", "notes.txt"]) await writeFile(join(mine, name), "");
    await mkdir(join(mine, "zoo"));
    await mkdir(join(mine, ".git"));
    const listing = await files.list({ folder: null });
    expect(listing).toMatchObject({ folder: mine, parent: null, writable: true });
    expect(listing.roots).toEqual([
      { name: "My projects", path: mine },
      { name: "Demos", path: demo },
    ]);
    expect(listing.entries.map(({ name, kind }) => [name, kind])).toEqual([
      ["zoo", "folder"],
      ["A.bandwright", "project"],
      ["b 9.bandwright", "project"],
      ["b 10.bandwright", "project"],
    ]);
    expect(listing.entries.every(({ name, path, modified }) => path === join(mine, name) && modified > 1e12)).toBe(true);
  });

  test("leads up, as far as the root", async () => {
    await mkdir(join(mine, "one", "two"), { recursive: true });
    expect((await files.list({ folder: join(mine, "one", "two") })).parent).toBe(join(mine, "one"));
    expect((await files.list({ folder: join(mine, "one") })).parent).toBe(mine);
    await expect(files.list({ folder: join(mine, "..") })).rejects.toMatchObject({ code: "not-allowed" });
  });

  test("is empty and open for saving before the first save has made the folder", async () => {
    await rm(mine, { recursive: true });
    expect(await files.list({ folder: null })).toMatchObject({ folder: mine, entries: [], writable: true });
  });

  test("says where nothing can be saved", async () => {
    expect((await files.list({ folder: demo })).writable).toBe(false);
    await chmod(mine, 0o555);
    expect((await files.list({ folder: null })).writable).toBe(false);
  });

  test("of no folder, or of one that the user may not read, is a failure", async () => {
    await expect(files.list({ folder: join(mine, "none") })).rejects.toMatchObject({ code: "file-not-found" });
    await mkdir(join(mine, "locked"), { mode: 0o700 });
    await chmod(join(mine, "locked"), 0o000);
    await expect(asOrdinaryUser(() => files.list({ folder: join(mine, "locked") }))).rejects.toMatchObject({ code: "file-unreadable", data: { reason: "permission" } });
  });
});

import { mkdir, mkdtemp, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterEach, beforeEach, describe, expect, test } from "vitest";
import { createHandlers, type NativeDialogs, type ShellOpts } from "../../app/handlers.ts";
import { newProject } from "../../core/model/new-project.ts";
import { serializeProject } from "../../core/model/serialize.ts";

const DEMOS = fileURLToPath(new URL("../../assets/demo", import.meta.url));
const STARTER = fileURLToPath(new URL("../../assets/drawer/starter.csv", import.meta.url));

let base = "";
const realHome = process.env.HOME;
beforeEach(async () => {
  base = await mkdtemp(join(tmpdir(), "bandwright-shell-"));
  process.env.HOME = join(base, "home");
  await mkdir(process.env.HOME);
  await writeFile(join(base, "mine.bandwright"), serializeProject(newProject()));
});
afterEach(async () => {
  process.env.HOME = realHome;
  await rm(base, { recursive: true, force: true });
});

function shell(own: Partial<ShellOpts> = {}) {
  return createHandlers({
    version: "1.2.3",
    demoFolder: DEMOS,
    launchPath: null,
    dialogs: null,
    drawerPath: join(base, "drawer.sqlite"),
    starterPath: STARTER,
    emit: () => undefined,
    ...own,
  });
}

function dialogs(path: string | null): NativeDialogs {
  return { chooseOpen: async () => ({ path }), chooseSave: async () => ({ path, replace: false }) };
}

describe("a session in a browser", () => {
  test("says that it has no dialogs of its own, and refuses to show any", async () => {
    const { handlers } = shell();
    expect(await handlers["host.capabilities"]({})).toEqual({ fileDialogs: "inPage", version: "1.2.3", platform: process.platform });
    await expect(handlers["project.chooseOpen"]({})).rejects.toMatchObject({ code: "not-available" });
    await expect(handlers["project.chooseSave"]({ suggestedName: "a" })).rejects.toMatchObject({ code: "not-available" });
  });

  test("offers the projects folder, the folder of the named file and the demos, each once", async () => {
    const roots = async (launchPath: string | null): Promise<readonly string[]> => (await shell({ launchPath }).handlers["files.list"]({ folder: null })).roots.map(({ name }) => name);
    expect(await roots(null)).toEqual(["My projects", "Demos"]);
    expect(await roots(join(base, "mine.bandwright"))).toEqual(["My projects", base.split("/").at(-1), "Demos"]);
    expect(await roots(join(DEMOS, "any.bandwright"))).toEqual(["My projects", "Demos"]);
    expect(await roots(join(base, "home", "Bandwright", "any.bandwright"))).toEqual(["My projects", "Demos"]);
  });

  test("starts with the named file", async () => {
    const path = join(base, "mine.bandwright");
    const { handlers } = shell({ launchPath: path });
    expect(await handlers["project.launch"]({})).toEqual({ path });
    expect((await handlers["project.open"]({ path })).writable).toBe(true);
  });
});

describe("a session in the desktop window", () => {
  test("lets in what the user picks, and nothing before", async () => {
    const path = join(base, "mine.bandwright");
    const { handlers } = shell({ dialogs: dialogs(path) });
    expect((await handlers["host.capabilities"]({})).fileDialogs).toBe("native");
    await expect(handlers["project.open"]({ path })).rejects.toMatchObject({ code: "not-allowed" });
    expect(await handlers["project.chooseOpen"]({})).toEqual({ path });
    expect((await handlers["project.open"]({ path })).project).toEqual(newProject());
  });

  test("lets a file be made where the user wants it", async () => {
    const path = join(base, "new.bandwright");
    const { handlers } = shell({ dialogs: dialogs(path) });
    const save = { path, project: newProject(), fingerprint: null, replace: false };
    await expect(handlers["project.save"](save)).rejects.toMatchObject({ code: "not-allowed" });
    await handlers["project.chooseSave"]({ suggestedName: "new" });
    expect((await handlers["project.save"](save)).path).toBe(path);
  });

  test("a dialog that is cancelled lets nothing in", async () => {
    const { handlers } = shell({ dialogs: dialogs(null) });
    expect(await handlers["project.chooseOpen"]({})).toEqual({ path: null });
    expect(await handlers["project.chooseSave"]({ suggestedName: "a" })).toEqual({ path: null, replace: false });
  });
});

test("every demo opens without a warning, has a name and says what it is about", async () => {
  const { handlers } = shell();
  const { demos } = await handlers["project.demos"]({});
  expect(demos.length).toBeGreaterThan(0);
  for (const demo of demos) {
    expect(demo.name).not.toBe("");
    expect(demo.about).not.toBe("");
    expect(await handlers["project.open"]({ path: demo.path })).toMatchObject({ warnings: [], writable: false });
  }
});

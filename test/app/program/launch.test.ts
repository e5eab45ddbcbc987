import { chmod, mkdir, mkdtemp, readFile, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, test } from "vitest";
import { newProject } from "../../../core/model/new-project.ts";
import { serializeProject } from "../../../core/model/serialize.ts";
import { CHECKOUT, startApp } from "../../helpers/app.ts";
import { launch, type Launch } from "../../helpers/launch.ts";

let folder = "";
let running: Launch[] = [];
beforeEach(async () => {
  folder = await mkdtemp(join(tmpdir(), "bandwright-start-"));
  running = [];
});
afterEach(async () => {
  for (const program of running) {
    program.kill("SIGKILL");
    await program.ended;
  }
  await rm(folder, { recursive: true, force: true });
});

function start(args: readonly string[], env: NodeJS.ProcessEnv = {}): Launch {
  const program = launch(args, { HOME: folder, USERPROFILE: folder, ...env });
  running.push(program);
  return program;
}

/** A shell script in the place of Electron's executable. */
async function fakeElectron(script: string): Promise<NodeJS.ProcessEnv> {
  const place = join(folder, "electron-dist");
  await mkdir(place, { recursive: true });
  await writeFile(join(place, "electron"), `#!/bin/sh\n${script}\n`);
  await chmod(join(place, "electron"), 0o755);
  return { ELECTRON_OVERRIDE_DIST_PATH: place };
}

const READY = `printf '{"ready":true}\\n' >&$NODE_CHANNEL_FD`;

async function projectFile(name: string): Promise<string> {
  const path = join(folder, name);
  await writeFile(path, serializeProject(newProject()));
  return path;
}

describe("what is given at start", () => {
  test("a file that is not there ends with 2 and says which", async () => {
    const program = start(["none.bandwright"], { INIT_CWD: folder });
    expect(await program.ended).toBe(2);
    expect(program.output()).toBe(`There is no file ${join(folder, "none.bandwright")}\n`);
  });

  test("so does a folder", async () => {
    const program = start([folder]);
    expect(await program.ended).toBe(2);
    expect(program.output()).toBe(`${folder} is not a file\n`);
  });

  test.each([
    ["two files", ["a", "b"]],
    ["an unknown option", ["--fast"]],
    ["a value where none belongs", ["--no-open=1"]],
  ])("%s end with 2 and the help", async (_what, args) => {
    const program = start(args);
    expect(await program.ended).toBe(2);
    expect(program.output()).toContain("Usage: npm start");
  });

  test("--help helps", async () => {
    const program = start(["--help"]);
    expect(await program.ended).toBe(0);
    expect(program.output()).toContain("Example: npm start");
  });

  test("a file with faults is told of in the terminal, and Bandwright starts", async () => {
    await writeFile(join(folder, "bad.bandwright"), serializeProject(newProject()).replace('"positive": 15', '"positive": "lots"'));
    const program = start(["--no-open", "bad.bandwright"], { INIT_CWD: folder });
    await program.says("supply.positive");
    await program.says("Bandwright is at http://127.0.0.1:");
  });
});

describe.runIf(process.platform === "linux")("the desktop window", () => {
  test("gets the checkout and the file, no word that would make it a plain Node, and gives its exit code", async () => {
    const file = await projectFile("größe 1.bandwright");
    const env = await fakeElectron(`printf '%s\\n' "$@" "\${ELECTRON_RUN_AS_NODE-unset}" > "${folder}/args"; ${READY}; exit 7`);
    const program = start(["größe 1.bandwright"], { ...env, ELECTRON_RUN_AS_NODE: "1", INIT_CWD: folder });
    expect(await program.ended).toBe(7);
    const [root = "", ...rest] = (await readFile(join(folder, "args"), "utf8")).trim().split("\n");
    expect(join(root, "/")).toBe(CHECKOUT);
    expect(rest).toEqual([file, "unset"]);
    expect(program.output()).not.toContain("browser");
  });

  test("has its words shown once it is up", async () => {
    const program = start([], await fakeElectron(`echo "early words" >&2; ${READY}; sleep 0.2; echo "late words" >&2; exit 0`));
    expect(await program.ended).toBe(0);
    expect(program.output()).toMatch(/early words\n(.*\n)*late words\n/);
  });

  test("that hands its file to a first one ends well, with no browser", async () => {
    const program = start([], await fakeElectron("exit 0"));
    expect(await program.ended).toBe(0);
    expect(program.output()).not.toContain("browser");
  });

  test.each([
    ["dies at once", "echo 'cannot open display' >&2; exit 1"],
    ["lacks a library", "exit 127"],
    ["is killed", "kill -TRAP $$"],
  ])("that %s gives way to the browser with one line", async (_what, script) => {
    const program = start([], await fakeElectron(script));
    await program.says("Bandwright is at http://127.0.0.1:");
    expect(program.output()).toContain("The desktop window could not start, so Bandwright opens in your browser.");
    expect(program.output()).not.toContain("cannot open display");
    await program.says("No browser can be started from here");
  });

  test("that is not there gives way too, and nothing is fetched where the user has named its place", async () => {
    const program = start([], { ELECTRON_OVERRIDE_DIST_PATH: join(folder, "nowhere") });
    await program.says("Bandwright is at http://127.0.0.1:");
    expect(program.output()).toContain("The desktop window's runtime is not here");
    expect(program.output()).not.toContain("Fetching");
  });

  test("ends when the launcher is told to", async () => {
    const program = start([], await fakeElectron(`trap 'exit 0' TERM; ${READY}; echo up >&2; while :; do sleep 0.05; done`));
    await program.says("up");
    program.kill("SIGTERM");
    expect(await program.ended).toBe(0);
  });
});

describe("the browser shell", () => {
  test("a later start is ready within three seconds", async () => {
    const times: number[] = [];
    for (let count = 0; count < 3; count += 1) {
      const begun = performance.now();
      const app = await startApp();
      const page = await fetch(app.origin);
      await page.text();
      times.push(performance.now() - begun);
      expect(page.status).toBe(200);
      expect(await app.stop()).toBe(0);
    }
    expect(Math.min(...times)).toBeLessThan(3000);
  });

  test.each(["SIGINT", "SIGTERM"] as const)("%s ends it cleanly", async (signal) => {
    const program = start(["--no-open"]);
    await program.says("Ctrl+C stops Bandwright.");
    program.kill(signal);
    expect(await program.ended).toBe(0);
    expect(program.output()).not.toContain("Error");
  });
});

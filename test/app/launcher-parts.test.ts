import { chmod, mkdir, mkdtemp, readFile, rm, utimes, writeFile } from "node:fs/promises";
import { existsSync } from "node:fs";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { afterEach, beforeEach, describe, expect, test } from "vitest";
import { buildStale } from "../../app/build-stale.mjs";
import { fetchElectron, findElectron } from "../../app/find-electron.mjs";
import { isInstalled } from "../../app/install.mjs";

let root = "";
beforeEach(async () => {
  root = await mkdtemp(join(tmpdir(), "bandwright-launch-"));
});
afterEach(() => rm(root, { recursive: true, force: true }));

async function put(path: string, text: string, mode = 0o644): Promise<string> {
  const full = join(root, path);
  await mkdir(dirname(full), { recursive: true });
  await writeFile(full, text);
  await chmod(full, mode);
  return full;
}

describe("finding Electron by its files", () => {
  beforeEach(async () => {
    await put("package.json", "{}");
    await put("node_modules/electron/package.json", '{"name":"electron","version":"45.5.0"}');
    // Loading the package would start its download.
    await put("node_modules/electron/index.js", 'throw new Error("loaded")');
  });

  test("whole: found", async () => {
    const executable = await put("node_modules/electron/dist/electron", "", 0o755);
    await put("node_modules/electron/dist/version", "v45.5.0\n");
    expect(findElectron(root, {})).toBe(null);
    await put("node_modules/electron/path.txt", "electron");
    expect(findElectron(root, {})).toBe(executable);
    await put("node_modules/electron/dist/version", "45.4.0");
    expect(findElectron(root, {})).toBe(null);
    await put("node_modules/electron/dist/version", "45.5.0");
    expect(findElectron(root, {})).toBe(executable);
    await chmod(executable, 0o644);
    expect(findElectron(root, {})).toBe(null);
    await rm(executable);
    expect(findElectron(root, {})).toBe(null);
  });

  test("no package, no Electron", async () => {
    await rm(join(root, "node_modules"), { recursive: true });
    expect(findElectron(root, {})).toBe(null);
  });

  test.runIf(process.platform === "linux")("a folder named by the user comes first, and is the only place looked at", async () => {
    const executable = await put("elsewhere/electron", "", 0o755);
    expect(findElectron(root, { ELECTRON_OVERRIDE_DIST_PATH: join(root, "elsewhere") })).toBe(executable);
    expect(findElectron(root, { ELECTRON_OVERRIDE_DIST_PATH: join(root, "nowhere") })).toBe(null);
  });

  test("a fetch that never ends is ended, and not tried again for a day", async () => {
    const tries = join(root, "tries");
    await put("node_modules/electron/install.js", `require("node:fs").appendFileSync(${JSON.stringify(tries)}, "x"); setInterval(() => {}, 1000);`);
    const lines: string[] = [];
    const opts = { timeoutMs: 1500, force: false, say: (line: string) => lines.push(line) };
    const begun = Date.now();
    await fetchElectron(root, opts);
    expect(Date.now() - begun).toBeLessThan(6000);
    expect(lines).toHaveLength(1);
    await fetchElectron(root, opts);
    expect(await readFile(tries, "utf8")).toBe("x");
    await fetchElectron(root, { ...opts, force: true });
    expect(await readFile(tries, "utf8")).toBe("xx");
    const yesterday = new Date(Date.now() - 25 * 3_600_000);
    await utimes(join(root, ".cache", "electron-try"), yesterday, yesterday);
    await fetchElectron(root, opts);
    expect(await readFile(tries, "utf8")).toBe("xxx");
  });

  test("a fetch that brings it leaves no note of failure", async () => {
    await put(
      "node_modules/electron/install.js",
      `const fs = require("node:fs"); fs.mkdirSync(__dirname + "/dist"); fs.writeFileSync(__dirname + "/dist/electron", "", { mode: 0o755 });
       fs.writeFileSync(__dirname + "/dist/version", "45.5.0"); fs.writeFileSync(__dirname + "/path.txt", "electron");`,
    );
    await fetchElectron(root, { timeoutMs: 20_000, force: false, say: () => undefined });
    expect(findElectron(root, {})).toBe(join(root, "node_modules/electron/dist/electron"));
    expect(existsSync(join(root, ".cache", "electron-try"))).toBe(false);
  });
});

describe("whether the packages are installed", () => {
  const lock = (version: string): string =>
    JSON.stringify({ packages: { "": { name: "bandwright" }, "node_modules/a": { version }, "node_modules/for-others": { version: "1.0.0", optional: true } } });
  const record = (version: string): string => JSON.stringify({ packages: { "node_modules/a": { version } } });

  test("not without their folder", async () => {
    await put("package-lock.json", lock("1.0.0"));
    expect(isInstalled(root)).toBe(false);
  });

  test("by npm's own record, and then by the stamp alone", async () => {
    await put("package-lock.json", lock("1.0.0"));
    await put("node_modules/.package-lock.json", record("1.0.0"));
    expect(isInstalled(root)).toBe(true);
    await rm(join(root, "node_modules/.package-lock.json"));
    expect(isInstalled(root)).toBe(true);
  });

  test("not any more once the lock has changed", async () => {
    await put("package-lock.json", lock("1.0.0"));
    await put("node_modules/.package-lock.json", record("1.0.0"));
    expect(isInstalled(root)).toBe(true);
    await put("package-lock.json", lock("1.0.1"));
    expect(isInstalled(root)).toBe(false);
  });

  test("not where a package is missing, or the record cannot be read", async () => {
    await put("package-lock.json", lock("1.0.0"));
    await put("node_modules/.package-lock.json", '{"packages":{}}');
    expect(isInstalled(root)).toBe(false);
    await put("node_modules/.package-lock.json", "{");
    expect(isInstalled(root)).toBe(false);
  });
});

describe("building what is stale", () => {
  const builds = async (): Promise<number> => (await readFile(join(root, "builds"), "utf8").catch(() => "")).length;
  const build = (): Promise<void> => buildStale(root, ["ui"], () => undefined);

  beforeEach(async () => {
    await put("package-lock.json", "{}");
    await put("renderer/main.tsx", "1");
    // Stands in for the build tool: notes that it ran, and puts one file where it is told to.
    await put(
      "node_modules/vite/bin/vite.js",
      `const fs = require("node:fs"); const out = process.argv[process.argv.indexOf("--outDir") + 1];
       if (fs.readFileSync("renderer/main.tsx", "utf8") === "broken") { console.error("line 1 is broken"); process.exit(1); }
       fs.appendFileSync("builds", "x"); fs.mkdirSync(out, { recursive: true }); fs.copyFileSync("renderer/main.tsx", out + "/index.html");`,
    );
  });

  test("happens once, and again after any change", async () => {
    await build();
    await build();
    expect(await builds()).toBe(1);
    await put("renderer/main.tsx", "22");
    await build();
    expect(await builds()).toBe(2);
    expect(await readFile(join(root, "dist/ui/index.html"), "utf8")).toBe("22");
    await put("core/new.ts", "");
    await build();
    expect(await builds()).toBe(3);
    await rm(join(root, "core/new.ts"));
    await build();
    expect(await builds()).toBe(4);
    await rm(join(root, "dist/ui"), { recursive: true });
    await build();
    expect(await builds()).toBe(5);
  });

  test("a build that fails keeps the last good one, says why, and is tried again", async () => {
    await build();
    await put("renderer/main.tsx", "broken");
    await expect(build()).rejects.toThrow("line 1 is broken");
    await expect(build()).rejects.toThrow("line 1 is broken");
    expect(await readFile(join(root, "dist/ui/index.html"), "utf8")).toBe("1");
  });

  test("two at once do not disturb each other", async () => {
    await Promise.all([build(), build(), build()]);
    expect(await readFile(join(root, "dist/ui/index.html"), "utf8")).toBe("1");
    await build();
    expect(await builds()).toBeLessThanOrEqual(3);
  });
});

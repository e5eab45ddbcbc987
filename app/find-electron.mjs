// Plain JavaScript for the launcher. Nothing here may load the `electron` package: doing so starts its download.
import { spawn } from "node:child_process";
import { accessSync, constants, mkdirSync, readFileSync, statSync, writeFileSync } from "node:fs";
import { createRequire } from "node:module";
import { dirname, join } from "node:path";

const A_DAY = 24 * 3_600_000;

/**
 * Electron's executable, found by its files, or null.
 * @param {string} root
 * @param {NodeJS.ProcessEnv} env
 * @returns {string | null}
 */
export function findElectron(root, env) {
  const override = env.ELECTRON_OVERRIDE_DIST_PATH;
  if (override) return ifExecutable(join(override, executableName()));
  const folder = packageFolder(root);
  if (folder === null) return null;
  try {
    const wanted = JSON.parse(readFileSync(join(folder, "package.json"), "utf8")).version;
    const found = readFileSync(join(folder, "dist", "version"), "utf8").trim().replace(/^v/, "");
    // Written last by the package's own installer: without it, the unpacking did not finish.
    const path = readFileSync(join(folder, "path.txt"), "utf8").trim();
    return found === wanted ? ifExecutable(join(folder, "dist", path)) : null;
  } catch {
    return null;
  }
}

/**
 * Lets the package fetch its binary, for at most `timeoutMs`. A try that failed is not made again for a day, so that a
 * machine without a way out starts quickly; `force` tries all the same.
 * @param {string} root
 * @param {{ timeoutMs: number, force: boolean, say: (line: string) => void }} opts
 * @returns {Promise<void>}
 */
export async function fetchElectron(root, { timeoutMs, force, say }) {
  const folder = packageFolder(root);
  const record = join(root, ".cache", "electron-try");
  if (folder === null || (!force && Date.now() - modified(record) < A_DAY)) return;
  say(`Fetching the desktop window's runtime (at most ${Math.round(timeoutMs / 1000)} seconds) …`);
  const child = spawn(process.execPath, [join(folder, "install.js")], { cwd: root, stdio: "ignore" });
  // The package's installer waits for ever on a network that never answers.
  const timer = setTimeout(() => child.kill("SIGKILL"), timeoutMs);
  await new Promise((resolve) => {
    child.on("error", resolve);
    child.on("close", resolve);
  });
  clearTimeout(timer);
  if (findElectron(root, {}) !== null) return;
  mkdirSync(dirname(record), { recursive: true });
  writeFileSync(record, "");
}

/** @param {string} root */
function packageFolder(root) {
  try {
    return dirname(createRequire(join(root, "package.json")).resolve("electron/package.json"));
  } catch {
    return null;
  }
}

function executableName() {
  if (process.platform === "darwin") return "Electron.app/Contents/MacOS/Electron";
  return process.platform === "win32" ? "electron.exe" : "electron";
}

/** @param {string} path */
function ifExecutable(path) {
  try {
    accessSync(path, constants.X_OK);
    return statSync(path).isFile() ? path : null;
  } catch {
    return null;
  }
}

/** @param {string} path */
function modified(path) {
  return statSync(path, { throwIfNoEntry: false })?.mtimeMs ?? 0;
}

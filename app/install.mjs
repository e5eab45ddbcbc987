// Plain JavaScript that Node 20 can read, and no dependencies: this runs before any are there.
import { spawn } from "node:child_process";
import { createHash } from "node:crypto";
import { existsSync, readFileSync, realpathSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { fileURLToPath } from "node:url";

/**
 * Whether the installed packages are those of package-lock.json: by our own stamp, or else by npm's record of what it
 * installed. Packages for other systems are in the lock and not in the record.
 * @param {string} root
 * @returns {boolean}
 */
export function isInstalled(root) {
  const lockPath = join(root, "package-lock.json");
  if (!existsSync(join(root, "node_modules"))) return false;
  if (!existsSync(lockPath)) return existsSync(stampPath(root));
  if (read(stampPath(root)) === lockHash(root)) return true;
  const record = parse(join(root, "node_modules", ".package-lock.json"));
  const lock = parse(lockPath);
  if (record === null || lock === null) return false;
  const agrees = Object.entries(lock.packages).every(([path, wanted]) => {
    if (path === "" || wanted.link) return true;
    const found = record.packages[path];
    return found === undefined ? wanted.optional === true : found.version === wanted.version;
  });
  if (agrees) writeStamp(root);
  return agrees;
}

/**
 * Installs the packages if that is needed; says one line, and shows npm's own words only when it fails.
 * @param {string} root
 * @param {(line: string) => void} say
 */
export async function install(root, say) {
  if (isInstalled(root)) return;
  const hasLock = existsSync(join(root, "package-lock.json"));
  say("Installing packages (about half a minute, once) …");
  await runNpm(root, [hasLock ? "ci" : "install", "--no-audit", "--no-fund", "--loglevel=error"]);
  writeStamp(root);
}

/**
 * @param {string} root
 * @param {readonly string[]} args
 * @returns {Promise<void>}
 */
function runNpm(root, args) {
  // npm says where it is when it starts us; a plain `npm` otherwise, which on Windows is a script for the shell.
  const own = process.env.npm_execpath;
  const isScript = own !== undefined && /\.[cm]?js$/.test(own);
  const isWindows = process.platform === "win32";
  const child = isScript
    ? spawn(process.execPath, [own, ...args], { cwd: root, stdio: ["ignore", "pipe", "pipe"] })
    : spawn(isWindows ? "npm.cmd" : "npm", args, { cwd: root, stdio: ["ignore", "pipe", "pipe"], shell: isWindows });
  let output = "";
  child.stdout.on("data", (chunk) => (output += chunk));
  child.stderr.on("data", (chunk) => (output += chunk));
  return new Promise((resolve, reject) => {
    child.on("error", (error) => reject(new Error(`npm could not be started: ${error.message}`)));
    child.on("close", (code) => (code === 0 ? resolve() : reject(new Error(`npm ${args[0]} failed:\n${output}`))));
  });
}

/** @param {string} root */
function stampPath(root) {
  return join(root, "node_modules", ".bandwright-install");
}

/** @param {string} root */
function writeStamp(root) {
  writeFileSync(stampPath(root), lockHash(root));
}

/** @param {string} root */
function lockHash(root) {
  return createHash("sha256")
    .update(read(join(root, "package-lock.json")) ?? "")
    .digest("hex");
}

/** @param {string} path */
function read(path) {
  try {
    return readFileSync(path, "utf8");
  } catch {
    return null;
  }
}

/** @param {string} path */
function parse(path) {
  try {
    return JSON.parse(readFileSync(path, "utf8"));
  } catch {
    return null;
  }
}

const self = fileURLToPath(import.meta.url);
if (process.argv[1] !== undefined && realpathSync(process.argv[1]) === self) {
  try {
    await install(join(self, "..", ".."), (line) => console.error(line));
  } catch (error) {
    console.error(error instanceof Error ? error.message : error);
    process.exitCode = 1;
  }
}

// Plain JavaScript that Node 20 can read: the launcher uses it before it changes over to the newer Node.
import { spawn } from "node:child_process";
import { createHash, randomBytes } from "node:crypto";
import { existsSync, mkdirSync, readdirSync, readFileSync, renameSync, rmSync, statSync, writeFileSync } from "node:fs";
import { join } from "node:path";

/**
 * What is built from what, into which folder of dist/, by which Vite configurations.
 * @type {Record<"ui" | "app", { configs: string[], sources: string[], words: string }>}
 */
const TARGETS = {
  ui: { configs: ["vite.config.ts"], sources: ["renderer", "core", "assets"], words: "the screens" },
  app: { configs: ["vite.main.config.ts", "vite.preload.config.ts"], sources: ["app", "core"], words: "the desktop window" },
};

/**
 * Builds the targets whose sources have changed since they were last built.
 * @param {string} root
 * @param {readonly (keyof typeof TARGETS)[]} names
 * @param {(line: string) => void} say
 */
export async function buildStale(root, names, say) {
  for (const name of names) {
    const target = TARGETS[name];
    const print = fingerprint(root, [...target.sources, ...target.configs, "package-lock.json"]);
    const output = join(root, "dist", name);
    const stamp = join(root, "dist", `.${name}.stamp`);
    if (existsSync(output) && existsSync(stamp) && readFileSync(stamp, "utf8") === print) continue;
    say(`Building ${target.words} …`);
    await build(root, target.configs, output);
    writeFileSync(stamp, print);
  }
}

/**
 * Builds into a folder of its own and swaps it in, so that there is never half a build to start from.
 * @param {string} root
 * @param {readonly string[]} configs
 * @param {string} output
 */
async function build(root, configs, output) {
  mkdirSync(join(root, "dist"), { recursive: true });
  const fresh = `${output}.${randomBytes(4).toString("hex")}`;
  try {
    for (const config of configs) await runVite(root, ["build", "--config", config, "--outDir", fresh, "--logLevel", "error"]);
    const old = `${fresh}.old`;
    if (existsSync(output)) renameSync(output, old);
    try {
      renameSync(fresh, output);
    } catch (error) {
      // Another start has just put its own build of the same sources there.
      if (!existsSync(output)) throw error;
    }
    rmSync(old, { recursive: true, force: true });
  } finally {
    rmSync(fresh, { recursive: true, force: true });
  }
}

/**
 * @param {string} root
 * @param {readonly string[]} args
 * @returns {Promise<void>}
 */
function runVite(root, args) {
  // A test run's NODE_ENV would leave the libraries' development builds where the next start takes them up.
  const env = { ...process.env, NODE_ENV: "production" };
  const child = spawn(process.execPath, [join(root, "node_modules", "vite", "bin", "vite.js"), ...args], { cwd: root, env, stdio: ["ignore", "pipe", "pipe"] });
  let output = "";
  child.stdout.on("data", (chunk) => (output += chunk));
  child.stderr.on("data", (chunk) => (output += chunk));
  return new Promise((resolve, reject) => {
    child.on("error", reject);
    child.on("close", (code) => (code === 0 ? resolve() : reject(new Error(`The build failed:\n${output}`))));
  });
}

/**
 * Names, sizes and times of all source files: quick to take, and different after any change.
 * @param {string} root
 * @param {readonly string[]} paths
 */
function fingerprint(root, paths) {
  const hash = createHash("sha256");
  /** @param {string} path */
  const add = (path) => {
    const info = statSync(join(root, path), { throwIfNoEntry: false });
    if (info === undefined) return;
    if (info.isDirectory()) {
      for (const name of readdirSync(join(root, path)).sort()) add(join(path, name));
    } else if (!/\.(md|bandwright)$/.test(path)) {
      hash.update(`${path}\0${info.size}\0${info.mtimeMs}\0`);
    }
  };
  for (const path of paths) add(path);
  return hash.digest("hex");
}

import { access, constants, mkdir, mkdtemp, rename, rm, writeFile } from "node:fs/promises";
import { createRequire } from "node:module";
import { delimiter, dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { chromium, type Browser } from "playwright-core";

const CACHE = fileURLToPath(new URL("../../.cache/", import.meta.url));
/** The number is the package's version: another version is unpacked anew. */
const PACKAGED = join(CACHE, "browser-153.0.0");
const FONT_SETTINGS = "own-fonts.conf";
const NAMES = ["chromium", "chromium-browser", "google-chrome", "google-chrome-stable"];
const PLACES = ["/Applications/Google Chrome.app/Contents/MacOS/Google Chrome", "C:\\Program Files\\Google\\Chrome\\Application\\chrome.exe"];

export interface BrowserOpts {
  /** More switches for Chromium, such as `--host-resolver-rules=…`. */
  readonly args?: readonly string[];
}

/**
 * Starts a Chromium: the system's where there is one, else the packaged one (Linux on x64), which the global setup
 * has unpacked. BANDWRIGHT_BROWSER picks: `packaged`, or the path of an executable.
 */
export async function launchBrowser({ args = [] }: BrowserOpts = {}): Promise<Browser> {
  const system = await findSystemBrowser();
  if (system !== null) return chromium.launch({ executablePath: system, args: [...args] });
  return chromium.launch({
    executablePath: join(PACKAGED, "chromium"),
    // Not the package's own list of switches: it turns off the web's security, which these tests test.
    args: [...args],
    env: { ...process.env, LD_LIBRARY_PATH: join(PACKAGED, "al2023", "lib"), FONTCONFIG_FILE: join(PACKAGED, FONT_SETTINGS) },
  });
}

/** Unpacks the packaged Chromium if it is going to be needed. Once, before the tests: parallel ones would trip over each other. */
export async function prepareBrowser(): Promise<void> {
  if ((await findSystemBrowser()) !== null || (await isExecutable(join(PACKAGED, "chromium")))) return;
  if (process.platform !== "linux" || process.arch !== "x64") {
    throw new Error("The browser tests need Chromium or Chrome: install one, or name it in BANDWRIGHT_BROWSER.");
  }
  const { inflate } = await import("@sparticuz/chromium");
  const archives = join(dirname(createRequire(import.meta.url).resolve("@sparticuz/chromium")), "..", "bin");
  await mkdir(CACHE, { recursive: true });
  const folder = await mkdtemp(join(CACHE, "browser-new-"));
  const before = process.env.TMPDIR;
  // The package unpacks into the system's temporary folder; ours is nobody else's.
  process.env.TMPDIR = folder;
  try {
    for (const name of ["chromium.br", "fonts.tar.br", "swiftshader.tar.br", "al2023.tar.br"]) await inflate(join(archives, name));
  } finally {
    if (before === undefined) delete process.env.TMPDIR;
    else process.env.TMPDIR = before;
  }
  // The package's own settings look for its fonts where it would have put them on another machine.
  await writeFile(
    join(folder, FONT_SETTINGS),
    `<?xml version="1.0"?>\n<fontconfig><dir>${join(PACKAGED, "fonts")}</dir><cachedir>${join(PACKAGED, "font-cache")}</cachedir></fontconfig>\n`,
  );
  // In one move, so that a run broken off leaves no half browser.
  await rename(folder, PACKAGED).catch(() => rm(folder, { recursive: true }));
}

async function findSystemBrowser(): Promise<string | null> {
  const wish = process.env.BANDWRIGHT_BROWSER;
  if (wish === "packaged") return null;
  if (wish) return wish;
  const onPath = (process.env.PATH ?? "").split(delimiter).flatMap((folder) => NAMES.map((name) => join(folder, name)));
  for (const path of [...onPath, ...PLACES]) if (await isExecutable(path)) return path;
  return null;
}

async function isExecutable(path: string): Promise<boolean> {
  try {
    await access(path, constants.X_OK);
    return true;
  } catch {
    return false;
  }
}

import { readFileSync } from "node:fs";
import { mkdir, mkdtemp, readdir, rm, stat, writeFile } from "node:fs/promises";
import { join } from "node:path";
import { pathToFileURL } from "node:url";
import open from "open";
import { HostFailure } from "../core/contract/failures.ts";
import { createHandlers } from "./handlers.ts";
import { createHost, type Handlers } from "./host.ts";
import { serveLoopback } from "./serve.ts";
import { ownDrawerPath } from "./services/drawer-path.ts";
import { loadUiFiles } from "./ui-files.ts";

const START_PAGE = "bandwright.html";
const START_FOLDER_PREFIX = "start-";

/** How the loopback shell is started. */
export interface LoopbackShellOpts {
  /** The checkout: holds `dist/ui`, `assets/demo` and package.json. */
  readonly root: string;
  /** The file to show; absolute, and there. */
  readonly file: string | null;
  /** Open the user's browser, where there is a display to open it on. */
  readonly opensBrowser: boolean;
}

/** Serves Bandwright to the user's browser until the process is told to stop. */
export async function runLoopbackShell(opts: LoopbackShellOpts): Promise<void> {
  const dist = join(opts.root, "dist");
  const { version } = JSON.parse(readFileSync(join(opts.root, "package.json"), "utf8")) as { version: string };
  const assets = join(opts.root, "assets");
  const { handlers, close } = createHandlers({
    version,
    demoFolder: join(assets, "demo"),
    launchPath: opts.file,
    dialogs: null,
    drawerPath: ownDrawerPath(),
    starterPath: join(assets, "drawer", "starter.csv"),
    // Nothing can happen before the first call, and the host is there by then.
    emit: (name, data) => host.emit(name, data),
  });
  const host = createHost(handlers, (error) => console.error(error));
  if (opts.file !== null) await sayWhatIsWrong(handlers, opts.file);
  const server = await serveLoopback(host, await loadUiFiles(join(dist, "ui")));
  const stopped = new Promise<void>((resolve) => {
    process.once("SIGINT", () => resolve());
    process.once("SIGTERM", () => resolve());
  });

  console.log(`Bandwright is at ${server.address}`);
  console.log("The address works once. Ctrl+C stops Bandwright.");
  if (opts.opensBrowser && hasDisplay()) {
    const { folder, path } = await writeStartPage(dist, server.address);
    await openInBrowser(path);
    await Promise.race([server.opened, stopped]);
    await rm(folder, { recursive: true, force: true });
  } else if (opts.opensBrowser) {
    console.log("No browser can be started from here: open the address in a browser on this machine.");
  }

  await stopped;
  await server.close();
  await close();
}

/** A file that will not open is told of in the page too, but that may be far from where its name was typed. */
async function sayWhatIsWrong(handlers: Handlers, path: string): Promise<void> {
  try {
    await handlers["project.launch"]({});
    await handlers["project.open"]({ path });
  } catch (error) {
    console.error(error instanceof HostFailure ? error.message : error);
  }
}

/**
 * The address reaches the browser in a file that only the user can read. On a command line, every user of the machine
 * could see it in the list of processes. The folder is not a hidden one: packaged browsers may not read those.
 * The folder is to be removed once the page has done its work.
 */
export async function writeStartPage(dist: string, address: string): Promise<{ readonly folder: string; readonly path: string }> {
  await mkdir(dist, { recursive: true });
  await removeOldStartPages(dist);
  // mkdtemp makes the folder for the user alone.
  const folder = await mkdtemp(join(dist, START_FOLDER_PREFIX));
  const page = `<!doctype html><meta charset="utf-8"><title>Bandwright</title><meta http-equiv="refresh" content="0; url=${address}"><p><a href="${address}">Open Bandwright</a></p>\n`;
  await writeFile(join(folder, START_PAGE), page, { mode: 0o600, flag: "wx" });
  return { folder, path: join(folder, START_PAGE) };
}

/** Pages left behind by a session that could not tidy up; their codes are dead. */
async function removeOldStartPages(dist: string): Promise<void> {
  const anHourAgo = Date.now() - 3_600_000;
  for (const name of await readdir(dist)) {
    if (!name.startsWith(START_FOLDER_PREFIX)) continue;
    const folder = join(dist, name);
    const info = await stat(folder).catch(() => null);
    if (info !== null && info.mtimeMs < anHourAgo) await rm(folder, { recursive: true, force: true });
  }
}

async function openInBrowser(path: string): Promise<void> {
  try {
    const child = await open(pathToFileURL(path).href);
    child.on("error", () => console.log("No browser could be started: open the address yourself."));
  } catch {
    console.log("No browser could be started: open the address yourself.");
  }
}

function hasDisplay(): boolean {
  if (process.platform !== "linux") return true;
  const { DISPLAY, WAYLAND_DISPLAY, WSL_DISTRO_NAME } = process.env;
  // Under WSL the browser is a Windows one, which cannot read the start page.
  return !WSL_DISTRO_NAME && Boolean(DISPLAY || WAYLAND_DISPLAY);
}

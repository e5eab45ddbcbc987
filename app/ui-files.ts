import { readdir, readFile } from "node:fs/promises";
import { extname, join, relative, sep } from "node:path";

const TYPES: Readonly<Record<string, string>> = {
  ".html": "text/html; charset=utf-8",
  ".js": "text/javascript; charset=utf-8",
  ".css": "text/css; charset=utf-8",
  ".json": "application/json; charset=utf-8",
  ".svg": "image/svg+xml",
  ".png": "image/png",
  ".woff2": "font/woff2",
  ".woff": "font/woff",
  ".ttf": "font/ttf",
  ".wasm": "application/wasm",
};

/** One file of the built user interface. */
export interface UiFile {
  readonly type: string;
  readonly body: Uint8Array<ArrayBuffer>;
}

/** The built user interface by address, such as `/assets/index-abc.js`. */
export type UiFiles = ReadonlyMap<string, UiFile>;

/**
 * Reads the whole built user interface, a few megabytes. What is served afterwards is looked up in this list:
 * no address from outside ever becomes part of a path, and a rebuild does not change a running session.
 */
export async function loadUiFiles(folder: string): Promise<UiFiles> {
  const files = new Map<string, UiFile>();
  for (const entry of await readdir(folder, { recursive: true, withFileTypes: true })) {
    if (!entry.isFile()) continue;
    const path = join(entry.parentPath, entry.name);
    const type = TYPES[extname(entry.name).toLowerCase()];
    if (type === undefined) throw new Error(`no content type is known for ${path}`);
    files.set(`/${relative(folder, path).split(sep).join("/")}`, { type, body: new Uint8Array(await readFile(path)) });
  }
  if (!files.has("/index.html")) throw new Error(`there is no index.html in ${folder}`);
  return files;
}

/** The file at an address' path (query and fragment already off), or null. `/` is the page itself. */
export function findUiFile(files: UiFiles, pathname: string): UiFile | null {
  let name;
  try {
    name = decodeURIComponent(pathname);
  } catch {
    return null;
  }
  return files.get(name === "/" ? "/index.html" : name) ?? null;
}

import { spawn, type ChildProcess } from "node:child_process";
import { mkdtemp, rm } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";

export const CHECKOUT = fileURLToPath(new URL("../../", import.meta.url));

export interface StartOpts {
  /** The project to open; absolute, or below the checkout. */
  readonly file?: string;
  /** The user's home folder; an empty one of its own where it is not given. */
  readonly home?: string;
}

/** A running Bandwright in the browser shell. */
export interface RunningApp {
  /** Opens the page once: the fragment is a code that works one time. */
  readonly url: string;
  /** `http://127.0.0.1:PORT` */
  readonly origin: string;
  readonly home: string;
  /** Ends it as Ctrl+C does; resolves with the exit code. May be called again. */
  stop(): Promise<number | null>;
}

/** Starts Bandwright as `npm start -- --no-open` does, and waits for its address. */
export async function startApp(opts: StartOpts = {}): Promise<RunningApp> {
  const home = opts.home ?? (await mkdtemp(join(tmpdir(), "bandwright-home-")));
  const child = spawn(process.execPath, [join(CHECKOUT, "app", "launch.mjs"), "--no-open", ...(opts.file === undefined ? [] : [opts.file])], {
    cwd: CHECKOUT,
    env: { ...process.env, HOME: home, USERPROFILE: home, BANDWRIGHT_DRAWER: join(home, "drawer.sqlite"), INIT_CWD: CHECKOUT },
    stdio: ["ignore", "pipe", "pipe"],
  });
  const ended = new Promise<number | null>((resolve) => {
    child.once("close", resolve);
  });
  const url = await readAddress(child);
  return {
    url,
    origin: new URL(url).origin,
    home,
    async stop() {
      child.kill("SIGINT");
      const code = await ended;
      if (opts.home === undefined) await rm(home, { recursive: true, force: true });
      return code;
    },
  };
}

function readAddress(child: ChildProcess): Promise<string> {
  let output = "";
  return new Promise((resolve, reject) => {
    const read = (chunk: Buffer): void => {
      output += chunk.toString();
      const address = /http:\/\/127\.0\.0\.1:\d+\/#[\w-]+/.exec(output)?.[0];
      if (address !== undefined) resolve(address);
    };
    child.stdout?.on("data", read);
    child.stderr?.on("data", read);
    child.once("close", (code) => reject(new Error(`Bandwright ended with ${code} before it gave an address:\n${output}`)));
  });
}

import { spawn } from "node:child_process";
import { join } from "node:path";
import { CHECKOUT } from "./app.ts";

/** What one start of the program said, and how it ended. */
export interface Launch {
  /** Everything said so far, on both streams. */
  output(): string;
  /** Resolves when the given words have been said; rejects when the program has ended without. */
  says(words: string): Promise<void>;
  readonly ended: Promise<number | null>;
  kill(signal: NodeJS.Signals): void;
}

/** Starts the program as `npm start -- ARGS` does. */
export function launch(args: readonly string[], env: NodeJS.ProcessEnv = {}): Launch {
  const child = spawn(process.execPath, [join(CHECKOUT, "app", "launch.mjs"), ...args], {
    cwd: CHECKOUT,
    // No display: a browser opened on the tester's screen would be in the way.
    env: { ...process.env, DISPLAY: "", WAYLAND_DISPLAY: "", INIT_CWD: CHECKOUT, ...env },
    stdio: ["ignore", "pipe", "pipe"],
  });
  let said = "";
  const waiting = new Set<() => void>();
  const read = (chunk: Buffer): void => {
    said += chunk.toString();
    for (const look of waiting) look();
  };
  child.stdout.on("data", read);
  child.stderr.on("data", read);
  const ended = new Promise<number | null>((resolve) => {
    child.once("close", resolve);
  });
  return {
    output: () => said,
    says(words) {
      return new Promise((resolve, reject) => {
        const look = (): void => {
          if (!said.includes(words)) return;
          waiting.delete(look);
          resolve();
        };
        waiting.add(look);
        look();
        void ended.then((code) => reject(new Error(`ended with ${code}, having said:\n${said}`)));
      });
    },
    ended,
    kill: (signal) => child.kill(signal),
  };
}

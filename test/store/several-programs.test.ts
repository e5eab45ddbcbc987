import { spawn } from "node:child_process";
import { join } from "node:path";
import fc from "fast-check";
import { expect, test } from "vitest";
import { openDrawer } from "../../app/store/drawer-store.ts";
import { CHECKOUT } from "../helpers/app.ts";
import { openScratch, resistor } from "../helpers/drawer.ts";

interface Ended {
  /** Steps that the program said were in the drawer. */
  readonly steps: readonly number[];
  readonly signal: string | null;
  readonly complaints: string;
}

/** Books in a program of its own; kills it when it has said so many steps and a moment more. */
function book(path: string, rounds: number, reference: string, kill?: { readonly afterSteps: number; readonly ms: number }): Promise<Ended> {
  const child = spawn(process.execPath, [join(CHECKOUT, "test", "helpers", "book-for-ever.ts"), path, String(rounds), reference], { stdio: ["ignore", "pipe", "pipe"] });
  let output = "";
  let complaints = "";
  let isToBeKilled = kill !== undefined;
  child.stdout.on("data", (chunk: Buffer) => {
    output += chunk.toString();
    if (!isToBeKilled || kill === undefined || output.split("\n").length <= kill.afterSteps) return;
    isToBeKilled = false;
    setTimeout(() => child.kill("SIGKILL"), kill.ms);
  });
  child.stderr.on("data", (chunk: Buffer) => {
    complaints += chunk.toString();
  });
  return new Promise((resolve) => {
    child.once("close", (_code, signal) => {
      // The last word may have been cut short.
      resolve({ steps: output.split("\n").slice(0, -1).map(Number), signal, complaints });
    });
  });
}

test("killed at any moment, it keeps everything that it said was kept, and the file is sound", async () => {
  const first = await openScratch();
  first.addLine(resistor("R-1"), 0);
  first.close();
  let killed = 0;
  const said: number[] = [];
  const moments = fc.sample(fc.record({ afterSteps: fc.integer({ min: 1, max: 120 }), ms: fc.integer({ min: 0, max: 8 }) }), { numRuns: 6, seed: 11 });
  for (const moment of moments) {
    const ended = await book(first.path, 200, "round", moment);
    expect(ended.complaints).toBe("");
    if (ended.signal === "SIGKILL") killed += 1;
    said.push(...ended.steps);
    const after = await openDrawer({ path: first.path, now: () => new Date() });
    const kept = new Set<number>();
    for (let before: number | null = null, hasMore = true; hasMore; ) {
      const page = after.ledger({ line: "R-1", reference: "round", before, limit: 1000 });
      for (const movement of page.movements) kept.add(movement.step);
      before = page.movements.at(-1)?.id ?? null;
      hasMore = page.hasMore;
    }
    expect(said.filter((step) => !kept.has(step))).toEqual([]);
    expect(after.find("R-1")?.quantity).toBe(kept.size);
    expect(after.integrityProblems()).toEqual([]);
    after.close();
  }
  expect(killed).toBeGreaterThanOrEqual(4);
}, 60_000);

test("two programs at once lose nothing of each other's", async () => {
  const drawer = await openScratch();
  drawer.addLine(resistor("R-1"), 0);
  const both = await Promise.all([book(drawer.path, 150, "left"), book(drawer.path, 150, "right")]);
  expect(both.map((one) => one.complaints)).toEqual(["", ""]);
  expect(both.map((one) => one.steps.length)).toEqual([150, 150]);
  expect(drawer.find("R-1")?.quantity).toBe(300);
  expect(drawer.line("R-1").history.filter((change) => change.label === "Edit R-1")).toHaveLength(30);
  expect(drawer.integrityProblems()).toEqual([]);
}, 60_000);

/** What a bad file gets: one fault for each thing wrong, with its JSON path and what was expected, and never a crash. */
import { readFileSync } from "node:fs";
import { describe, expect, test, vi } from "vitest";
import { FaultError, type Fault } from "../../core/errors.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { BROKEN_FILES, SEVERAL_FAULTS } from "../fixtures/broken-files.ts";

vi.setConfig({ testTimeout: 30_000 });

function faultsOf(text: string): readonly Fault[] {
  try {
    resolveBoard(restoreProject(text).project);
  } catch (error) {
    if (error instanceof FaultError) return error.faults;
    throw error;
  }
  return [];
}

test("the file that all of these were made from is sound", () => {
  expect(faultsOf(readFileSync(new URL("../fixtures/example.bandwright", import.meta.url), "utf8"))).toEqual([]);
});

describe("a broken file gives exactly its one fault", () => {
  test("there are enough of them, and no two alike", () => {
    expect(BROKEN_FILES.length).toBeGreaterThanOrEqual(60);
    expect(new Set(BROKEN_FILES.map((b) => b.name)).size).toBe(BROKEN_FILES.length);
  });

  test.each(BROKEN_FILES)("$name", ({ make, path, says }) => {
    const began = performance.now();
    const faults = faultsOf(make());
    expect(faults.map((f) => f.path)).toEqual([path]);
    expect(faults[0].message).toMatch(says);
    // A message is for reading: one line, of a length that a person takes in.
    expect(faults[0].message.length).toBeLessThan(400);
    expect(faults[0].message).not.toContain("\n");
    expect(performance.now() - began).toBeLessThan(5000);
  });
});

describe("a file with several faults tells them all", () => {
  test.each(SEVERAL_FAULTS)("$name", ({ make, paths }) => {
    expect(faultsOf(make()).map((f) => f.path).sort()).toEqual([...paths].sort());
  });

  test("past a hundred they are counted", () => {
    const blocks = Array.from({ length: 500 }, (_, n) => ({ id: `b${n}`, kind: "nothing" }));
    const faults = faultsOf(JSON.stringify({ format: "bandwright-project", version: 1, name: "", supply: { kind: "split", positive: 1, negative: 1 }, blocks, wires: [] }));
    expect(faults).toHaveLength(101);
    expect(faults[100]).toEqual({ path: "", message: "and 400 more faults" });
  });
});

describe("damage anywhere gives faults, never another error", () => {
  const example = readFileSync(new URL("../fixtures/example.bandwright", import.meta.url), "utf8");

  test("cut short at every place", () => {
    const whole = example.trimEnd();
    for (let length = 0; length < whole.length; length++) expect(faultsOf(whole.slice(0, length))).toHaveLength(1);
  });

  test("with any one character replaced", () => {
    for (let at = 0; at < example.length; at++) {
      for (const character of ["}", "\u0000", "9", '"', "x"]) {
        for (const fault of faultsOf(example.slice(0, at) + character + example.slice(at + 1))) expect(fault.message).not.toBe("");
      }
    }
  });

  test("with any value of the document replaced by another kind of value", () => {
    const document: unknown = JSON.parse(example);
    const places: { holder: Record<string, unknown>; key: string; path: string }[] = [];
    const walk = (value: unknown, path: string): void => {
      if (typeof value !== "object" || value === null) return;
      for (const key of Object.keys(value)) {
        const holder = value as Record<string, unknown>;
        const place = Array.isArray(value) ? `${path}[${key}]` : `${path}.${key}`;
        places.push({ holder, key, path: place });
        walk(holder[key], place);
      }
    };
    walk(document, "");
    expect(places.length).toBeGreaterThan(100);
    for (const { holder, key } of places) {
      const before = holder[key];
      for (const wrong of [null, true, -1, 1e308, "text", [], {}, [[]], { value: null }, undefined]) {
        holder[key] = wrong;
        for (const fault of faultsOf(JSON.stringify(document))) expect(fault.message).not.toBe("");
      }
      holder[key] = before;
    }
  });
});

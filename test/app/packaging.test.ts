import { readFileSync } from "node:fs";
import { expect, test } from "vitest";
import packageJson from "../../package.json" with { type: "json" };

const LINES = readFileSync(new URL("../../electron-builder.yml", import.meta.url), "utf8").split("\n");

test("the packaging settings name every key and every pattern once: a key that comes twice is no YAML", () => {
  const keys = LINES.flatMap((line) => /^(\w+):/.exec(line)?.[1] ?? []);
  expect(keys).toContain("asarUnpack");
  expect(keys).toEqual([...new Set(keys)]);
  const patterns = LINES.filter((line) => line.startsWith("  - "));
  expect(patterns.length).toBeGreaterThan(5);
  expect(patterns).toEqual([...new Set(patterns)]);
});

test("package.json holds what the installers ask for", () => {
  expect(packageJson).toMatchObject({ main: "dist/app/main.mjs", desktopName: "bandwright.desktop", homepage: expect.any(String), author: expect.stringMatching(/^.+ <.+@.+>$/), description: expect.any(String) });
});

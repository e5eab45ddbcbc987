/** Values that no builder has, and boards that nobody builds: every command ends soon, in words, and without NaN. */
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, test, vi } from "vitest";
import { addBand } from "../../core/model/edit-bands.ts";
import { setPartValue } from "../../core/model/edit.ts";
import { newProject } from "../../core/model/new-project.ts";
import { applyPatch } from "../../core/model/patch.ts";
import type { Project } from "../../core/model/project.ts";
import { serializeProject } from "../../core/model/serialize.ts";
import { bandwright } from "../fixtures/command-line.ts";

vi.setConfig({ testTimeout: 60_000 });

let folder = "";
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), "bandwright-extremes-"));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function withBands(count: number): Project {
  let project = newProject();
  for (let i = 0; i < count; i++) {
    const added = addBand(project, "eq", "gyrator-section", 20 * 1.05 ** i);
    if (!added.ok) throw new Error(added.message);
    project = applyPatch(project, added.patch);
  }
  return project;
}

function write(name: string, project: Project): string {
  const path = join(folder, `${name}.bandwright`);
  writeFileSync(path, serializeProject(project));
  return path;
}

const BOARD = withBands(3);
const BAND = BOARD.blocks.find((b) => b.slider)!.id;
const with1 = (role: string, value: number): Project => applyPatch(BOARD, setPartValue(BOARD, BAND, role, value));
const EXTREMES: readonly (readonly [string, Project])[] = [
  ["a capacitor past any", with1("seriesC", 1e300)],
  ["a capacitor below any", with1("seriesC", 1e-300)],
  ["a resistor below any", with1("seriesR", 1e-300)],
  ["a track past any", with1("track", 1e300)],
  ["an op amp unlike any", { ...BOARD, opAmps: { TL072: { openLoopGain: 1e-300, gainBandwidth: 1e-300, inputR: 1e-300, outputR: 1e300 } } }],
];
/** Commands that each of them once brought to a halt, to a stack trace or to NaN. */
const COMMANDS = [[["check"], ["equations", "--at", "1k"]], [["check"], ["bands"], ["equations", "--at", "1k"]], [["poles"], ["respond", "--points", "3"]], [["poles", "--json"], ["equations", "--at", "1k"]], [["check"], ["bands", "--json"], ["poles"]]];

describe.concurrent("values out of any practical range", () => {
  test.each(EXTREMES.flatMap(([name, project], n) => COMMANDS[n].map((command) => [name, command.join(" "), project, n, command] as const)))("%s: %s", async (_name, text, project, n, [command, ...options]) => {
    const { code, stdout, stderr } = await bandwright(command, write(`${n}-${text.replaceAll(/\W+/g, "-")}`, project), ...options);
    expect([0, 1]).toContain(code);
    expect(stdout).not.toMatch(/NaN|Infinity/);
    expect(stderr).not.toMatch(/unexpectedly|NaN|Infinity|^\s+at /m);
    if (code === 1) expect(stderr).not.toBe("");
    else expect(stdout).not.toBe("");
  });
});

test("a board too large to be looked at for stability still responds, and is said not to be known", async () => {
  const path = write("many", withBands(100));
  const { code, stdout, stderr } = await bandwright("respond", path, "--points", "5", "--csv");
  expect(code).toBe(0);
  expect(stdout.trim().split("\n")).toHaveLength(6);
  expect(stderr).toMatch(/whether the board oscillates is not known: it has \d+ nodes/);
  const check = await bandwright("check", path);
  expect(check.code).toBe(0);
  expect(check.stdout).toContain("100 bands on 1 bus");
  expect(check.stdout).toContain("whether the board oscillates is not known");
});

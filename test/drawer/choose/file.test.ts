import { describe, expect, it } from "vitest";
import { FaultError } from "../../../core/errors.ts";
import { setOpAmp, setPartValue } from "../../../core/model/edit.ts";
import { newProject } from "../../../core/model/new-project.ts";
import { applyPatch } from "../../../core/model/patch.ts";
import type { Project } from "../../../core/model/project.ts";
import { restoreProject } from "../../../core/model/restore.ts";
import { serializeProject } from "../../../core/model/serialize.ts";

/** A new project whose stage has something in place of its input resistor. */
function withInputR(part: unknown): string {
  const project = newProject();
  return JSON.stringify({ ...project, blocks: project.blocks.map((b) => (b.id === "eq" ? { ...b, parts: { ...b.parts, inputR: part }, opAmpStock: "U-TL072" } : b)) });
}

function faultsOf(part: unknown): string[] {
  try {
    restoreProject(withInputR(part));
  } catch (error) {
    if (error instanceof FaultError) return error.faults.map((f) => `${f.path}: ${f.message}`);
    throw error;
  }
  return [];
}

const SECOND = { stock: "R-1K", value: 1000, joined: "series", firstValue: 2000 };
const PART = { value: 3000, tolerance: 0.01, stock: "R-2K", measured: 3011, piece: 7, second: SECOND };
const stageOf = (project: Project) => project.blocks.find((b) => b.id === "eq")!;

describe("what the drawer writes into a project file", () => {
  it("comes back as it was, in a fixed order of keys", () => {
    const turned = Object.fromEntries(Object.entries({ ...PART, second: Object.fromEntries(Object.entries(SECOND).toReversed()) }).toReversed());
    const { project, warnings } = restoreProject(withInputR(turned));
    expect(warnings).toEqual([]);
    expect(stageOf(project).parts!.inputR).toEqual(PART);
    const text = serializeProject(project);
    const again = stageOf(JSON.parse(text) as Project);
    expect(JSON.stringify(again.parts!.inputR)).toBe(JSON.stringify(PART));
    expect(Object.keys(again).slice(0, 4)).toEqual(["id", "kind", "opAmp", "opAmpStock"]);
  });

  it("is checked like everything else", () => {
    expect(faultsOf({ ...PART, second: { ...SECOND, joined: "glued" } })[0]).toMatch(/^blocks\[1\]\.parts\.inputR\.second\.joined: must be one of series, parallel, got "glued"/);
    expect(faultsOf({ ...PART, second: { ...SECOND, value: 0 } })[0]).toMatch(/second\.value: must be a number above 0/);
    expect(faultsOf({ ...PART, second: { stock: "x", value: 1, joined: "series" } })[0]).toMatch(/second(\.firstValue)?: is missing: must be a number above 0/);
    expect(faultsOf({ ...PART, piece: 1.5 })[0]).toMatch(/piece: must be the number of a measured piece/);
    expect(faultsOf(PART)).toEqual([]);
  });

  it("goes when the value or the type is another: it spoke of the part before", () => {
    const { project } = restoreProject(withInputR(PART));
    const changed = applyPatch(project, setPartValue(project, "eq", "inputR", 4700));
    expect(stageOf(changed).parts!.inputR).toEqual({ value: 4700, tolerance: 0.01 });
    expect(stageOf(applyPatch(project, setOpAmp(project, "eq", "NE5532")))).not.toHaveProperty("opAmpStock");
  });
});

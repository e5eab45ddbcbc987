import { describe, expect, test } from "vitest";
import { bandFigures } from "../../../core/analysis/bands.ts";
import { blockName, removeBlocks, setLabel, setPartDatum, setPartValue, setPosition } from "../../../core/model/edit.ts";
import { addBand, addToChain, changeKind, copyBands, duplicateBands, lawResonance, nextCentre } from "../../../core/model/edit-bands.ts";
import { newProject } from "../../../core/model/new-project.ts";
import { applyPatch } from "../../../core/model/patch.ts";
import type { Block, Project } from "../../../core/model/project.ts";
import { resolveBoard } from "../../../core/net/board.ts";

function withBands(...frequencies: number[]): Project {
  return frequencies.reduce((project, frequency) => {
    const added = addBand(project, "eq", "gyrator-section", frequency);
    return added.ok ? applyPatch(project, added.patch) : project;
  }, newProject());
}

function find(project: Project, id: string): Block {
  const block = project.blocks.find((b) => b.id === id);
  if (!block) throw new Error(`no block ${id}`);
  return block;
}

describe("adding a band", () => {
  test("tunes it to the frequency within what E24 parts allow, with a readable id and label", () => {
    const project = withBands(31.5, 1000, 16000);
    expect(project.blocks.map((b) => b.id)).toEqual(["in", "eq", "b31_5", "b1k", "b16k", "out"]);
    expect(project.blocks.map(blockName).slice(2, 5)).toEqual(["31.5 Hz", "1 kHz", "16 kHz"]);
    for (const [id, frequency] of [["b31_5", 31.5], ["b1k", 1000], ["b16k", 16000]] as const) {
      const band = find(project, id);
      // Two reactive parts, each at most 5 % off, and a resonance goes with the root of each.
      expect(lawResonance(band.kind, band.parts!)! / frequency).toBeGreaterThan(0.95);
      expect(lawResonance(band.kind, band.parts!)! / frequency).toBeLessThan(1.05);
    }
    expect(resolveBoard(project).warnings).toEqual([]);
    expect(bandFigures(resolveBoard(project)).map((f) => f.id)).toEqual(["b31_5", "b1k", "b16k"]);
  });

  test("takes slider and op amp from its neighbour, centred", () => {
    const project = withBands(1000);
    const changed = { ...project, blocks: project.blocks.map((b) => (b.id === "b1k" ? { ...b, opAmp: "NE5532", slider: { track: { value: 5e4 }, law: { power: 2 }, position: 0.9, endR: 3 } } : b)) };
    const added = addBand(changed, "eq", "low-shelf-section", 0);
    expect(added.ok && find(applyPatch(changed, added.patch), added.ids[0])).toMatchObject({ id: "low", label: "Low", opAmp: "NE5532", slider: { track: { value: 5e4 }, law: { power: 2 }, position: 0.5, endR: 3 } });
  });

  test("is refused without a stage", () => {
    expect(addBand(newProject(), "in", "level-section", 0).ok).toBe(false);
  });

  test("goes to the octave above the highest, then below the lowest, then into the widest gap", () => {
    expect(nextCentre([])).toBe(1000);
    expect(nextCentre([957])).toBe(2000);
    expect(nextCentre([60, 8300])).toBe(16000);
    expect(nextCentre([60, 15500])).toBe(31.5);
    expect(nextCentre([16, 2000, 16000])).toBe(250);
  });
});

describe("deleting", () => {
  test("takes the wires along", () => {
    const project = withBands(500, 1000);
    const edit = removeBlocks(project, ["b500"]);
    const after = edit.ok ? applyPatch(project, edit.patch) : project;
    expect(after.blocks.map((b) => b.id)).toEqual(["in", "eq", "b1k", "out"]);
    expect(after.wires).not.toContainEqual({ from: "eq.bus", to: "b500.bus" });
  });

  test.each([["in", "board needs its input"], ["out", "board needs its output"], ["eq", "last stage"]])("keeps “%s” and says why", (id, why) => {
    const edit = removeBlocks(withBands(1000), ["b1k", id]);
    expect(edit.ok ? "" : edit.message).toContain(why);
  });

  test("bridges the chain, and a second stage takes its bands along", () => {
    let project = withBands(1000);
    for (const kind of ["boost-cut-stage", "buffer"] as const) {
      const added = addToChain(project, kind, "eq");
      if (added.ok) project = applyPatch(project, added.patch);
    }
    expect(resolveBoard(project).chain.map((item) => item.block.id)).toEqual(["in", "eq", "buffer", "eq-2", "out"]);
    const band = addBand(project, "eq-2", "gyrator-section", 250);
    if (band.ok) project = applyPatch(project, band.patch);
    const edit = removeBlocks(project, ["buffer", "eq-2"]);
    if (edit.ok) project = applyPatch(project, edit.patch);
    expect(resolveBoard(project).chain.map((item) => item.block.id)).toEqual(["in", "eq", "out"]);
    expect(project.blocks.some((b) => b.id === "b250")).toBe(false);
  });
});

describe("changing the kind", () => {
  test("keeps shared parts and the frequency, there and back", () => {
    const project = withBands(2000);
    const before = find(project, "b2k");
    const coil = applyPatch(project, changeKind(project, "b2k", "inductor-section"));
    const after = find(coil, "b2k");
    expect(after.parts).toMatchObject({ seriesC: before.parts!.seriesC, seriesR: before.parts!.seriesR });
    expect(Object.keys(after.parts!)).toEqual(["seriesC", "seriesR", "inductor"]);
    expect(after.opAmp).toBeUndefined();
    expect(after.slider).toBe(before.slider);
    expect(lawResonance(after.kind, after.parts!)! / lawResonance(before.kind, before.parts!)!).toBeCloseTo(1, 1);
    const back = find(applyPatch(coil, changeKind(coil, "b2k", "gyrator-section")), "b2k");
    expect(back.opAmp).toBe("TL072");
    expect(lawResonance(back.kind, back.parts!)! / 2000).toBeCloseTo(1, 1);
  });

  test("leaves chain blocks alone", () => {
    const project = newProject();
    expect(changeKind(project, "eq", "gyrator-section")).toEqual([]);
  });
});

describe("values", () => {
  test("another value drops what spoke of the old piece", () => {
    const project = withBands(1000);
    const measured = applyPatch(project, setPartDatum(project, "b1k", "seriesR", "measured", 468));
    const changed = applyPatch(measured, setPartValue(measured, "b1k", "seriesR", 510));
    expect(find(changed, "b1k").parts!.seriesR).toEqual({ value: 510, tolerance: 0.01 });
  });

  test("an absent optional part comes with its usual tolerance", () => {
    const project = newProject();
    expect(find(applyPatch(project, setPartValue(project, "in", "couplingC", 1e-6)), "in").parts!.couplingC).toEqual({ value: 1e-6, tolerance: 0.2 });
  });

  test("positions stay within the track", () => {
    const project = withBands(1000);
    expect(find(applyPatch(project, setPosition(project, "b1k", 1.7)), "b1k").slider!.position).toBe(1);
    expect(find(applyPatch(project, setPosition(project, "b1k", -3)), "b1k").slider!.position).toBe(0);
  });

  test("an empty label is no label", () => {
    const project = withBands(1000);
    expect(Object.hasOwn(find(applyPatch(project, setLabel(project, "b1k", "  ")), "b1k"), "label")).toBe(false);
  });
});

describe("copies", () => {
  test("hang on the bus of their original, with ids of their own", () => {
    const project = withBands(500, 1000);
    const copies = duplicateBands(project, ["b500", "b1k", "in"]);
    expect(copies.ok && copies.ids).toEqual(["b500-2", "b1k-2"]);
    const after = copies.ok ? applyPatch(project, copies.patch) : project;
    expect(resolveBoard(after).chain[1].bands.map((b) => b.id)).toEqual(["b500", "b1k", "b500-2", "b1k-2"]);
    const again = duplicateBands(after, ["b1k-2"]);
    expect(again.ok && again.ids).toEqual(["b1k-3"]);
  });

  test("of anything else are refused", () => {
    const project = newProject();
    expect(copyBands(project, project.blocks, undefined).ok).toBe(false);
  });
});

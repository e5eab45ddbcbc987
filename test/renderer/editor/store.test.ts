import { beforeEach, describe, expect, test } from "vitest";
import { respond, logFrequencies } from "../../../core/analysis/response.ts";
import { removeWire, setField, setPartValue, setPosition } from "../../../core/model/edit.ts";
import { addBand, changeKind } from "../../../core/model/edit-bands.ts";
import { newProject } from "../../../core/model/new-project.ts";
import { patchBetween } from "../../../core/model/patch.ts";
import type { Project } from "../../../core/model/project.ts";
import { resolveBoard } from "../../../core/net/board.ts";
import { compileBoard } from "../../../core/net/star.ts";
import { createEditor, FULL_RANGE, type Editor } from "../../../renderer/editor/store.ts";

let editor: Editor;
const state = () => editor.store.getState();
const now = (): Project => state().project;
const position = (): number => now().blocks.find((b) => b.id === "b1k")!.slider!.position;

beforeEach(() => {
  editor = createEditor(newProject());
  for (const frequency of [500, 1000, 2000]) {
    const added = addBand(now(), "eq", "gyrator-section", frequency);
    if (added.ok) editor.apply("add", added.patch);
  }
  editor.markSaved(now(), { path: "/a", isWritable: true, isDemo: false, fingerprint: "0" });
});

describe("gestures", () => {
  test("one gesture is one step, however many previews", () => {
    const steps = state().history.done.length;
    editor.begin("slide");
    for (const to of [0.6, 0.7, 0.8, 0.9]) editor.preview((base) => setPosition(base, "b1k", to));
    expect(state().history.done).toHaveLength(steps);
    editor.commit();
    expect(position()).toBe(0.9);
    expect(state().history.done).toHaveLength(steps + 1);
    expect(editor.undo()).toBe("slide");
    expect(position()).toBe(0.5);
    editor.redo();
    expect(position()).toBe(0.9);
  });

  test("cancelled, it leaves nothing behind", () => {
    const before = now();
    const steps = state().history.done.length;
    editor.begin("slide");
    editor.preview((base) => setPosition(base, "b1k", 0.9));
    editor.cancel();
    expect(now()).toBe(before);
    expect(state().history.done).toHaveLength(steps);
  });

  test("undo in the middle of one takes just that one back", () => {
    const steps = state().history.done.length;
    editor.begin("slide");
    editor.preview((base) => setPosition(base, "b1k", 0.9));
    expect(editor.undo()).toBe("slide");
    expect(position()).toBe(0.5);
    expect(state().history.done).toHaveLength(steps);
  });

  test("one that comes back to where it began is no step", () => {
    const steps = state().history.done.length;
    editor.begin("slide");
    editor.preview((base) => setPosition(base, "b1k", 0.9));
    editor.preview((base) => setPosition(base, "b1k", 0.5));
    editor.commit();
    expect(state().history.done).toHaveLength(steps);
    expect(state().isDirty).toBe(false);
  });
});

describe("dirty state", () => {
  test("undone back to what is on disk, nothing is unsaved", () => {
    editor.apply("rename", setField(now(), "name", "Other"));
    expect(state().isDirty).toBe(true);
    editor.undo();
    expect(state().isDirty).toBe(false);
    editor.undo();
    expect(state().isDirty).toBe(true);
  });

  test("the same text typed again is no change", () => {
    const name = now().name;
    editor.apply("rename", setField(now(), "name", "Other"));
    editor.apply("rename", setField(now(), "name", name));
    expect(state().isDirty).toBe(false);
  });

  test("selecting is not editing", () => {
    const steps = state().history.done.length;
    editor.select(["b1k"]);
    editor.select(["b500"], "add");
    editor.select(["b1k"], "toggle");
    expect(state().selection).toEqual(["b500"]);
    expect(state().history.done).toHaveLength(steps);
    expect(state().isDirty).toBe(false);
  });
});

describe("a wire that is wrong", () => {
  test("is taken out, and the board works again", () => {
    const wires = [...now().wires, { from: "eq.out", to: "nowhere.in" }];
    editor.apply("wire wrongly", patchBetween(now(), { ...now(), wires }));
    expect(state().analysis.faults).toHaveLength(1);
    editor.apply("take out a wire", removeWire(now(), wires.length - 1));
    expect(state().analysis.faults).toEqual([]);
    expect(state().analysis.results).not.toBeNull();
    expect(now().wires).toHaveLength(wires.length - 1);
    editor.undo();
    expect(now().wires).toHaveLength(wires.length);
  });
});

describe("results", () => {
  test("follow the document and equal a computation from scratch", () => {
    editor.begin("slide");
    editor.preview((base) => setPosition(base, "b1k", 0.8));
    const { total, liveGain, figures } = state().analysis.results!;
    const fresh = respond(compileBoard(resolveBoard(now())), logFrequencies(FULL_RANGE.from, FULL_RANGE.to, 481));
    for (let i = 0; i < 481; i++) expect(total.gain[i]).toBeCloseTo(fresh.gain[i], 9);
    const centre = figures.get("b1k")!.boost.frequency!;
    expect(liveGain.get("b1k")).toBeCloseTo(respond(compileBoard(resolveBoard(now())), new Float64Array([centre])).gain[0], 9);
  });

  test("figures are kept while a slider moves, and worked out anew when a part changes", () => {
    const before = state().analysis.results!.figures;
    editor.apply("slide", setPosition(now(), "b1k", 0.8));
    expect(state().analysis.results!.figures).toBe(before);
    editor.apply("value", setPartValue(now(), "b1k", "seriesR", 1000));
    expect(state().analysis.results!.figures.get("b1k")!.boost.peak).toBeLessThan(before.get("b1k")!.boost.peak);
    editor.undo();
    expect(state().analysis.results!.figures.get("b1k")).toEqual(before.get("b1k"));
  });

  test("earlier curves stay what they were", () => {
    const { total } = state().analysis.results!;
    const copy = total.gain.slice();
    editor.apply("slide", setPosition(now(), "b1k", 1));
    expect(total.gain).toEqual(copy);
    expect(state().analysis.results!.total.gain).not.toEqual(copy);
  });

  test("the selected band alone, towards its present side", () => {
    expect(state().analysis.results!.alone).toBeNull();
    editor.select(["b1k"]);
    const peak = (): number => Math.max(...state().analysis.results!.alone!.gain);
    const boost = state().analysis.results!.figures.get("b1k")!.boost.peak;
    expect(peak()).toBeCloseTo(boost, 1);
    editor.apply("slide", setPosition(now(), "b1k", 0.2));
    expect(Math.min(...state().analysis.results!.alone!.gain)).toBeLessThan(-6);
    editor.select(["b1k", "b500"]);
    expect(state().analysis.results!.alone).toBeNull();
  });

  test("wiring faults leave the document open, without results", () => {
    editor.load({ ...now(), wires: now().wires.filter((w) => w.to !== "out.in") }, null, []);
    expect(state().analysis.board).toBeNull();
    expect(state().analysis.results).toBeNull();
    expect(state().analysis.faults[0].blocks).toContain("out");
    editor.apply("kind", changeKind(now(), "b1k", "shelf-section"));
    expect(now().blocks.find((b) => b.id === "b1k")!.kind).toBe("shelf-section");
  });

  test("a deleted block leaves the selection", () => {
    editor.select(["b2k"]);
    editor.undo();
    expect(state().selection).toEqual([]);
  });
});

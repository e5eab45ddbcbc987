import * as fc from "fast-check";
import { describe, expect, test } from "vitest";
import { BAND_KINDS } from "../../../core/blocks/index.ts";
import { moveBlocks, removeBlocks, setField, setLabel, setOpAmp, setPart, setPartDatum, setPartValue, setPositions, setSlider } from "../../../core/model/edit.ts";
import { addBand, addToChain, changeKind, duplicateBands, stagesOf } from "../../../core/model/edit-bands.ts";
import { EMPTY_HISTORY, record, redo, undo, type History } from "../../../core/model/history.ts";
import { newProject } from "../../../core/model/new-project.ts";
import { applyPatch, invertPatch, isSameContent, patchBetween, type Patch } from "../../../core/model/patch.ts";
import type { Block, Project } from "../../../core/model/project.ts";
import { restoreProject } from "../../../core/model/restore.ts";
import { serializeProject } from "../../../core/model/serialize.ts";
import { resolveBoard } from "../../../core/net/board.ts";

/** A random edit: which one, on which block, with which number. */
const edit = fc.record({ what: fc.nat(13), which: fc.nat(1000), kind: fc.nat(BAND_KINDS.length - 1), number: fc.double({ min: 0.001, max: 1, noNaN: true }) });

function patchOf(project: Project, { what, which, kind, number }: { what: number; which: number; kind: number; number: number }): Patch {
  const block = project.blocks[which % project.blocks.length];
  const role = Object.keys(block.parts ?? {})[which % 3] ?? "none";
  const stage = stagesOf(project)[which % stagesOf(project).length].id;
  const band = BAND_KINDS[kind];
  const added = (addition: ReturnType<typeof addBand>): Patch => (addition.ok ? addition.patch : []);
  switch (what) {
    case 0:
      return setPositions(project, { [block.id]: number });
    case 1:
      return setPartValue(project, block.id, role, number);
    case 2:
      return setPartDatum(project, block.id, role, "measured", which % 2 === 0 ? number : undefined);
    case 3:
      return setLabel(project, block.id, which % 2 === 0 ? "" : `label ${which}`);
    case 4:
      return setField(project, "temperature", number * 40);
    case 5:
      return setField(project, "supply", { kind: "split", positive: number * 20, negative: 12 });
    case 6:
      return added(addBand(project, stage, band, 20 + number * 20_000));
    case 7:
      return added(duplicateBands(project, [block.id, project.blocks[(which + 1) % project.blocks.length].id]));
    case 8: {
      const removal = removeBlocks(project, [block.id, project.blocks[(which + 3) % project.blocks.length].id]);
      return removal.ok ? removal.patch : [];
    }
    case 9:
      return changeKind(project, block.id, band);
    case 10:
      return moveBlocks(project, [{ id: block.id, at: { x: which, y: number } }]);
    case 11:
      return block.slider ? setSlider(project, block.id, { law: { power: number } }) : setPart(project, block.id, role, { value: number });
    case 12:
      return added(addToChain(project, which % 2 === 0 ? "buffer" : "boost-cut-stage", block.id));
    default:
      return setOpAmp(project, block.id, "NE5532");
  }
}

describe("history", () => {
  test("n undos give the first document, n redos the last, whatever was edited", () => {
    fc.assert(
      fc.property(fc.array(edit, { minLength: 1, maxLength: 25 }), (edits) => {
        const first = newProject();
        let project: Project = first;
        let history: History = EMPTY_HISTORY;
        const texts = [serializeProject(first)];
        for (const one of edits) {
          const patch = patchOf(project, one);
          project = applyPatch(project, patch);
          history = record(history, { label: "edit", patch });
          texts.push(serializeProject(project));
        }
        const last = project;
        for (let n = edits.length; n > 0; n--) {
          const back = undo(project, history)!;
          ({ project, history } = back);
          expect(serializeProject(project)).toBe(texts[n - 1]);
        }
        expect(isSameContent(project, first)).toBe(true);
        expect(undo(project, history)).toBeNull();
        for (let n = 1; n <= edits.length; n++) {
          ({ project, history } = redo(project, history)!);
          expect(serializeProject(project)).toBe(texts[n]);
        }
        expect(isSameContent(project, last)).toBe(true);
        expect(redo(project, history)).toBeNull();
      }),
      { numRuns: 150 },
    );
  });

  test("every edit leaves a document that opens again and whose wiring makes sense", () => {
    fc.assert(
      fc.property(fc.array(edit, { minLength: 1, maxLength: 25 }), (edits) => {
        let project: Project = newProject();
        for (const one of edits) project = applyPatch(project, patchOf(project, one));
        expect(isSameContent(restoreProject(serializeProject(project)).project, project)).toBe(true);
        expect(resolveBoard(project).warnings).toEqual([]);
      }),
      { numRuns: 100 },
    );
  });

  test("a new step forgets what had been taken back", () => {
    const first = newProject();
    const history = record(EMPTY_HISTORY, { label: "a", patch: setField(first, "name", "a") });
    const back = undo(applyPatch(first, history.done[0].patch), history)!;
    expect(record(back.history, { label: "b", patch: [] }).undone).toEqual([]);
  });
});

describe("patch", () => {
  const block = (id: string): Block => ({ id, kind: "buffer", opAmp: "ideal" });

  test("takes any order of rows to any other and back", () => {
    const pool = Array.from({ length: 8 }, (_, n) => block(`b${n}`));
    const rows = fc.uniqueArray(fc.nat(7), { maxLength: 8 }).map((picks) => picks.map((n) => pool[n]));
    fc.assert(
      fc.property(rows, rows, (before, after) => {
        const a = { ...newProject(), blocks: before };
        const b = { ...a, blocks: after };
        const patch = patchBetween(a, b);
        expect(applyPatch(a, patch).blocks).toEqual(after);
        expect(applyPatch(b, invertPatch(patch)).blocks).toEqual(before);
      }),
    );
  });

  test("names only what changed", () => {
    const project = newProject();
    const patch = setLabel(project, "eq", "Tone");
    expect(patch).toHaveLength(1);
    expect(patch[0]).toMatchObject({ table: "blocks", id: "eq", before: { index: 1 }, after: { index: 1, value: { label: "Tone" } } });
    expect(setLabel(applyPatch(project, patch), "eq", "Tone")).toEqual([]);
  });

  test("a field that comes and goes is absent again, not undefined", () => {
    const { notes: _notes, ...project } = newProject();
    const patch = setField(project, "notes", "hello");
    const back = applyPatch(applyPatch(project, patch), invertPatch(patch));
    expect(Object.hasOwn(back, "notes")).toBe(false);
  });
});

// @vitest-environment jsdom
import { beforeAll, describe, expect, test, vi } from "vitest";
import { changeBlocks, setLabel } from "../../../core/model/edit.ts";
import { addBand } from "../../../core/model/edit-bands.ts";
import { newProject } from "../../../core/model/new-project.ts";
import { ACTIONS } from "../../../renderer/editor/actions/actions.ts";
import type { ActionContext } from "../../../renderer/editor/actions/action.ts";
import { createEditor } from "../../../renderer/editor/store.ts";
import { doneText, tellSteps } from "../../../renderer/editor/told.ts";
import { createUi } from "../../../renderer/editor/ui.ts";

beforeAll(() => {
  vi.stubGlobal("matchMedia", () => ({ matches: false, addEventListener: () => undefined }));
});

function told() {
  const editor = createEditor(newProject());
  const ui = createUi();
  tellSteps(editor, ui);
  const focusBlock = vi.fn();
  const context = { editor, ui, sheet: () => ({ focusBlock }), clipboard: { bands: [] }, isVoid: () => false } as unknown as ActionContext;
  const run = (id: string): void => void ACTIONS.find((action) => action.id === id)!.perform(context);
  return { editor, focusBlock, run, notice: () => ui.store.getState().notice?.text };
}

describe("what the status line tells of changes", () => {
  test("a band added, made another kind, slid, deleted, undone and redone", () => {
    const { run, notice, focusBlock } = told();
    run("add-gyrator-section");
    expect(notice()).toBe("Added gyrator section “1 kHz”.");
    expect(focusBlock).toHaveBeenLastCalledWith("b1k");
    run("change-to-inductor-section");
    expect(notice()).toBe("Made “1 kHz” an inductor section.");
    run("slider-up");
    expect(notice()).toBe("Raised slider.");
    run("slider-boost");
    expect(notice()).toBe("Done: full boost.");
    run("duplicate");
    expect(notice()).toBe("Duplicated “1 kHz”.");
    expect(focusBlock).toHaveBeenLastCalledWith("b1k-2");
    run("delete");
    expect(notice()).toBe("Deleted “1 kHz · 2”.");
    run("undo");
    expect(notice()).toBe("Undone: delete “1 kHz · 2”.");
    run("redo");
    expect(notice()).toBe("Done again: delete “1 kHz · 2”.");
  });

  test("a gesture when it ends, and nothing of one that changed nothing or was taken back", () => {
    const { editor, notice } = told();
    editor.begin("slide “1 kHz”");
    editor.commit();
    expect(notice()).toBeUndefined();
    editor.begin("rename “in”");
    editor.preview((base) => setLabel(base, "in", "mic"));
    expect(notice()).toBeUndefined();
    editor.commit();
    expect(notice()).toBe("Renamed “in”.");
    editor.load(newProject(), null, []);
    editor.apply("nothing", changeBlocks(editor.store.getState().project, [], (block) => block));
    expect(notice()).toBe("Renamed “in”.");
  });

  test("every step that the screen records begins with a verb that is known, or is told as it is", () => {
    expect(doneText("take out a wire")).toBe("Took out a wire.");
    expect(doneText("set series C of “1 kHz”")).toBe("Set series C of “1 kHz”.");
    expect(doneText("all sliders to full cut")).toBe("Done: all sliders to full cut.");
  });
});

test("a band of a name that is there already is told apart, and so is the next", () => {
  const { editor } = told();
  const names = [1, 2, 3].map(() => {
    const addition = addBand(editor.store.getState().project, "eq", "gyrator-section", 1000);
    if (!addition.ok) throw new Error(addition.message);
    editor.apply("add", addition.patch);
    return addition.names[0];
  });
  expect(names).toEqual(["1 kHz", "1 kHz · 2", "1 kHz · 3"]);
});

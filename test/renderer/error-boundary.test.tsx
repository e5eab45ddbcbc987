// @vitest-environment jsdom
import { act } from "react";
import { createRoot } from "react-dom/client";
import { afterEach, beforeEach, describe, expect, test, vi } from "vitest";
import { newProject } from "../../core/model/new-project.ts";
import { setField } from "../../core/model/edit.ts";
import { createEditor } from "../../renderer/editor/store.ts";
import { ErrorBoundary } from "../../renderer/ErrorBoundary.tsx";

let isBroken: boolean;

function Fragile() {
  if (isBroken) throw new Error("the pen broke");
  return <p>drawing</p>;
}

beforeEach(() => {
  isBroken = true;
  vi.stubGlobal("IS_REACT_ACT_ENVIRONMENT", true);
  // React tells of the error on the console, and so does the boundary.
  vi.spyOn(console, "error").mockImplementation(() => undefined);
});
afterEach(() => {
  vi.restoreAllMocks();
  vi.unstubAllGlobals();
});

describe("a screen that fails", () => {
  test("keeps the document, offers to save it, and can be tried again", async () => {
    const editor = createEditor(newProject());
    editor.apply("rename", setField(editor.store.getState().project, "name", "Work of a day"));
    const place = document.createElement("div");
    const root = createRoot(place);
    await act(async () => root.render(<ErrorBoundary editor={editor}><Fragile /></ErrorBoundary>));
    expect(place.textContent).toContain("Your board is safe");
    expect(place.textContent).toContain("the pen broke");
    expect(place.querySelector("input")!.value).toBe("Work of a day (rescued)");

    const button = (name: string): HTMLButtonElement => [...place.querySelectorAll("button")].find((b) => b.textContent === name)!;
    await act(async () => button("Save as").click());
    expect(place.textContent).toContain("Not saved. There is no connection");

    isBroken = false;
    await act(async () => button("Try the screen again").click());
    expect(place.textContent).toBe("drawing");
    expect(editor.store.getState().project.name).toBe("Work of a day");
    await act(async () => root.unmount());
  });
});

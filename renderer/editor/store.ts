import { createStore, type StoreApi } from "zustand/vanilla";
import type { Fault } from "../../core/errors.ts";
import { EMPTY_HISTORY, record, redo, undo, type History } from "../../core/model/history.ts";
import { applyPatch, isSameContent, patchBetween, type Patch } from "../../core/model/patch.ts";
import type { Project } from "../../core/model/project.ts";
import { ResultsEngine, type Analysis, type Range } from "./results.ts";

/** Where the document came from. */
export interface OpenFile {
  readonly path: string;
  /** False for demos and write-protected files: saving needs a new name. */
  readonly isWritable: boolean;
  /** One of the projects that come with the program. */
  readonly isDemo: boolean;
  readonly fingerprint: string;
}

/** A change under way: what the document was when it began. */
export interface Gesture {
  readonly label: string;
  readonly base: Project;
}

export interface EditorState {
  readonly project: Project;
  /** The document as it is on disk; what `New` made, before the first save. */
  readonly saved: Project;
  readonly isDirty: boolean;
  /** Null for a document that was never saved. */
  readonly file: OpenFile | null;
  /** What the file said that stops nothing. */
  readonly fileWarnings: readonly Fault[];
  readonly history: History;
  readonly gesture: Gesture | null;
  readonly selection: readonly string[];
  readonly range: Range;
  readonly analysis: Analysis;
}

/** The one place where a document changes. */
export interface Editor {
  readonly store: StoreApi<EditorState>;
  /** Shows another document, with a history of its own. */
  load(project: Project, file: OpenFile | null, warnings: readonly Fault[]): void;
  /** Notes that the document as given is now on disk. */
  markSaved(project: Project, file: OpenFile): void;
  /** Applies an edit as one undo step; an empty patch is none. A gesture under way is committed first. */
  apply(label: string, patch: Patch): void;
  begin(label: string): void;
  /** Shows the gesture's document changed by a patch made for the document it began with. */
  preview(change: (base: Project) => Patch): void;
  /** Makes the gesture one undo step. */
  commit(): void;
  /** Puts the document back as the gesture found it. */
  cancel(): void;
  /** The label of the step taken back, or null where there was none. */
  undo(): string | null;
  redo(): string | null;
  select(ids: readonly string[], mode?: "replace" | "toggle" | "add"): void;
}

/** The range that a board opens with, computed and shown, Hz: octaves wide enough for bands to stand under their frequencies. */
export const FULL_RANGE: Range = { from: 20, to: 20e3 };

/** Builds the document store around a first document. */
export function createEditor(project: Project): Editor {
  const engine = new ResultsEngine();
  const start = (document: Project, file: OpenFile | null, fileWarnings: readonly Fault[], range: Range): EditorState => ({
    project: document,
    saved: document,
    isDirty: false,
    file,
    fileWarnings,
    history: EMPTY_HISTORY,
    gesture: null,
    selection: [],
    range,
    analysis: engine.analyse(document, [], range),
  });
  const store = createStore<EditorState>(() => start(project, null, [], FULL_RANGE));

  /** Every change goes through here, so that results and dirty state are never behind the document. */
  function update(change: Partial<Omit<EditorState, "analysis" | "isDirty">>): void {
    const next = { ...store.getState(), ...change };
    if (change.project || change.selection) {
      const ids = new Set(next.project.blocks.map((b) => b.id));
      const selection = next.selection.every((id) => ids.has(id)) ? next.selection : next.selection.filter((id) => ids.has(id));
      store.setState({ ...next, selection, isDirty: !isSameContent(next.project, next.saved), analysis: engine.analyse(next.project, selection, next.range) });
    } else store.setState({ ...next, isDirty: !isSameContent(next.project, next.saved) });
  }

  const editor: Editor = {
    store,
    load(document, file, warnings) {
      store.setState(start(document, file, warnings, store.getState().range));
    },
    markSaved(document, file) {
      update({ saved: document, file });
    },
    apply(label, patch) {
      editor.commit();
      if (patch.length === 0) return;
      const { project: before, history } = store.getState();
      update({ project: applyPatch(before, patch), history: record(history, { label, patch }) });
    },
    begin(label) {
      editor.commit();
      update({ gesture: { label, base: store.getState().project } });
    },
    preview(change) {
      const { gesture } = store.getState();
      if (gesture) update({ project: applyPatch(gesture.base, change(gesture.base)) });
    },
    commit() {
      const { gesture, project: now, history } = store.getState();
      if (!gesture) return;
      // A knob that came back to where it was leaves no step.
      const patch = isSameContent(gesture.base, now) ? [] : patchBetween(gesture.base, now);
      if (patch.length === 0) update({ project: gesture.base, gesture: null });
      else update({ gesture: null, history: record(history, { label: gesture.label, patch }) });
    },
    cancel() {
      const { gesture } = store.getState();
      if (gesture) update({ project: gesture.base, gesture: null });
    },
    undo: () => travel(undo),
    redo: () => travel(redo),
    select(ids, mode = "replace") {
      const { selection } = store.getState();
      const asked = [...new Set(ids)];
      const next = mode === "replace" ? asked : mode === "add" ? [...new Set([...selection, ...asked])] : [...selection.filter((id) => !asked.includes(id)), ...asked.filter((id) => !selection.includes(id))];
      if (next.length === selection.length && next.every((id, index) => id === selection[index])) return;
      update({ selection: next });
    },
  };

  function travel(way: typeof undo): string | null {
    // Undo in the middle of a gesture means: not this one.
    if (store.getState().gesture) {
      const { label } = store.getState().gesture!;
      editor.cancel();
      return label;
    }
    const { project: now, history } = store.getState();
    const travelled = way(now, history);
    if (!travelled) return null;
    update({ project: travelled.project, history: travelled.history });
    return travelled.step.label;
  }

  return editor;
}

import { flushSync } from "react-dom";
import { BAND_KINDS, BLOCKS } from "../../../core/blocks/index.ts";
import { blockName, removeBlocks } from "../../../core/model/edit.ts";
import { copyBands, duplicateBands, stageOf, type Addition } from "../../../core/model/edit-bands.ts";
import { formatDb, formatFigure } from "../../../core/units.ts";
import type { BandFigures } from "../../../core/analysis/bands.ts";
import type { Block } from "../../../core/model/project.ts";
import { copyText } from "../copy-text.ts";
import { selectedBlocks, type Action, type ActionContext } from "./action.ts";

/** `1 kHz`, or `3 blocks`: what the last steps and messages call a selection. */
export function namesOf(blocks: readonly Block[]): string {
  return blocks.length === 1 ? `“${blockName(blocks[0])}”` : `${blocks.length} blocks`;
}

/** Applies an addition as one step, selects what came and gives it the focus. */
export function add(c: ActionContext, label: string, addition: Addition): void {
  if (!addition.ok) {
    c.ui.notify(addition.message, true);
    return;
  }
  // On the screen at once, so that it can take the focus before the next key.
  flushSync(() => {
    c.editor.apply(label, addition.patch);
    c.editor.select(addition.ids);
  });
  c.sheet()?.focusBlock(addition.ids[0]);
}

/** In the drawer Undo is the drawer's, and says so; commands about blocks wait for the board. */
function isDrawer(c: ActionContext): boolean {
  return c.ui.store.getState().view === "drawer";
}

function isBand(block: Block): boolean {
  return BAND_KINDS.includes(block.kind);
}

function hasBand(c: ActionContext): boolean {
  return !isDrawer(c) && selectedBlocks(c).some(isBand);
}

function remove(c: ActionContext, verb: string): void {
  const blocks = selectedBlocks(c);
  const edit = removeBlocks(c.editor.store.getState().project, blocks.map((b) => b.id));
  if (edit.ok) c.editor.apply(`${verb} ${namesOf(blocks)}`, edit.patch);
  else c.ui.notify(edit.message, true);
}

export const EDIT_ACTIONS: readonly Action[] = [
  {
    id: "undo", keywords: "back revert step", menu: "Edit", group: 1, chords: ["Mod+Z"], inFields: "untouched",
    label: (c) => (isDrawer(c) ? `Undo in the drawer: ${c.drawer.undoLabel() ?? "nothing"}` : `Undo ${c.editor.store.getState().history.done.at(-1)?.label ?? ""}`.trim()),
    when: (c) => (isDrawer(c) ? c.drawer.undoLabel() !== null : c.editor.store.getState().history.done.length > 0 || c.editor.store.getState().gesture !== null),
    perform: async (c) => {
      if (isDrawer(c)) return c.drawer.undo();
      const label = c.editor.undo();
      if (label !== null) c.ui.notify(`Undone: ${label}.`);
    },
  },
  {
    id: "redo", keywords: "again forward step", menu: "Edit", group: 1, chords: ["Mod+Shift+Z", "Mod+Y"], inFields: "untouched",
    label: (c) => (isDrawer(c) ? `Redo in the drawer: ${c.drawer.redoLabel() ?? "nothing"}` : `Redo ${c.editor.store.getState().history.undone.at(-1)?.label ?? ""}`.trim()),
    when: (c) => (isDrawer(c) ? c.drawer.redoLabel() !== null : c.editor.store.getState().history.undone.length > 0),
    perform: async (c) => {
      if (isDrawer(c)) return c.drawer.redo();
      const label = c.editor.redo();
      if (label !== null) c.ui.notify(`Done again: ${label}.`);
    },
  },
  {
    id: "cut", label: "Cut", keywords: "band clipboard remove", menu: "Edit", group: 2, chords: ["Mod+X"], when: hasBand,
    perform: (c) => {
      c.clipboard.bands = selectedBlocks(c).filter(isBand);
      c.editor.select(c.clipboard.bands.map((b) => b.id));
      remove(c, "cut");
    },
  },
  {
    id: "copy", label: "Copy", keywords: "band clipboard", menu: "Edit", group: 2, chords: ["Mod+C"], when: hasBand,
    perform: (c) => {
      c.clipboard.bands = selectedBlocks(c).filter(isBand);
      c.ui.notify(`Copied ${namesOf(c.clipboard.bands)}.`);
    },
  },
  {
    id: "paste", label: "Paste", keywords: "band clipboard insert", menu: "Edit", group: 2, chords: ["Mod+V"], when: (c) => !isDrawer(c) && c.clipboard.bands.length > 0,
    perform: (c) => {
      const { project, selection } = c.editor.store.getState();
      const stage = selection.map((id) => stageOf(project, id)).find((id) => id !== undefined);
      add(c, `paste ${namesOf(c.clipboard.bands)}`, copyBands(project, c.clipboard.bands, stage));
    },
  },
  {
    id: "duplicate", label: "Duplicate", keywords: "band copy twin", menu: "Edit", group: 2, chords: ["Mod+D"], when: hasBand,
    perform: (c) => {
      const blocks = selectedBlocks(c).filter(isBand);
      add(c, `duplicate ${namesOf(blocks)}`, duplicateBands(c.editor.store.getState().project, blocks.map((b) => b.id)));
    },
  },
  {
    id: "delete", label: "Delete", keywords: "remove erase band block", menu: "Edit", group: 2, chords: ["Delete", "Backspace"], when: (c) => !isDrawer(c) && selectedBlocks(c).length > 0,
    perform: (c) => remove(c, "delete"),
  },
  {
    id: "select-all", label: "Select all", keywords: "everything blocks", menu: "Edit", group: 3, chords: ["Mod+A"],
    when: (c) => !isDrawer(c),
    perform: (c) => c.editor.select(c.editor.store.getState().project.blocks.map((b) => b.id)),
  },
  {
    id: "select-none", label: "Clear selection", keywords: "deselect none cancel", menu: "Edit", group: 3, chords: ["Escape"],
    when: (c) => c.editor.store.getState().selection.length > 0 || c.editor.store.getState().gesture !== null,
    perform: (c) => {
      if (c.editor.store.getState().gesture) c.editor.cancel();
      else c.editor.select([]);
    },
  },
  { id: "select-next", label: "Select next block", keywords: "forward band walk", menu: "Edit", group: 3, chords: ["N"], perform: (c) => step(c, 1) },
  { id: "select-previous", label: "Select previous block", keywords: "back band walk", menu: "Edit", group: 3, chords: ["Shift+N"], perform: (c) => step(c, -1) },
  {
    id: "edit-value", label: "Edit value on the sheet", keywords: "change part capacitor resistor type", menu: "Edit", group: 4, chords: ["F2"],
    when: (c) => c.ui.store.getState().view === "board" && selectedBlocks(c).length === 1,
    perform: (c) => c.sheet()?.editValue(selectedBlocks(c)[0].id),
  },
  {
    id: "copy-figures", label: "Copy band figures as text", keywords: "table clipboard export spreadsheet q peak centre", menu: "Edit", group: 4,
    when: (c) => (c.editor.store.getState().analysis.results?.figures.size ?? 0) > 0,
    perform: async (c) => {
      const figures = [...c.editor.store.getState().analysis.results!.figures.values()];
      await copyText(figuresText(figures, c.isVoid));
      c.ui.notify(`Copied the figures of ${figures.length} ${figures.length === 1 ? "band" : "bands"}.`);
    },
  },
];

function step(c: ActionContext, by: 1 | -1): void {
  const { project, selection } = c.editor.store.getState();
  const { blocks } = project;
  const at = blocks.findIndex((b) => b.id === selection.at(-1));
  const next = at < 0 ? (by === 1 ? 0 : blocks.length - 1) : (at + by + blocks.length) % blocks.length;
  const id = blocks[next].id;
  c.editor.select([id]);
  c.sheet()?.focusBlock(id);
}

const hertz = (f: number | null): string => (f === null ? "–" : formatFigure(f, "frequency"));
const plain = (q: number | null): string => (q === null ? "–" : formatFigure(q, "plain"));

/** The figures as tab-separated text, one row a band; what means nothing is left out and named. */
export function figuresText(figures: readonly BandFigures[], isVoid: ActionContext["isVoid"]): string {
  const rows = figures.map((f) => {
    const boost = [formatDb(f.boost.peak), formatDb(-f.interactionLoss), hertz(f.boost.frequency), plain(f.boost.q)];
    const cut = [formatDb(f.cut.peak), hertz(f.cut.frequency), plain(f.cut.q)];
    const held = (cells: readonly string[], end: "boost" | "cut"): readonly string[] => (isVoid(f.id, end) ? cells.map(() => "unstable") : cells);
    return [f.label, BLOCKS[f.kind].label, formatDb(f.isolatedBoost), ...held(boost, "boost"), ...held(cut, "cut")];
  });
  const head = ["band", "kind", "isolated boost", "boost in circuit", "lost in circuit", "boost centre", "boost Q", "cut in circuit", "cut centre", "cut Q"];
  return [head, ...rows].map((row) => row.join("\t")).join("\n");
}

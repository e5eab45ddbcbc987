import { BAND_KINDS, BLOCKS } from "../../../core/blocks/index.ts";
import type { BlockKind } from "../../../core/blocks/kinds.ts";
import { setPositions } from "../../../core/model/edit.ts";
import { addBand, addToChain, changeKind, nextCentre, stageOf, stagesOf } from "../../../core/model/edit-bands.ts";
import type { Block } from "../../../core/model/project.ts";
import { selectedBlocks, type Action, type ActionContext } from "./action.ts";
import { add, namesOf } from "./edit-actions.ts";

const ADD_CHORDS: Partial<Record<BlockKind, string>> = { "gyrator-section": "G", "inductor-section": "I", "shelf-section": "H", "low-shelf-section": "L", "level-section": "V" };

/** The stage that new bands go to: that of the selection, else the first. */
function chosenStage(c: ActionContext): string | undefined {
  const { project, selection } = c.editor.store.getState();
  return selection.map((id) => stageOf(project, id)).find((id) => id !== undefined) ?? stagesOf(project)[0]?.id;
}

/** In-circuit centres of the resonant bands, Hz. */
function centres(c: ActionContext): number[] {
  const figures = c.editor.store.getState().analysis.results?.figures.values() ?? [];
  return [...figures]
    .filter((f) => BLOCKS[f.kind].shape === "resonance")
    .map((f) => f.boost.frequency ?? f.resonance)
    .filter((frequency) => frequency !== null);
}

/** `a shelf section`, `an inductor section`. */
function withArticle(noun: string): string {
  return `${/^[aeiou]/.test(noun) ? "an" : "a"} ${noun}`;
}

const lower = (kind: BlockKind): string => BLOCKS[kind].label.toLowerCase();

function sliders(c: ActionContext): Block[] {
  return selectedBlocks(c).filter((b) => b.slider);
}

function allSliders(c: ActionContext): Block[] {
  return c.editor.store.getState().project.blocks.filter((b) => b.slider);
}

function slide(c: ActionContext, label: string, blocks: readonly Block[], to: (now: number) => number): void {
  const positions = Object.fromEntries(blocks.map((b) => [b.id, to(b.slider!.position)]));
  c.editor.apply(label, setPositions(c.editor.store.getState().project, positions));
}

/** One step of a slider by command: a twentieth of its travel, and exact where it began exact. */
function stepped(now: number, by: number): number {
  return Math.min(1, Math.max(0, Math.round((now + by) * 1e9) / 1e9));
}

const addActions = BAND_KINDS.map((kind): Action => {
  const chord = ADD_CHORDS[kind];
  return {
    id: `add-${kind}`, label: `Add ${lower(kind)}`, keywords: "new band insert create filter", menu: "Bands", group: 1,
    ...(chord === undefined ? {} : { chords: [chord] }),
    when: (c) => chosenStage(c) !== undefined,
    perform: (c) => {
      const addition = addBand(c.editor.store.getState().project, chosenStage(c)!, kind, nextCentre(centres(c)));
      add(c, addition.ok ? `add ${lower(kind)} “${addition.names[0]}”` : "", addition);
    },
  };
});

const changeActions = BAND_KINDS.map(
  (kind): Action => ({
    id: `change-to-${kind}`, label: `Change to ${lower(kind)}`, keywords: "kind convert replace band", menu: "Bands", group: 2,
    when: (c) => selectedBlocks(c).some((b) => BAND_KINDS.includes(b.kind) && b.kind !== kind),
    perform: (c) => {
      const blocks = selectedBlocks(c);
      for (const block of blocks) c.editor.apply(`make ${namesOf([block])} ${withArticle(lower(kind))}`, changeKind(c.editor.store.getState().project, block.id, kind));
    },
  }),
);

const chainActions = (["boost-cut-stage", "buffer"] as const).map(
  (kind): Action => ({
    id: `add-${kind}`, label: `Add ${lower(kind)} to the chain`, keywords: "new second bus rail insert split cascade", menu: "Bands", group: 4,
    when: (c) => chosenStage(c) !== undefined,
    perform: (c) => {
      const { project } = c.editor.store.getState();
      // Behind what is selected where that has an out, else behind the stage of the selection.
      const chosen = selectedBlocks(c).find((b) => BLOCKS[b.kind].ports.includes("out"));
      add(c, `add ${lower(kind)}`, addToChain(project, kind, chosen?.id ?? chosenStage(c)!));
    },
  }),
);

export const BAND_ACTIONS: readonly Action[] = [
  ...addActions,
  ...changeActions,
  { id: "centre-slider", label: "Centre slider", keywords: "middle zero flat reset half", menu: "Bands", group: 3, chords: ["C"], when: (c) => sliders(c).length > 0, perform: (c) => slide(c, "centre slider", sliders(c), () => 0.5) },
  { id: "slider-up", label: "Raise slider", keywords: "boost more up step", menu: "Bands", group: 3, when: (c) => sliders(c).length > 0, perform: (c) => slide(c, "raise slider", sliders(c), (now) => stepped(now, 0.05)) },
  { id: "slider-down", label: "Lower slider", keywords: "cut less down step", menu: "Bands", group: 3, when: (c) => sliders(c).length > 0, perform: (c) => slide(c, "lower slider", sliders(c), (now) => stepped(now, -0.05)) },
  { id: "slider-boost", label: "Full boost", keywords: "slider maximum top end", menu: "Bands", group: 3, when: (c) => sliders(c).length > 0, perform: (c) => slide(c, "full boost", sliders(c), () => 1) },
  { id: "slider-cut", label: "Full cut", keywords: "slider minimum bottom end", menu: "Bands", group: 3, when: (c) => sliders(c).length > 0, perform: (c) => slide(c, "full cut", sliders(c), () => 0) },
  { id: "centre-all", label: "Centre all sliders", keywords: "middle zero flat reset every", menu: "Bands", group: 3, chords: ["Shift+C"], when: (c) => allSliders(c).length > 0, perform: (c) => slide(c, "centre all sliders", allSliders(c), () => 0.5) },
  { id: "boost-all", label: "All sliders to full boost", keywords: "maximum every top end", menu: "Bands", group: 3, when: (c) => allSliders(c).length > 0, perform: (c) => slide(c, "all sliders to full boost", allSliders(c), () => 1) },
  { id: "cut-all", label: "All sliders to full cut", keywords: "minimum every bottom end", menu: "Bands", group: 3, when: (c) => allSliders(c).length > 0, perform: (c) => slide(c, "all sliders to full cut", allSliders(c), () => 0) },
  ...chainActions,
];

import { moveBlocks } from "../../../core/model/edit.ts";
import { formatValue } from "../../../core/units.ts";
import { VIEWS } from "../../views.ts";
import type { Action, ActionContext } from "./action.ts";

const ZOOM_STEP = 1.25;
const PAN_STEP = 80;

/** The frequency that the hands are at: under the open menu, else the cursor's, Hz. */
function frequencyHere(c: ActionContext): number | null {
  const { contextMenu, cursor } = c.ui.store.getState();
  return contextMenu?.frequency ?? cursor;
}

function isBoardShown(c: ActionContext): boolean {
  return c.ui.store.getState().view === "board";
}

const showActions = VIEWS.map(
  ({ id, label, keywords, chord }): Action => ({
    id: `show-${id}`, label: `Show ${label.toLowerCase()}`, keywords, menu: "View", group: 0, chords: [chord], inFields: "always",
    perform: (c) => c.ui.patch({ view: id, contextMenu: null }),
  }),
);

export const VIEW_ACTIONS: readonly Action[] = [
  ...showActions,
  {
    id: "show-poles", label: "Show poles, zeros and loops", keywords: "stability oscillation margin damping s-plane unstable equations", menu: "View", group: 0,
    perform: (c) => c.ui.patch({ view: "equations", equationsPage: "poles", contextMenu: null }),
  },
  {
    id: "equations-here", keywords: "numbers frequency cursor point node currents", menu: null, group: 0, chords: ["E"],
    label: (c) => `Equations at ${formatValue(frequencyHere(c) ?? 1000, "frequency")}`,
    when: (c) => isBoardShown(c) && frequencyHere(c) !== null,
    perform: (c) => c.ui.patch({ view: "equations", equationsPage: "block", equationsAt: frequencyHere(c), contextMenu: null }),
  },
  { id: "fit", label: "Fit the sheet", keywords: "zoom whole overview reset view", menu: "View", group: 1, chords: ["F"], when: isBoardShown, perform: (c) => c.sheet()?.fit() },
  { id: "zoom-in", label: "Zoom in", keywords: "larger closer magnify", menu: "View", group: 1, chords: ["+", "="], when: isBoardShown, perform: (c) => c.sheet()?.zoomBy(ZOOM_STEP) },
  { id: "zoom-out", label: "Zoom out", keywords: "smaller further", menu: "View", group: 1, chords: ["-"], when: isBoardShown, perform: (c) => c.sheet()?.zoomBy(1 / ZOOM_STEP) },
  { id: "pan-left", label: "Show what is further left", keywords: "pan scroll move view", menu: null, group: 2, when: isBoardShown, perform: (c) => c.sheet()?.panBy(PAN_STEP, 0) },
  { id: "pan-right", label: "Show what is further right", keywords: "pan scroll move view", menu: null, group: 2, when: isBoardShown, perform: (c) => c.sheet()?.panBy(-PAN_STEP, 0) },
  { id: "pan-up", label: "Show what is further up", keywords: "pan scroll move view", menu: null, group: 2, when: isBoardShown, perform: (c) => c.sheet()?.panBy(0, PAN_STEP) },
  { id: "pan-down", label: "Show what is further down", keywords: "pan scroll move view", menu: null, group: 2, when: isBoardShown, perform: (c) => c.sheet()?.panBy(0, -PAN_STEP) },
  {
    id: "arrange", label: "Arrange bands under their frequencies", keywords: "tidy place layout order align", menu: "View", group: 3, chords: ["Shift+A"], when: isBoardShown,
    perform: (c) => {
      const moves = c.sheet()?.arrange() ?? [];
      c.editor.apply("arrange", moveBlocks(c.editor.store.getState().project, moves));
    },
  },
  {
    id: "phase", keywords: "degrees angle curve axis", menu: "View", group: 4, chords: ["Shift+P"], when: isBoardShown,
    label: (c) => (c.ui.store.getState().isPhaseShown ? "Hide the phase" : "Show the phase"),
    perform: (c) => c.ui.patch({ isPhaseShown: !c.ui.store.getState().isPhaseShown }),
  },
  {
    id: "theme", keywords: "dark light colours paper night", menu: "View", group: 4, chords: ["T"],
    label: (c) => (c.ui.store.getState().theme === "paper" ? "Night theme" : "Paper theme"),
    perform: (c) => c.ui.setTheme(c.ui.store.getState().theme === "paper" ? "night" : "paper"),
  },
  {
    id: "panel", keywords: "inspector side values show hide", menu: "View", group: 4, chords: ["P"],
    label: (c) => (c.ui.store.getState().isPanelOpen ? "Hide the panel" : "Show the panel"),
    perform: (c) => c.ui.patch({ isPanelOpen: !c.ui.store.getState().isPanelOpen }),
  },
];

export const HELP_ACTIONS: readonly Action[] = [
  { id: "commands", label: "All commands…", keywords: "find search list palette", menu: "Help", group: 1, chords: ["Mod+K"], inFields: "always", perform: (c) => void c.ui.ask("commands", null) },
  { id: "keys", label: "Keys", keywords: "keyboard shortcuts help chords", menu: "Help", group: 1, chords: ["?"], perform: (c) => void c.ui.ask("keys", null) },
  { id: "about", label: "About Bandwright", keywords: "version notes cautions models", menu: "Help", group: 2, perform: (c) => void c.ui.ask("about", null) },
];

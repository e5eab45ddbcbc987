import { flushSync } from "react-dom";
import { ALL_CHOSEN, NOTHING_CHOSEN } from "../../drawer/selection.ts";
import { counted } from "../../drawer/line-text.ts";
import { selectedBlocks, type Action, type ActionContext } from "./action.ts";
import { download } from "./file-actions.ts";

/** Ids in the page that commands bring the focus to. */
const SEARCH_FIELD = "drawer-search";
const SWAP_LIST = "drawer-swap";

function isDrawerShown(c: ActionContext): boolean {
  return c.ui.store.getState().view === "drawer";
}

function hasLines(c: ActionContext): boolean {
  const { info } = c.drawer.store.getState();
  return info !== null && info.lines + info.retired > 0;
}

/** Whether there are lines that a command would be about. */
function hasChosen(c: ActionContext): boolean {
  return isDrawerShown(c) && c.drawer.chosenCount() > 0;
}

function show(c: ActionContext): void {
  c.ui.patch({ view: "drawer", contextMenu: null });
}

/** How long the focus waits for a thing that is being read, ms. */
const FOCUS_PATIENCE = 2000;

/** Shows what a command is about and gives it the focus: before the next key where it is there, else as soon as it has been read. */
function showAndFocus(bringUp: () => void, find: () => HTMLElement | null | undefined): void {
  flushSync(bringUp);
  const element = find();
  if (element) return element.focus();
  const focused = document.activeElement;
  const observer = new MutationObserver(() => {
    const late = find();
    if (!late) return;
    observer.disconnect();
    // Hands that have gone elsewhere meanwhile stay there.
    if (document.activeElement === focused || document.activeElement === document.body) late.focus();
  });
  observer.observe(document.body, { childList: true, subtree: true });
  setTimeout(() => observer.disconnect(), FOCUS_PATIENCE);
}

function startTask(c: ActionContext, task: "fill" | "match"): void {
  c.ui.patch({ view: "board", task, taskBeside: c.editor.store.getState().selection, isPanelOpen: true, contextMenu: null });
}

function hasBoard(c: ActionContext): boolean {
  return c.editor.store.getState().analysis.board !== null;
}

export const DRAWER_ACTIONS: readonly Action[] = [
  {
    id: "drawer-swap", label: "Swap a part from the drawer", keywords: "replace candidate stock substitute capacitor resistor", menu: "Drawer", group: 1,
    when: (c) => hasBoard(c) && selectedBlocks(c).length === 1,
    perform: (c) => {
      showAndFocus(
        () => c.ui.patch({ view: "board", taskBeside: null, isPanelOpen: true, contextMenu: null }),
        () => {
          const list = document.getElementById(SWAP_LIST);
          list?.scrollIntoView({ block: "nearest" });
          return list?.querySelector<HTMLElement>(".swap-card") ?? list;
        },
      );
    },
  },
  { id: "drawer-fill", label: "Fill the board from the drawer…", keywords: "assign place parts stock lines budget", menu: "Drawer", group: 1, when: hasBoard, perform: (c) => startTask(c, "fill") },
  { id: "drawer-match", label: "Match measured pieces…", keywords: "meter deal tolerance assign measured", menu: "Drawer", group: 1, when: hasBoard, perform: (c) => startTask(c, "match") },
  { id: "drawer-build", label: "Build units…", keywords: "reserve use release bill materials shopping list cost", menu: "Drawer", group: 1, when: hasBoard, perform: (c) => void c.ui.ask("drawerBuild", null) },
  {
    id: "drawer-find", label: "Find lines", keywords: "search filter drawer stock value", menu: "Drawer", group: 2, chords: ["Mod+F"], inFields: "always",
    perform: (c) => {
      showAndFocus(
        () => show(c),
        () => document.getElementById(SEARCH_FIELD),
      );
    },
  },
  {
    id: "drawer-add-line", label: "Add a line…", keywords: "new stock part drawer", menu: "Drawer", group: 2,
    perform: (c) => {
      show(c);
      void c.ui.ask("drawerAdd", null);
    },
  },
  {
    id: "drawer-edit-lines", keywords: "bulk change set fields chosen selected", menu: "Drawer", group: 2, when: hasChosen,
    label: (c) => `Edit ${isDrawerShown(c) ? counted(c.drawer.chosenCount(), "line") : "lines"} in the panel`,
    perform: (c) => {
      showAndFocus(
        () => c.ui.patch({ isPanelOpen: true }),
        () => document.querySelector<HTMLElement>(".panel .field-form input"),
      );
    },
  },
  {
    id: "drawer-move", label: "Book a movement…", keywords: "bought used counted scrapped ledger stock quantity", menu: "Drawer", group: 2, when: hasChosen,
    perform: async (c) => {
      const ids = await c.drawer.chosenIds();
      if (ids.length > 10_000) c.ui.notify("At most 10 000 lines at a time: narrow the filter first.", true);
      else if (ids.length > 0) await c.ui.ask("drawerMove", { ids });
    },
  },
  {
    id: "drawer-retire", keywords: "delete remove out of use retired", menu: "Drawer", group: 2, when: hasChosen,
    label: (c) => `Take ${isDrawerShown(c) ? counted(c.drawer.chosenCount(), "line") : "lines"} out of use`,
    perform: async (c) => c.drawer.retireLines(await c.drawer.chosenIds(), true),
  },
  { id: "drawer-choose-all", label: "Choose all lines that fit the filter", keywords: "select everything lines", menu: "Drawer", group: 3, when: (c) => isDrawerShown(c) && hasLines(c), perform: (c) => c.drawer.choose(ALL_CHOSEN) },
  { id: "drawer-choose-none", label: "Choose no line", keywords: "deselect clear lines", menu: "Drawer", group: 3, when: (c) => isDrawerShown(c) && hasLines(c), perform: (c) => c.drawer.choose(NOTHING_CHOSEN) },
  {
    id: "drawer-import", label: "Import a table…", keywords: "csv spreadsheet load stock list", menu: "Drawer", group: 4,
    perform: (c) => {
      show(c);
      void c.ui.ask("drawerImport", null);
    },
  },
  {
    id: "drawer-export", label: "Export the drawer as CSV", keywords: "table spreadsheet backup save lines", menu: "Drawer", group: 4, when: hasLines,
    perform: async (c) => {
      const { text, lines } = await c.drawer.host.call("drawer.export", { path: null, replace: false });
      download("drawer.csv", text ?? "", "text/csv");
      c.ui.notify(`Exported ${counted(lines, "line")} to drawer.csv.`);
    },
  },
  {
    id: "drawer-starter", label: "Fill an empty drawer with the starter", keywords: "example sample parts workshop", menu: "Drawer", group: 4,
    when: (c) => !hasLines(c) && c.drawer.store.getState().info !== null,
    perform: async (c) => {
      show(c);
      await c.drawer.starter();
    },
  },
];

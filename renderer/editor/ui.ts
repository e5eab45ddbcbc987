import { createStore, type StoreApi } from "zustand/vanilla";
import type { Fault } from "../../core/errors.ts";
import type { Project } from "../../core/model/project.ts";
import type { ViewId } from "../views.ts";

export type Theme = "paper" | "night";

/** Every dialog, with what it shows and what it answers. A dialog closed without an answer gives the `never mind` one. */
export interface Dialogs {
  readonly unsaved: { readonly ask: { readonly name: string }; readonly answer: "save" | "discard" | "cancel" };
  readonly open: { readonly ask: { readonly start: "projects" | "demos" }; readonly answer: string | null };
  readonly saveAs: { readonly ask: { readonly suggestedName: string }; readonly answer: { readonly path: string; readonly replace: boolean } | null };
  readonly replace: { readonly ask: { readonly path: string }; readonly answer: boolean };
  readonly changed: { readonly ask: { readonly path: string }; readonly answer: "replace" | "reload" | "saveAs" | "cancel" };
  readonly faults: { readonly ask: { readonly path: string; readonly faults: readonly Fault[] }; readonly answer: "open" | null };
  readonly failure: { readonly ask: { readonly title: string; readonly message: string; readonly advice: string }; readonly answer: null };
  readonly drawerAdd: { readonly ask: null; readonly answer: null };
  readonly drawerMove: { readonly ask: { readonly ids: readonly string[] }; readonly answer: null };
  readonly drawerImport: { readonly ask: null; readonly answer: null };
  readonly drawerBuild: { readonly ask: null; readonly answer: null };
  readonly commands: { readonly ask: null; readonly answer: null };
  readonly keys: { readonly ask: null; readonly answer: null };
  readonly about: { readonly ask: null; readonly answer: null };
}

export type DialogName = keyof Dialogs;

/** A dialog on the screen. */
export type Shown = {
  [D in DialogName]: { readonly key: number; readonly name: D; readonly ask: Dialogs[D]["ask"]; readonly close: (answer: Dialogs[D]["answer"]) => void };
}[DialogName];

export interface ContextMenuPlace {
  readonly clientX: number;
  readonly clientY: number;
  readonly target: string | null;
  /** Where on the frequency ruling it was opened, Hz. */
  readonly frequency: number | null;
}

/** What the board would be with other parts in it: the sheet shows it dotted. */
export interface GhostSource {
  /** What it is with, such as `6n2 C0G 1 %`. */
  readonly label: string;
  readonly change: (project: Project) => Project;
}

/** Work on the whole board that takes the panel's place until it is taken or given up; it steps aside for a block that is selected meanwhile. */
export type Task = "fill" | "match";

/** The pages of the equations: the selected block, the divider of a single supply, or what belongs to the board as a whole. */
export type EquationsPage = "block" | "reference" | "poles";

export interface UiState {
  readonly theme: Theme;
  readonly view: ViewId;
  readonly equationsPage: EquationsPage;
  /** Where numbers are put into equations, Hz; null for the place that the block itself suggests. */
  readonly equationsAt: number | null;
  readonly ghost: GhostSource | null;
  readonly task: Task | null;
  /** The selection beside which the task stays in the panel; another one brings its own panel up. */
  readonly taskBeside: readonly string[] | null;
  readonly isPanelOpen: boolean;
  readonly isPhaseShown: boolean;
  /** Where on the response the pointer or the keyboard's cursor stands, Hz. */
  readonly cursor: number | null;
  /** The last thing worth telling, in the status line. */
  readonly notice: { readonly key: number; readonly text: string; readonly isWarning: boolean } | null;
  readonly dialogs: readonly Shown[];
  readonly contextMenu: ContextMenuPlace | null;
  /** A file is being read or written. */
  readonly isBusy: boolean;
  /** False once the machine's side has gone: nothing can be saved any more. */
  readonly isConnected: boolean;
}

/** The state of the screen itself: nothing of it belongs to the document. */
export interface Ui {
  readonly store: StoreApi<UiState>;
  /** Shows a dialog and resolves with its answer. */
  ask<D extends DialogName>(name: D, ask: Dialogs[D]["ask"]): Promise<Dialogs[D]["answer"]>;
  notify(text: string, isWarning?: boolean): void;
  setTheme(theme: Theme): void;
  patch(change: Partial<Pick<UiState, "view" | "equationsPage" | "equationsAt" | "ghost" | "task" | "taskBeside" | "isPanelOpen" | "isPhaseShown" | "cursor" | "contextMenu" | "isBusy" | "isConnected">>): void;
}

/** A preference of this screen; nothing of the user's work is ever kept in the browser. */
const THEME_KEY = "bandwright-theme";

/** Builds the screen's state; follows the system's light or dark until the user picks. */
export function createUi(): Ui {
  const system = window.matchMedia("(prefers-color-scheme: dark)");
  const systemTheme = (): Theme => (system.matches ? "night" : "paper");
  const store = createStore<UiState>(() => ({
    theme: keptTheme() ?? systemTheme(),
    view: "board",
    equationsPage: "block",
    equationsAt: null,
    ghost: null,
    task: null,
    taskBeside: null,
    isPanelOpen: window.innerWidth >= 900,
    isPhaseShown: false,
    cursor: null,
    notice: null,
    dialogs: [],
    contextMenu: null,
    isBusy: false,
    isConnected: true,
  }));
  system.addEventListener("change", () => {
    if (keptTheme() === null) store.setState({ theme: systemTheme() });
  });
  let nextKey = 0;

  return {
    store,
    ask(name, ask) {
      return new Promise((resolve) => {
        const key = nextKey++;
        const close = (answer: Dialogs[typeof name]["answer"]): void => {
          store.setState((state) => ({ dialogs: state.dialogs.filter((dialog) => dialog.key !== key) }));
          resolve(answer);
        };
        // One of the union by construction: the name picks both question and answer.
        const shown = { key, name, ask, close } as unknown as Shown;
        store.setState((state) => ({ dialogs: [...state.dialogs, shown], contextMenu: null }));
      });
    },
    notify(text, isWarning = false) {
      store.setState({ notice: { key: nextKey++, text, isWarning } });
    },
    setTheme(theme) {
      try {
        // Back at the system's own choice, the screen follows it again.
        if (theme === systemTheme()) localStorage.removeItem(THEME_KEY);
        else localStorage.setItem(THEME_KEY, theme);
      } catch {
        // Storage may be off; the choice then lasts as long as the page.
      }
      store.setState({ theme });
    },
    patch(change) {
      store.setState(change);
    },
  };
}

function keptTheme(): Theme | null {
  try {
    const kept = localStorage.getItem(THEME_KEY);
    return kept === "paper" || kept === "night" ? kept : null;
  } catch {
    return null;
  }
}

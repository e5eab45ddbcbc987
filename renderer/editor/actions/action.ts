import type { Block } from "../../../core/model/project.ts";
import type { Drawer } from "../../drawer/drawer-store.ts";
import type { SheetHandle } from "../../sheet/sheet-props.ts";
import type { Files } from "../files.ts";
import type { Editor } from "../store.ts";
import type { Ui } from "../ui.ts";

export const MENUS = ["File", "Edit", "Bands", "Drawer", "View", "Help"] as const;
export type MenuName = (typeof MENUS)[number];

/** What actions work on. */
export interface ActionContext {
  readonly editor: Editor;
  readonly ui: Ui;
  readonly files: Files;
  readonly drawer: Drawer;
  /** Null until the sheet is drawn. */
  readonly sheet: () => SheetHandle | null;
  /** Whether a band's figures at an end of its slider mean nothing, as far as is known: the board oscillates there. */
  readonly isVoid: (id: string, end: "boost" | "cut") => boolean;
  /** Bands that were copied or cut last. */
  readonly clipboard: { bands: readonly Block[] };
  readonly isMac: boolean;
  /** A window of its own has the keys that a browser keeps for itself. */
  readonly isDesktop: boolean;
}

/** One thing that the screen can do. Menus, keys, the command list and the help are all made of these. */
export interface Action {
  readonly id: string;
  readonly label: string | ((c: ActionContext) => string);
  /** Further words by which the command list finds it. */
  readonly keywords: string;
  /** Null: only in the command list and the help. */
  readonly menu: MenuName | null;
  /** Entries of one menu with the same number stand together. */
  readonly group: number;
  /**
   * `Mod+Shift+Z`; Mod is Cmd on a Mac, else Ctrl. Chords without a modifier work only while the sheet has the focus, so
   * that nobody sets them off by speaking or typing elsewhere.
   */
  readonly chords?: readonly string[];
  /** Instead of `chords` in a browser tab, where the browser keeps some for itself. */
  readonly browserChords?: readonly string[];
  /** Works while a text field has the focus: `always`, or only while the text there is untouched. */
  readonly inFields?: "always" | "untouched";
  readonly when?: (c: ActionContext) => boolean;
  readonly perform: (c: ActionContext) => void | Promise<void>;
}

/** An action's words now. */
export function labelOf(action: Action, c: ActionContext): string {
  return typeof action.label === "string" ? action.label : action.label(c);
}

/** An action's chords in this kind of window. */
export function chordsOf(action: Action, c: Pick<ActionContext, "isDesktop">): readonly string[] {
  return (c.isDesktop ? undefined : action.browserChords) ?? action.chords ?? [];
}

/** Whether an action can be done now. */
export function isPossible(action: Action, c: ActionContext): boolean {
  return action.when?.(c) ?? true;
}

/** The selected blocks, in file order. */
export function selectedBlocks(c: ActionContext): Block[] {
  const { project, selection } = c.editor.store.getState();
  return project.blocks.filter((block) => selection.includes(block.id));
}

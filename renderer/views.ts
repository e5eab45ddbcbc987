/** A way to look at the board: a tab in the top line, an action, and a component in ViewArea.tsx. */
interface ViewRow {
  readonly id: string;
  readonly label: string;
  /** Words by which the command list finds it. */
  readonly keywords: string;
  readonly chord: string;
}

/** Every view, in the order of the tabs. */
export const VIEWS = [
  { id: "board", label: "Board", keywords: "sheet response drawing sliders view tab", chord: "Alt+Shift+B" },
  { id: "equations", label: "Equations", keywords: "laws formulas poles zeros loops margins account loss view tab", chord: "Alt+Shift+E" },
  { id: "drawer", label: "Drawer", keywords: "parts library stock lines resistors capacitors inventory view tab", chord: "Alt+Shift+D" },
] as const satisfies readonly ViewRow[];

export type ViewId = (typeof VIEWS)[number]["id"];

/** Id of a view's tab on the page. */
export function tabId(view: ViewId): string {
  return `tab-${view}`;
}

/** Id of what a view's tab shows. */
export function viewElementId(view: ViewId): string {
  return `view-${view}`;
}

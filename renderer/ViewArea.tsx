import type { ComponentType } from "react";
import { DrawerView } from "./drawer/DrawerView.tsx";
import { useUiState } from "./editor/hooks.ts";
import { EquationsArea } from "./equations/EquationsArea.tsx";
import { SheetArea } from "./panels/SheetArea.tsx";
import { tabId, viewElementId, VIEWS, type ViewId } from "./views.ts";

const COMPONENTS: Readonly<Record<ViewId, ComponentType>> = { board: SheetArea, equations: EquationsArea, drawer: DrawerView };

/** What the chosen tab shows. The board stays mounted behind the others, so that it keeps its zoom and place. */
export function ViewArea() {
  const shown = useUiState((s) => s.view);
  return VIEWS.filter(({ id }) => id === shown || id === "board").map(({ id }) => {
    const View = COMPONENTS[id];
    return (
      <div key={id} id={viewElementId(id)} className="view" role="tabpanel" aria-labelledby={tabId(id)} hidden={id !== shown}>
        <View />
      </div>
    );
  });
}

import { useMemo } from "react";
import { useEditorState, useShell, useUiState } from "../editor/hooks.ts";
import { UnstableBanner } from "../panels/Stability.tsx";
import { WiringFaults } from "../panels/WiringFaults.tsx";
import { BlockList } from "./BlockList.tsx";
import { BlockPage } from "./BlockPage.tsx";
import "./account.css";
import "./equations.css";
import { PolesPage } from "./PolesPage.tsx";
import "./roots.css";
import { shownBlock } from "./shown.ts";

/** The mathematics behind the board: each block's equations, and the poles, zeros and loops of the whole. */
export function EquationsArea() {
  const { editor, ui } = useShell().context;
  const { board, faults } = useEditorState((s) => s.analysis);
  const selection = useEditorState((s) => s.selection);
  const page = useUiState((s) => s.equationsPage);
  const shown = useMemo(() => (board ? shownBlock(board, selection, page) : null), [board, selection, page]);
  if (!board || shown === null) {
    return (
      <main className="equations is-empty" aria-label="Equations" tabIndex={-1}>
        <WiringFaults faults={faults} />
      </main>
    );
  }
  return (
    <main className="equations" aria-label="Equations" tabIndex={-1}>
      <BlockList
        board={board}
        shown={page === "poles" ? null : shown}
        onShow={(id) => {
          if (id === "poles" || id === "reference") ui.patch({ equationsPage: id });
          else {
            editor.select([id]);
            ui.patch({ equationsPage: "block" });
          }
        }}
      />
      {/* Pages scroll from their top, each anew. */}
      <div className="equations-page" key={page === "poles" ? "poles" : shown}>
        <UnstableBanner but={page === "poles" ? "" : "The design laws, which are sums on paper, still hold."} />
        {page === "poles" ? <PolesPage board={board} /> : <BlockPage board={board} id={shown} />}
      </div>
    </main>
  );
}

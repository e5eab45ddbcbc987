import { blockName } from "../../core/model/edit.ts";
import { isPossible } from "../editor/actions/action.ts";
import { actionById, run } from "../editor/actions/actions.ts";
import { FillPanel } from "../drawer/FillPanel.tsx";
import { LinePanel } from "../drawer/LinePanel.tsx";
import { MatchPanel } from "../drawer/MatchPanel.tsx";
import { useEditorState, useShell, useUiState } from "../editor/hooks.ts";
import { WarningSign } from "../panels/Stability.tsx";
import { useIsUnstable } from "../worker/hooks.ts";
import { BlockPanel } from "./BlockPanel.tsx";
import { ProjectPanel } from "./ProjectPanel.tsx";

/** Beside the drawer, the line in hand; beside the board, work on all of it, or what is selected. */
export function Panel() {
  const isDrawer = useUiState((s) => s.view === "drawer");
  const task = useUiState((s) => s.task);
  return (
    <aside className="panel" aria-label="Panel">
      {isDrawer ? <LinePanel /> : task === "fill" ? <FillPanel /> : task === "match" ? <MatchPanel /> : <SelectionPanel />}
    </aside>
  );
}

/** What is selected, in full: one block, several, or the project where nothing is. */
function SelectionPanel() {
  const project = useEditorState((s) => s.project);
  const selection = useEditorState((s) => s.selection);
  const blocks = project.blocks.filter((block) => selection.includes(block.id));
  const [only] = blocks;
  return (
    <>
      <VoidNote />
      {/* The key gives every block fresh fields: a draft typed for one never lands in another. */}
      {only === undefined ? <ProjectPanel /> : blocks.length === 1 ? <BlockPanel key={only.id} block={only} /> : <SeveralPanel names={blocks.map(blockName)} />}
    </>
  );
}

/** Says why the figures below are struck. */
function VoidNote() {
  const isUnstable = useIsUnstable();
  if (!isUnstable) return null;
  return (
    <p className="void-note">
      <WarningSign /> Unstable: the struck figures mean nothing.
    </p>
  );
}

const SEVERAL = ["centre-slider", "slider-boost", "slider-cut", "slider-up", "slider-down", "duplicate", "delete"];

function SeveralPanel({ names }: { readonly names: readonly string[] }) {
  const { context } = useShell();
  return (
    <>
      <header className="panel-head">
        <h2>{names.length} blocks</h2>
        <p className="quiet">{names.join(", ")}</p>
      </header>
      <div className="button-row">
        {SEVERAL.map(actionById)
          .filter((action) => isPossible(action, context))
          .map((action) => (
            <button key={action.id} type="button" className="button is-small" onClick={() => run(action, context)}>
              {typeof action.label === "string" ? action.label : action.label(context)}
            </button>
          ))}
      </div>
    </>
  );
}

import { Activity, type ComponentType, type MouseEvent } from "react";
import { blockName } from "../../core/model/edit.ts";
import { isPossible } from "../editor/actions/action.ts";
import { actionById, run } from "../editor/actions/actions.ts";
import { namesOf } from "../editor/actions/edit-actions.ts";
import type { Task } from "../editor/ui.ts";
import { FillPanel } from "../drawer/FillPanel.tsx";
import { LinePanel } from "../drawer/LinePanel.tsx";
import { MatchPanel } from "../drawer/MatchPanel.tsx";
import { useEditorState, useShell, useUiState } from "../editor/hooks.ts";
import { WarningSign } from "../panels/Stability.tsx";
import { useIsUnstable } from "../worker/hooks.ts";
import { BlockPanel } from "./BlockPanel.tsx";
import { ProjectPanel } from "./ProjectPanel.tsx";

const TASKS: Readonly<Record<Task, { readonly name: string; readonly Content: ComponentType }>> = {
  fill: { name: "Fill from the drawer", Content: FillPanel },
  match: { name: "Match measured pieces", Content: MatchPanel },
};

/**
 * Beside the drawer, the line in hand; beside the board, work on all of it, or what is selected. A block selected while
 * there is work on the board is what hands want to see: the work steps aside as it is, and a line leads back to it.
 */
export function Panel() {
  const isDrawer = useUiState((s) => s.view === "drawer");
  const task = useUiState((s) => s.task);
  const beside = useUiState((s) => s.taskBeside);
  const selection = useEditorState((s) => s.selection);
  const isAside = selection.length > 0 && selection !== beside;
  const shown = task && TASKS[task];
  return (
    <aside className="panel" aria-label="Panel" tabIndex={-1}>
      {isDrawer && <LinePanel />}
      {!isDrawer && shown && selection.length > 0 && <TaskBar name={shown.name} isAside={isAside} />}
      {!isDrawer && (!shown || isAside) && <SelectionPanel />}
      {shown && (
        // Hidden it keeps what was typed and found, and neither works nor draws.
        <Activity key={shown.name} mode={isDrawer || isAside ? "hidden" : "visible"}>
          <shown.Content />
        </Activity>
      )}
    </aside>
  );
}

/** Leads from the selected block to the work on the board that it put aside, and there again. */
function TaskBar({ name, isAside }: { readonly name: string; readonly isAside: boolean }) {
  const { context } = useShell();
  const { editor, ui } = context;
  const selected = useEditorState((s) => namesOf(s.project.blocks.filter((block) => s.selection.includes(block.id))));
  const turn = (event: MouseEvent<HTMLButtonElement>): void => {
    // The button goes: the panel keeps the keyboard.
    event.currentTarget.closest<HTMLElement>(".panel")?.focus();
    ui.patch({ taskBeside: isAside ? editor.store.getState().selection : null });
  };
  return (
    <div className="task-bar" role="group" aria-label={name}>
      <p>{isAside ? `${name} waits; nothing is changed yet.` : `Selected: ${selected}`}</p>
      <button type="button" className="button is-small" onClick={turn}>
        {isAside ? "Back to it" : "Show its values"}
      </button>
    </div>
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

import { useState } from "react";
import { BLOCKS } from "../../core/blocks/index.ts";
import { setField } from "../../core/model/edit.ts";
import { stagesOf } from "../../core/model/edit-bands.ts";
import type { Project } from "../../core/model/project.ts";
import { chordsOf, isPossible, labelOf } from "../editor/actions/action.ts";
import { actionById, run } from "../editor/actions/actions.ts";
import { chordText } from "../editor/actions/chords.ts";
import { useDrawerState } from "../drawer/hooks.ts";
import { useEditorState, useShell, useUiState } from "../editor/hooks.ts";
import { MenuBar } from "./MenuBar.tsx";
import { ViewTabs } from "./ViewTabs.tsx";

/** Name, size and state of the board; menus; the few things that hands reach for most. */
export function TopLine() {
  const name = useEditorState((s) => s.project.name);
  const size = useEditorState((s) => `${sizeText(s.project)} · ${supplyText(s.project)}`);
  const state = useEditorState((s) => (s.isDirty ? "edited" : s.file === null ? "not saved yet" : s.file.isWritable ? "saved" : s.file.isDemo ? "read-only demo" : "write-protected"));
  return (
    <header className="top-line">
      <div className="top-title">
        <NameField name={name} />
        <p className="subtitle" data-testid="subtitle" title={`${size} · ${state}`}>
          {size} · {state}
        </p>
      </div>
      <MenuBar />
      <ViewTabs />
      <div className="top-tools">
        <Tool id="undo" path="M7 5 3 9l4 4M3 9h7a4 4 0 0 1 0 8H7" text="" />
        <Tool id="redo" path="m11 5 4 4-4 4M15 9H8a4 4 0 0 0 0 8h3" text="" />
        <Tool id="commands" path="M8 3a5 5 0 1 0 0 10A5 5 0 0 0 8 3m4 9 4 4" text="Commands" />
        <ThemeTool />
        <PanelTool />
      </div>
    </header>
  );
}

/** `8 bands on 1 bus` */
export function sizeText(project: Project): string {
  const bands = project.blocks.filter((b) => BLOCKS[b.kind].place === "band").length;
  const buses = stagesOf(project).length;
  return `${bands} ${bands === 1 ? "band" : "bands"} on ${buses} ${buses === 1 ? "bus" : "buses"}`;
}

function supplyText({ supply }: Project): string {
  if (supply.kind === "single") return `${supply.voltage} V single`;
  return supply.positive === supply.negative ? `±${supply.positive} V` : `+${supply.positive} V / −${supply.negative} V`;
}

function NameField({ name }: { readonly name: string }) {
  const { context } = useShell();
  const [draft, setDraft] = useState<string | null>(null);
  const take = (): void => {
    const text = draft?.trim() ?? "";
    if (text !== "" && text !== name) context.editor.apply("rename the board", setField(context.editor.store.getState().project, "name", text));
    setDraft(null);
  };
  return (
    <input
      className="title-input"
      aria-label="Name of the board"
      value={draft ?? name}
      data-untouched={draft === null}
      onChange={(event) => setDraft(event.target.value)}
      onBlur={take}
      onKeyDown={(event) => {
        if (event.key === "Enter") event.currentTarget.blur();
        if (event.key === "Escape") {
          setDraft(null);
          event.preventDefault();
        }
      }}
    />
  );
}

interface ToolProps {
  readonly id: string;
  readonly path: string;
  /** Beside the sign where there is room. */
  readonly text: string;
  readonly isPressed?: boolean;
}

function Tool({ id, path, text, isPressed }: ToolProps) {
  const { context } = useShell();
  const action = actionById(id);
  // Followed so that Undo and Redo know when there is something to undo.
  useEditorState((s) => s.history);
  useDrawerState((s) => s.steps);
  useUiState((s) => s.view);
  const chord = chordsOf(action, context)[0];
  const label = labelOf(action, context);
  return (
    <button
      type="button"
      className="tool"
      aria-label={label}
      aria-pressed={isPressed}
      title={chord === undefined ? label : `${label} (${chordText(chord, context.isMac)})`}
      disabled={!isPossible(action, context)}
      // A click leaves the focus where the hands were working.
      onMouseDown={(event) => event.preventDefault()}
      onClick={() => run(action, context)}
    >
      <svg viewBox="0 0 18 20" aria-hidden="true">
        <path d={path} />
      </svg>
      {text !== "" && <span className="tool-text">{text}</span>}
    </button>
  );
}

function ThemeTool() {
  const theme = useUiState((s) => s.theme);
  return <Tool id="theme" text="" path={theme === "paper" ? "M14 12A6.5 6.5 0 1 1 7 3.5 5.2 5.2 0 0 0 14 12" : "M9 6.5a3.5 3.5 0 1 0 0 7 3.5 3.5 0 0 0 0-7M9 2v1.5M9 16.5V18M1.5 10H3M15 10h1.5M3.7 4.7l1 1M13.3 14.3l1 1M14.3 4.7l-1 1M4.7 14.3l-1 1"} />;
}

function PanelTool() {
  const isOpen = useUiState((s) => s.isPanelOpen);
  return <Tool id="panel" text="" isPressed={isOpen} path="M2 4h14v12H2zM11 4v12" />;
}

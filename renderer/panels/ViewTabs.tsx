import type { KeyboardEvent } from "react";
import { actionById, run } from "../editor/actions/actions.ts";
import { chordText } from "../editor/actions/chords.ts";
import { useShell, useUiState } from "../editor/hooks.ts";
import { tabId, viewElementId, VIEWS, type ViewId } from "../views.ts";

/** The views as tabs: one stop of the Tab key, arrows walk. */
export function ViewTabs() {
  const { context } = useShell();
  const shown = useUiState((s) => s.view);
  const show = (id: ViewId): void => run(actionById(`show-${id}`), context);
  const onKeyDown = (event: KeyboardEvent): void => {
    const at = VIEWS.findIndex(({ id }) => id === shown);
    const to = { ArrowLeft: at - 1, ArrowRight: at + 1, Home: 0, End: VIEWS.length - 1 }[event.key];
    if (to === undefined || event.ctrlKey || event.metaKey || event.altKey) return;
    event.preventDefault();
    const next = VIEWS[(to + VIEWS.length) % VIEWS.length].id;
    show(next);
    document.getElementById(tabId(next))?.focus();
  };
  return (
    <div className="view-tabs" role="tablist" aria-label="Views" tabIndex={-1} onKeyDown={onKeyDown}>
      {VIEWS.map(({ id, label, chord }) => (
        <button
          key={id}
          type="button"
          role="tab"
          id={tabId(id)}
          className="view-tab"
          aria-selected={id === shown}
          aria-controls={id === shown ? viewElementId(id) : undefined}
          tabIndex={id === shown ? 0 : -1}
          title={`${label} (${chordText(chord, context.isMac)})`}
          onClick={() => show(id)}
        >
          {label}
        </button>
      ))}
    </div>
  );
}

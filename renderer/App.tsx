import { useEffect } from "react";
import { actionById, actionForKey, run, type Focus } from "./editor/actions/actions.ts";
import { isPossible } from "./editor/actions/action.ts";
import { ShellProvider, useEditorState, useShell, useUiState, type Shell } from "./editor/hooks.ts";
import { DialogLayer } from "./dialogs/DialogLayer.tsx";
import { Panel } from "./inspector/Panel.tsx";
import { StatusLine } from "./panels/StatusLine.tsx";
import { TopLine } from "./panels/TopLine.tsx";
import { ViewArea } from "./ViewArea.tsx";
import type { ViewId } from "./views.ts";
import { useIsUnstable } from "./worker/hooks.ts";

interface AppProps {
  readonly shell: Shell;
}

/** The whole screen: top line, sheet, panel, status line, and whatever dialog is open. */
export function App({ shell }: AppProps) {
  return (
    <ShellProvider value={shell}>
      <Frame />
      <DialogLayer />
    </ShellProvider>
  );
}

function Frame() {
  const { context } = useShell();
  const isPanelOpen = useUiState((s) => s.isPanelOpen);
  const isConnected = useUiState((s) => s.isConnected);
  const isBusy = useUiState((s) => s.isBusy);
  const isUnstable = useIsUnstable();
  useKeys();
  useTitle();
  return (
    <div className="app" aria-busy={isBusy} data-unstable={isUnstable || undefined}>
      <TopLine />
      {!isConnected && (
        <div className="banner" role="alert">
          <p>The connection to Bandwright has ended, so nothing can be saved from here. Your board is still in this page.</p>
          <button type="button" className="button is-small" onClick={() => run(actionById("download"), context)}>
            Download a copy
          </button>
        </div>
      )}
      <div className={isPanelOpen ? "main has-panel" : "main"}>
        <ViewArea />
        {isPanelOpen && <Panel />}
      </div>
      <StatusLine />
    </div>
  );
}

/** One listener turns key presses into actions, by the same table that the menus are made of. */
function useKeys(): void {
  const { context } = useShell();
  useEffect(() => {
    const onKeyDown = (event: KeyboardEvent): void => {
      if (event.defaultPrevented || event.isComposing || context.ui.store.getState().dialogs.length > 0) return;
      const focus = focusOf(event.target, context.ui.store.getState().view);
      if (focus === null) return;
      const action = actionForKey(event, focus, context);
      if (!action) return;
      // Text that is marked on the screen is what Copy means then.
      if (action.id === "copy" && window.getSelection()?.isCollapsed === false) return;
      // Claimed even where it cannot be done now: the browser's own meaning of Ctrl+D or Ctrl+S would only startle.
      if (isPossible(action, context) || event.ctrlKey || event.metaKey) event.preventDefault();
      run(action, context);
    };
    window.addEventListener("keydown", onKeyDown);
    return () => window.removeEventListener("keydown", onKeyDown);
  }, [context]);
}

/** Null where keys belong to an open menu or list. */
function focusOf(target: EventTarget | null, view: ViewId): Focus | null {
  if (!(target instanceof Element)) return "elsewhere";
  const popup = target.closest("[role=menu], [role=menubar], [role=listbox], [role=dialog]");
  // One that is closing gives the focus back a frame later: the next key is no longer its own.
  if (popup) return popup.getAttribute("role") === "menubar" || popup.hasAttribute("data-closed") ? "elsewhere" : null;
  if (target instanceof HTMLTextAreaElement || (target instanceof HTMLInputElement && !["range", "radio", "checkbox"].includes(target.type))) {
    return target.dataset.untouched === "true" ? "untouched-field" : "field";
  }
  const isSheet = view === "board" && (target === document.body || target.closest(".sheet-area") !== null);
  return isSheet ? "sheet" : "elsewhere";
}

function useTitle(): void {
  const name = useEditorState((s) => s.project.name);
  const isDirty = useEditorState((s) => s.isDirty);
  useEffect(() => {
    document.title = `${isDirty ? "• " : ""}${name} – Bandwright`;
  }, [name, isDirty]);
}

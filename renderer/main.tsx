import "@fontsource/ibm-plex-sans/400.css";
import "@fontsource/ibm-plex-sans/600.css";
import "./styles/theme.css";
import "./styles/base.css";
import "./styles/menus.css";
import "./styles/shell.css";
import "./styles/stability.css";
import "./styles/panel.css";
import "./styles/dialogs.css";
import { CSPProvider } from "@base-ui/react/csp-provider";
import { StrictMode } from "react";
import { createRoot } from "react-dom/client";
import { newProject } from "../core/model/new-project.ts";
import { ErrorBoundary } from "./ErrorBoundary.tsx";
import { createEditor } from "./editor/store.ts";
import { createUi } from "./editor/ui.ts";
import { Start } from "./Start.tsx";
import { applyTheme } from "./theme.ts";

/** The document and the screen's state live outside React: whatever happens to a component, they stay. */
const editor = createEditor(newProject());
const ui = createUi();

applyTheme(ui.store.getState().theme);
ui.store.subscribe((state) => applyTheme(state.theme));

window.addEventListener("beforeunload", (event) => {
  if (editor.store.getState().isDirty) event.preventDefault();
});

createRoot(document.getElementById("root")!).render(
  <StrictMode>
    <CSPProvider disableStyleElements>
      <ErrorBoundary editor={editor}>
        <Start editor={editor} ui={ui} />
      </ErrorBoundary>
    </CSPProvider>
  </StrictMode>,
);

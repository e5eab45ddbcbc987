import { Component, type ErrorInfo, type ReactNode } from "react";
import { serializeProject } from "../core/model/serialize.ts";
import { download } from "./editor/actions/file-actions.ts";
import { suggestName } from "./editor/files.ts";
import type { Editor } from "./editor/store.ts";
import { connectedHost } from "./Start.tsx";

interface Props {
  readonly editor: Editor;
  readonly children: ReactNode;
}

interface State {
  readonly error: Error | null;
  readonly name: string;
  readonly outcome: string | null;
}

/** The last line: the screen failed, and the document did not. It can be saved from here, and the screen tried again. */
export class ErrorBoundary extends Component<Props, State> {
  override state: State = { error: null, name: "", outcome: null };

  static getDerivedStateFromError(error: unknown): Partial<State> {
    return { error: error instanceof Error ? error : new Error(String(error)) };
  }

  override componentDidCatch(error: Error, info: ErrorInfo): void {
    console.error(error, info.componentStack);
    this.props.editor.commit();
    this.setState({ name: `${suggestName(this.props.editor.store.getState().project.name)} (rescued)` });
  }

  readonly #save = async (): Promise<void> => {
    const { project } = this.props.editor.store.getState();
    try {
      const host = connectedHost();
      if (host === null) throw new Error("There is no connection to Bandwright.");
      const { folder } = await host.call("files.list", { folder: null });
      const separator = folder.includes("\\") ? "\\" : "/";
      const { path } = await host.call("project.save", { path: `${folder}${separator}${suggestName(this.state.name)}`, project, fingerprint: null, replace: false });
      this.setState({ outcome: `Saved to ${path}.` });
    } catch (error) {
      this.setState({ outcome: `Not saved. ${error instanceof Error ? error.message : String(error)}` });
    }
  };

  override render(): ReactNode {
    const { error, name, outcome } = this.state;
    if (error === null) return this.props.children;
    return (
      <main className="start" role="alert">
        <div className="start-card">
          <h1>The screen failed. Your board is safe.</h1>
          <p>Something in the display went wrong; the board itself is untouched. Save it as a copy before anything else, then try the screen again.</p>
          <label className="field-block">
            <span>Save as, in your projects folder</span>
            <input className="text-input" value={name} onChange={(event) => this.setState({ name: event.target.value })} />
          </label>
          <div className="button-row">
            <button type="button" className="button is-primary" onClick={() => void this.#save()}>
              Save as
            </button>
            <button type="button" className="button" onClick={() => download(`${suggestName(name)}.bandwright`, serializeProject(this.props.editor.store.getState().project))}>
              Download a copy
            </button>
            <button type="button" className="button" onClick={() => this.setState({ error: null, outcome: null })}>
              Try the screen again
            </button>
          </div>
          {outcome !== null && <p role="status">{outcome}</p>}
          <p className="quiet">For a report: {error.message}</p>
        </div>
      </main>
    );
  }
}

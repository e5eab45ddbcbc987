import { useEffect, useState } from "react";
import { App } from "./App.tsx";
import { createDrawer } from "./drawer/drawer-store.ts";
import type { ActionContext } from "./editor/actions/action.ts";
import { createFiles } from "./editor/files.ts";
import type { Editor } from "./editor/store.ts";
import { tellSteps } from "./editor/told.ts";
import type { Ui } from "./editor/ui.ts";
import type { Shell } from "./editor/hooks.ts";
import type { HostClient } from "./host/client.ts";
import { connectHost, ConnectError } from "./host/connect.ts";
import type { SheetHandle } from "./sheet/sheet-props.ts";
import { createAnalyst } from "./worker/analyst.ts";

interface StartProps {
  readonly editor: Editor;
  readonly ui: Ui;
}

type Phase = { readonly name: "connecting" } | { readonly name: "refused"; readonly message: string } | { readonly name: "ready"; readonly shell: Shell };

let host: HostClient | null = null;

/** The connection, for whoever has to save while the screen is down; null before there is one. */
export function connectedHost(): HostClient | null {
  return host;
}

/** The address' code works once, so that a page connects once, however often React mounts it. */
let starting: Promise<Shell> | undefined;

async function start(editor: Editor, ui: Ui): Promise<Shell> {
  host = await connectHost();
  host.onClose(() => ui.patch({ isConnected: false }));
  const capabilities = await host.call("host.capabilities");
  const files = createFiles(host, editor, ui, capabilities.fileDialogs === "native");
  host.on("project.openRequested", ({ path }) => void files.openPath(path));
  const sheetRef: { current: SheetHandle | null } = { current: null };
  await files.launch();
  tellSteps(editor, ui);
  const analyst = createAnalyst(editor, () => new Worker(new URL("./worker/worker.ts", import.meta.url), { type: "module" }));
  const context: ActionContext = {
    editor,
    ui,
    files,
    drawer: createDrawer(host, ui),
    sheet: () => sheetRef.current,
    isVoid: (id, end) => {
      const { stability, ends } = analyst.store.getState();
      return (stability?.value.unstable.length ?? 0) > 0 || (ends?.value.some((unstable) => unstable.id === id && unstable.end === end) ?? false);
    },
    clipboard: { bands: [] },
    isMac: capabilities.platform === "darwin",
    isDesktop: capabilities.fileDialogs === "native",
  };
  return { context, sheetRef, host, analyst, version: capabilities.version };
}

/** Connects, opens what the session was started with, and shows the screen; or says why not. */
export function Start({ editor, ui }: StartProps) {
  const [phase, setPhase] = useState<Phase>({ name: "connecting" });

  useEffect(() => {
    let isCurrent = true;
    starting ??= start(editor, ui);
    starting.then(
      (shell) => isCurrent && setPhase({ name: "ready", shell }),
      (error: unknown) => {
        if (!isCurrent) return;
        const message = error instanceof ConnectError ? error.message : `Bandwright does not answer. ${error instanceof Error ? error.message : String(error)}`;
        setPhase({ name: "refused", message });
      },
    );
    return () => {
      isCurrent = false;
    };
  }, [editor, ui]);

  if (phase.name === "ready") return <App shell={phase.shell} />;
  if (phase.name === "refused") {
    return (
      <main className="start" role="alert">
        <div className="start-card">
          <h1>Not connected</h1>
          <p>{phase.message}</p>
          <p className="quiet">No file was opened or changed.</p>
        </div>
      </main>
    );
  }
  return (
    <main className="start" aria-busy="true">
      <div className="start-card is-loading">
        <svg className="start-curve" viewBox="0 0 240 60" aria-hidden="true">
          <path d="M0 30H240" className="start-rule" />
          <path d="M0 30C60 30 70 8 100 8S140 50 170 50 200 30 240 30" className="start-ink" />
        </svg>
        <p role="status">Opening the board…</p>
      </div>
    </main>
  );
}

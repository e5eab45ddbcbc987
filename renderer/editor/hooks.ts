import { createContext, useContext } from "react";
import { useStore } from "zustand";
import type { HostClient } from "../host/client.ts";
import type { SheetHandle } from "../sheet/sheet-props.ts";
import type { Analyst } from "../worker/analyst.ts";
import type { ActionContext } from "./actions/action.ts";
import type { EditorState } from "./store.ts";
import type { UiState } from "./ui.ts";

/** What the screen is built on once there is a machine behind it. */
export interface Shell {
  readonly context: ActionContext;
  readonly sheetRef: { current: SheetHandle | null };
  readonly host: HostClient;
  readonly analyst: Analyst;
  readonly version: string;
}

const ShellContext = createContext<Shell | null>(null);

/** Hands the shell to every component below. */
export const ShellProvider = ShellContext.Provider;

/** The shell around this component. */
export function useShell(): Shell {
  const shell = useContext(ShellContext);
  if (!shell) throw new Error("this component stands outside the shell");
  return shell;
}

/** A piece of the document's state, followed. */
export function useEditorState<T>(select: (state: EditorState) => T): T {
  return useStore(useShell().context.editor.store, select);
}

/** A piece of the screen's state, followed. */
export function useUiState<T>(select: (state: UiState) => T): T {
  return useStore(useShell().context.ui.store, select);
}

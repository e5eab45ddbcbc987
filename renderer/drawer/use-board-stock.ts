import { useEffect, useState } from "react";
import type { Board } from "../../core/net/board.ts";
import { useEditorState } from "../editor/hooks.ts";
import { isSameModel } from "../editor/results.ts";
import type { HostClient } from "../host/client.ts";
import { reasonOf } from "./drawer-store.ts";
import { useDrawer } from "./hooks.ts";

export interface BoardStock<T> {
  /** The board with what the drawer has for it; null until both are there. */
  readonly found: { readonly board: Board; readonly stock: T } | null;
  readonly problem: string | null;
}

/** What the drawer has for the open board, asked for again when either changes; a knob that moves changes nothing about it. */
export function useBoardStock<T>(ask: (host: HostClient, board: Board) => Promise<T>): BoardStock<T> {
  const drawer = useDrawer();
  const board = useEditorState((s) => s.analysis.board);
  const isMoving = useEditorState((s) => s.gesture !== null);
  const [state, setState] = useState<BoardStock<T>>({ found: null, problem: null });
  useEffect(() => drawer.open(), [drawer]);
  useEffect(() => {
    if (!board || isMoving) return undefined;
    let isCurrent = true;
    const read = (): void => {
      ask(drawer.host, board).then(
        (stock) => isCurrent && setState({ found: { board, stock }, problem: null }),
        (error: unknown) => isCurrent && setState({ found: null, problem: reasonOf(error) }),
      );
    };
    read();
    const stop = drawer.host.on("drawer.changed", read);
    return () => {
      isCurrent = false;
      stop();
    };
  }, [drawer, board, isMoving, ask]);
  return board ? state : { found: null, problem: "The board has wiring faults: mend them first." };
}

/** How far what was worked out for a board still holds for the open one: work that stood aside comes back with what it had. */
export function useBoardAge(board: Board | null): { readonly isStale: boolean; readonly isOtherModel: boolean } {
  const project = useEditorState((s) => s.project);
  return { isStale: board?.project !== project, isOtherModel: board === null || !isSameModel(board.project, project) };
}

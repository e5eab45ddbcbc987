import { useEffect, useState } from "react";
import { boardRoles, type BoardRole } from "../../core/drawer/roles.ts";
import { rankSwaps, type Swap } from "../../core/drawer/swap.ts";
import type { Board } from "../../core/net/board.ts";
import { useEditorState } from "../editor/hooks.ts";
import { reasonOf } from "./drawer-store.ts";
import { useDrawer } from "./hooks.ts";
import { linesForRole } from "./stock-query.ts";

/** How long hands have to rest before the drawer is searched, ms. */
const REST = 160;
/** A list of more would not be read. */
const MOST = 24;

export interface SwapState {
  readonly swap: Swap | null;
  /** The list is that of the board as it was a moment ago. */
  readonly isStale: boolean;
  readonly problem: string | null;
}

/** The roles of one block that the drawer can have parts for. */
export function rolesOf(board: Board | null, block: string): readonly BoardRole[] {
  return board ? boardRoles(board).filter((role) => role.block === block) : [];
}

/** Candidates for a role, ranked on the board as it is; followed as board and drawer change. */
export function useSwap(role: BoardRole | undefined, withPairs: boolean): SwapState {
  const drawer = useDrawer();
  const board = useEditorState((s) => s.analysis.board);
  const isMoving = useEditorState((s) => s.gesture !== null);
  const [state, setState] = useState<{ readonly swap: Swap | null; readonly board: Board | null; readonly problem: string | null }>({ swap: null, board: null, problem: null });
  const name = role?.name;

  useEffect(() => {
    if (!board || name === undefined || isMoving) return undefined;
    let isCurrent = true;
    const search = async (): Promise<void> => {
      try {
        const own = boardRoles(board).find((one) => one.name === name);
        if (!own) return;
        const lines = await linesForRole(drawer.host, board, own, withPairs);
        if (isCurrent) setState({ swap: rankSwaps(board, own, lines, { pairs: withPairs, most: MOST }), board, problem: null });
      } catch (error) {
        if (isCurrent) setState({ swap: null, board, problem: reasonOf(error) });
      }
    };
    const timer = setTimeout(() => void search(), REST);
    const stop = drawer.host.on("drawer.changed", () => void search());
    return () => {
      isCurrent = false;
      clearTimeout(timer);
      stop();
    };
  }, [drawer, board, name, withPairs, isMoving]);

  const isOwn = state.swap === null || state.swap.role.name === name;
  return { swap: isOwn ? state.swap : null, isStale: state.board !== board, problem: state.problem };
}

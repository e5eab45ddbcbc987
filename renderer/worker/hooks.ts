import { useEffect } from "react";
import { useStore } from "zustand";
import { useEditorState, useShell } from "../editor/hooks.ts";
import { isSameModel } from "../editor/results.ts";
import { isSameCircuit } from "./analyst.ts";
import type { Account, Ends, Stability } from "./protocol.ts";

/** A slow result as it may be shown: `value` is of an earlier document while `isCurrent` is false. */
export interface Slow<T> {
  readonly value: T | null;
  readonly isCurrent: boolean;
  /** Why there is none for the document as it is now. */
  readonly failure: string | null;
}

const GONE = "The part of Bandwright that computes this does not answer. Save your board and start Bandwright again.";

/** Poles, zeros and loops of the open document. */
export function useStability(): Slow<Stability> {
  const { analyst } = useShell();
  const project = useEditorState((s) => s.project);
  const hasBoard = useEditorState((s) => s.analysis.board !== null);
  const { stability, stabilityFailure, isGone } = useStore(analyst.store);
  if (!hasBoard) return { value: null, isCurrent: false, failure: null };
  const isCurrent = stability !== null && isSameCircuit(stability.project, project);
  const failed = stabilityFailure !== null && isSameCircuit(stabilityFailure.project, project) ? stabilityFailure.message : null;
  return { value: stability?.value ?? null, isCurrent, failure: isCurrent ? null : (failed ?? (isGone ? GONE : null)) };
}

/** Whether the board oscillates, as far as is known: an older answer counts until the next is there. */
export function useIsUnstable(): boolean {
  const { analyst } = useShell();
  const hasBoard = useEditorState((s) => s.analysis.board !== null);
  return useStore(analyst.store, (s) => (s.stability?.value.unstable.length ?? 0) > 0) && hasBoard;
}

const NO_ENDS: Ends = [];

/** The slider ends at which the board oscillates, other sliders centred; an older answer counts until the next is there. */
export function useUnstableEnds(): Ends {
  const { analyst } = useShell();
  const hasBoard = useEditorState((s) => s.analysis.board !== null);
  const ends = useStore(analyst.store, (s) => s.ends?.value ?? NO_ENDS);
  return hasBoard ? ends : NO_ENDS;
}

/** The loss account of one band, asked for while the component is on the screen. */
export function useAccount(id: string | null): Slow<Account> {
  const { analyst } = useShell();
  const project = useEditorState((s) => s.project);
  const { account, accountFailure, isGone } = useStore(analyst.store);
  useEffect(() => {
    analyst.watchAccount(id);
    return () => analyst.watchAccount(null);
  }, [analyst, id]);
  const mine = account?.value.id === id ? account : null;
  const isCurrent = mine !== null && isSameModel(mine.project, project);
  const failed = accountFailure !== null && isSameModel(accountFailure.project, project) ? accountFailure.message : null;
  return { value: mine?.value ?? null, isCurrent, failure: isCurrent ? null : (failed ?? (isGone ? GONE : null)) };
}

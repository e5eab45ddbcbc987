import { createStore, type StoreApi } from "zustand/vanilla";
import type { Box } from "../../core/geometry/units.ts";

/** What follows the pointer: kept out of the component tree, so that a move of the mouse redraws one layer only. */
export interface Overlay {
  /** Hz, where the cursor stands. */
  readonly cursor: number | null;
  readonly marquee: Box | null;
}

export type OverlayStore = StoreApi<Overlay>;

export function createOverlay(): OverlayStore {
  return createStore<Overlay>(() => ({ cursor: null, marquee: null }));
}

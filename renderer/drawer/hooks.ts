import { useStore } from "zustand";
import { useShell } from "../editor/hooks.ts";
import type { Drawer, DrawerState } from "./drawer-store.ts";

/** The drawer around this component. */
export function useDrawer(): Drawer {
  return useShell().context.drawer;
}

/** A piece of the drawer's state, followed. */
export function useDrawerState<T>(select: (state: DrawerState) => T): T {
  return useStore(useDrawer().store, select);
}

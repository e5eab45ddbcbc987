import type { DrawerLine } from "../../core/contract/drawer-schemas.ts";

/** The lines that are chosen: some by id, or every line that fits the filter but for some. */
export type Chosen = { readonly mode: "some"; readonly ids: ReadonlySet<string> } | { readonly mode: "all"; readonly except: ReadonlySet<string> };

export const NOTHING_CHOSEN: Chosen = { mode: "some", ids: new Set() };
export const ALL_CHOSEN: Chosen = { mode: "all", except: new Set() };

export function isChosen(chosen: Chosen, id: string): boolean {
  return chosen.mode === "some" ? chosen.ids.has(id) : !chosen.except.has(id);
}

/** How many are chosen of a list of so many. */
export function chosenCount(chosen: Chosen, total: number): number {
  return chosen.mode === "some" ? chosen.ids.size : Math.max(0, total - chosen.except.size);
}

/** Adds lines to what is chosen, or takes them out. */
export function withLines(chosen: Chosen, ids: Iterable<string>, isIn: boolean): Chosen {
  const adds = (chosen.mode === "some") === isIn;
  const set = new Set(chosen.mode === "some" ? chosen.ids : chosen.except);
  for (const id of ids) {
    if (adds) set.add(id);
    else set.delete(id);
  }
  return chosen.mode === "some" ? { mode: "some", ids: set } : { mode: "all", except: set };
}

/** Turns one line over. */
export function toggled(chosen: Chosen, id: string): Chosen {
  return withLines(chosen, [id], !isChosen(chosen, id));
}

/** The ids that are chosen; `fetch` gives the list a part at a time. */
export async function chosenIds(chosen: Chosen, fetch: (offset: number, limit: number) => Promise<{ readonly total: number; readonly lines: readonly Pick<DrawerLine, "id">[] }>): Promise<string[]> {
  if (chosen.mode === "some") return [...chosen.ids];
  const ids: string[] = [];
  for (let offset = 0; ; offset += 1000) {
    const { total, lines } = await fetch(offset, 1000);
    for (const { id } of lines) if (!chosen.except.has(id)) ids.push(id);
    if (lines.length === 0 || offset + 1000 >= total) return ids;
  }
}

import type { Block, Project, Wire } from "./project.ts";

/** A row of a list, with its place in that list. */
export interface Row<T> {
  readonly index: number;
  readonly value: T;
}

/** What a key of the project's own holds; undefined where it is absent. */
export interface Entry {
  readonly value: unknown;
}

/**
 * One row that came, went or changed. `before.index` counts in the old list, `after.index` in the new one; null where
 * the row is not there. Swapping the two turns the change round.
 */
export type Change =
  | { readonly table: "blocks"; readonly id: string; readonly before: Row<Block> | null; readonly after: Row<Block> | null }
  | { readonly table: "wires"; readonly id: string; readonly before: Row<Wire> | null; readonly after: Row<Wire> | null }
  | { readonly table: "project"; readonly id: string; readonly before: Entry | null; readonly after: Entry | null };

/** An edit as data. Empty where nothing changed. */
export type Patch = readonly Change[];

/** What has to change to get from one document to another. Rows count as the same where they are the same object. */
export function patchBetween(before: Project, after: Project): Patch {
  return [
    ...rowChanges(before.blocks, after.blocks).map(([b, a]): Change => ({ table: "blocks", id: (b ?? a)!.value.id, before: b, after: a })),
    ...rowChanges(before.wires, after.wires).map(([b, a]): Change => ({ table: "wires", id: wireId((b ?? a)!.value), before: b, after: a })),
    ...fieldChanges(before, after),
  ];
}

/** Applies a patch to the document that it was made for. */
export function applyPatch(project: Project, patch: Patch): Project {
  if (patch.length === 0) return project;
  const fields: Record<string, unknown> = { ...project };
  const blocks: [Row<Block> | null, Row<Block> | null][] = [];
  const wires: [Row<Wire> | null, Row<Wire> | null][] = [];
  for (const change of patch) {
    if (change.table === "blocks") blocks.push([change.before, change.after]);
    else if (change.table === "wires") wires.push([change.before, change.after]);
    else if (change.after === null) delete fields[change.id];
    else fields[change.id] = change.after.value;
  }
  if (blocks.length > 0) fields.blocks = withRows(project.blocks, blocks);
  if (wires.length > 0) fields.wires = withRows(project.wires, wires);
  // The fields are those of a project, and only their contents were exchanged.
  return fields as unknown as Project;
}

/** The patch that takes back what a patch did. */
export function invertPatch(patch: Patch): Patch {
  return patch.map((change) => ({ ...change, before: change.after, after: change.before }) as Change);
}

/** Whether two documents hold the same, whatever the order of their keys. */
export function isSameContent(a: unknown, b: unknown): boolean {
  if (Object.is(a, b)) return true;
  if (typeof a !== "object" || typeof b !== "object" || a === null || b === null) return false;
  if (Array.isArray(a) !== Array.isArray(b)) return false;
  const keys = Object.keys(a);
  if (keys.length !== Object.keys(b).length) return false;
  return keys.every((key) => Object.hasOwn(b, key) && isSameContent((a as Record<string, unknown>)[key], (b as Record<string, unknown>)[key]));
}

function wireId(wire: Wire): string {
  return `${wire.from} ${wire.to}`;
}

/** Pairs of old and new rows, in the order of the lists; a row that stayed is in no pair. */
function rowChanges<T>(before: readonly T[], after: readonly T[]): [Row<T> | null, Row<T> | null][] {
  if (before === after) return [];
  const old = new Set(before);
  const fresh = new Set(after);
  const pairs: [Row<T> | null, Row<T> | null][] = [];
  let i = 0;
  let j = 0;
  while (i < before.length || j < after.length) {
    if (i < before.length && j < after.length && before[i] === after[j]) {
      i++;
      j++;
      continue;
    }
    const isGone = i < before.length && !fresh.has(before[i]);
    const isNew = j < after.length && !old.has(after[j]);
    // Neither: rows changed places, and each is taken out and put in again.
    const takesOut = i < before.length && (isGone || !isNew);
    const putsIn = j < after.length && (isNew || !isGone);
    pairs.push([takesOut ? { index: i, value: before[i] } : null, putsIn ? { index: j, value: after[j] } : null]);
    if (takesOut) i++;
    if (putsIn) j++;
  }
  return pairs;
}

function withRows<T>(rows: readonly T[], pairs: readonly [Row<T> | null, Row<T> | null][]): T[] {
  const out = new Set(pairs.flatMap(([before]) => (before ? [before.index] : [])));
  const result = rows.filter((_, index) => !out.has(index));
  const incoming = pairs.flatMap(([, after]) => (after ? [after] : [])).sort((a, b) => a.index - b.index);
  for (const row of incoming) result.splice(row.index, 0, row.value);
  return result;
}

function entry(fields: Record<string, unknown>, key: string): Entry | null {
  return Object.hasOwn(fields, key) ? { value: fields[key] } : null;
}

function fieldChanges(before: Project, after: Project): Change[] {
  const old = before as unknown as Record<string, unknown>;
  const fresh = after as unknown as Record<string, unknown>;
  return [...new Set([...Object.keys(old), ...Object.keys(fresh)])]
    .filter((key) => key !== "blocks" && key !== "wires" && old[key] !== fresh[key])
    .map((key) => ({ table: "project", id: key, before: entry(old, key), after: entry(fresh, key) }));
}

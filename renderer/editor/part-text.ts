import { BLOCKS } from "../../core/blocks/index.ts";
import type { BlockKind } from "../../core/blocks/kinds.ts";
import { nextPreferred, type ESeries } from "../../core/e-series.ts";
import { blockName, setPartValue, TRACK } from "../../core/model/edit.ts";
import type { Block } from "../../core/model/project.ts";
import { parseValue, type Quantity } from "../../core/units.ts";
import type { Editor } from "./store.ts";

/** A number that a field takes, or what is wrong with it. */
export type Taken = { readonly ok: true; readonly value: number } | { readonly ok: false; readonly message: string };

/** What a part's value is measured in; undefined where the block has no such role. */
export function quantityOf(block: Block, role: string): Quantity | undefined {
  if (role === TRACK) return block.slider ? "resistance" : undefined;
  return BLOCKS[block.kind].roles.find((r) => r.role === role)?.quantity;
}

/** What a role is called on the screen. */
export function roleLabel(kind: BlockKind, role: string): string {
  return role === TRACK ? "track" : (BLOCKS[kind].roles.find((r) => r.role === role)?.label ?? role);
}

/** Reads a part's value: above 0. */
export function readPositive(text: string, quantity: Quantity): Taken {
  const read = parseValue(text, quantity);
  if (!read.ok) return read;
  return read.value > 0 ? read : { ok: false, message: "must be above 0" };
}

/** Reads a resistance or capacitance that may be nothing. */
export function readAtLeastZero(text: string, quantity: Quantity): Taken {
  const read = parseValue(text, quantity);
  if (!read.ok) return read;
  return read.value >= 0 ? read : { ok: false, message: "must be 0 or more" };
}

/** Reads a tolerance; a bare number means percent, as everybody writes it. */
export function readTolerance(text: string): Taken {
  const read = parseValue(/%/.test(text) ? text : `${text.trim()}%`, "ratio");
  if (!read.ok) return { ok: false, message: "expected a tolerance such as 5 %" };
  return read.value >= 0 && read.value < 1 ? read : { ok: false, message: "must be from 0 % to under 100 %" };
}

/** Takes a part's value typed on the sheet or in the panel, as one step; returns what is wrong, or null. */
export function editPartText(editor: Editor, id: string, role: string, text: string): string | null {
  const { project } = editor.store.getState();
  const block = project.blocks.find((b) => b.id === id);
  const quantity = block && quantityOf(block, role);
  if (!block || !quantity) return "there is no such part";
  const read = readPositive(text, quantity);
  if (!read.ok) return read.message;
  editor.apply(`set ${roleLabel(block.kind, role)} of “${blockName(block)}”`, setPartValue(project, id, role, read.value));
  return null;
}

/** The series in which a value steps: what shops stock of each. */
function seriesFor(quantity: Quantity): ESeries {
  return quantity === "resistance" ? 24 : 12;
}

/** The next preferred value of a part, for the arrow keys. */
export function stepPreferred(value: number, quantity: Quantity, direction: 1 | -1): number {
  return nextPreferred(value, seriesFor(quantity), direction);
}


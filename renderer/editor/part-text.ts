import { BLOCKS } from "../../core/blocks/index.ts";
import { impracticalText } from "../../core/blocks/practical.ts";
import type { BlockKind } from "../../core/blocks/kinds.ts";
import { nextPreferred, type ESeries } from "../../core/e-series.ts";
import { blockName, setPartValue, TRACK } from "../../core/model/edit.ts";
import type { Block, Part } from "../../core/model/project.ts";
import { editText, formatCode, formatValue, parseValue, type Quantity } from "../../core/units.ts";
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

/** Digits of a value at rest: more than parts are made to, few enough to be read whole. */
const REST_DIGITS = 4;

/** A part's value as it stands in a field that nobody edits: `4.7 kΩ`. */
export function partText(value: number, quantity: Quantity): string {
  return formatValue(value, quantity, { significant: REST_DIGITS });
}

/** What is edited: every digit, but for the value of two pieces, which nobody ever set. */
export function partEditText(part: Part, quantity: Quantity): string {
  return editText(part.second ? Number(part.value.toPrecision(REST_DIGITS)) : part.value, quantity);
}

/** Two pieces that make one value, as people write them: `4k7 + 220R in series`, `10n ∥ 2n2 in parallel`; null for one piece. */
export function piecesText({ second }: Part, quantity: Quantity): string | null {
  if (!second || (quantity !== "resistance" && quantity !== "capacitance" && quantity !== "inductance")) return null;
  const [first, other] = [second.firstValue, second.value].map((value) => formatCode(value, quantity));
  return `${first} ${second.joined === "series" ? "+" : "∥"} ${other} in ${second.joined}`;
}

/** What is to be weighed about a part's value, for below its field; null where there is nothing. */
export function valueCaution(value: number, role: string, quantity: Quantity): string | null {
  const text = impracticalText(value, role, quantity);
  return text === null ? null : `${partText(value, quantity)} is ${text}. Is it meant?`;
}

/** What stands below the value of two pieces; null for one piece. */
export function piecesNote(part: Part, quantity: Quantity): string | null {
  const pieces = piecesText(part, quantity);
  return pieces === null ? null : `${pieces} · typing replaces both`;
}

/** The series in which a value steps: what shops stock of each. */
function seriesFor(quantity: Quantity): ESeries {
  return quantity === "resistance" ? 24 : 12;
}

/** The next preferred value of a part, for the arrow keys. */
export function stepPreferred(value: number, quantity: Quantity, direction: 1 | -1): number {
  return nextPreferred(value, seriesFor(quantity), direction);
}


import { BLOCKS } from "../blocks/index.ts";
import { bareOf, blockName, TRACK } from "../model/edit.ts";
import { BUILT_IN_OP_AMPS, IDEAL } from "../model/op-amps.ts";
import { patchBetween, type Patch } from "../model/patch.ts";
import { partsOf, type Block, type Part, type Project, type SliderLaw, type SupplyReference } from "../model/project.ts";
import type { Board } from "../net/board.ts";
import type { StockKind } from "./stock.ts";

/** What stands for the single supply's divider among block ids, which are never empty; its parts are named `reference.upperR` and so on. */
export const DIVIDER = "";

/** A place for a part on a board, with the part in it. */
export interface BoardRole {
  /** `block.role`, such as `b1k.seriesC`; a track is `b1k.slider`, an op amp `b1k.opAmp`. */
  readonly name: string;
  /** Block id; empty for the single supply's divider. */
  readonly block: string;
  readonly role: string;
  /** In words, such as “1 kHz: series C”. */
  readonly label: string;
  readonly kind: StockKind;
  /** Which bands a part here can move: its own for a part of a band, else all. */
  readonly band: string | null;
  /** SI value; null for op amps. */
  readonly value: number | null;
  /** Op amps: the type on the board. */
  readonly type: string | null;
  readonly part: Part | null;
  /** Tracks: the law of their slider; null otherwise. */
  readonly law: SliderLaw | null;
  /** Stock line that the project names for it. */
  readonly stock: string | null;
}

const KIND_OF = { resistance: "resistor", capacitance: "capacitor", inductance: "inductor" } as const;

const REFERENCE_ROLES = [["upperR", "upper R", "resistor"], ["lowerR", "lower R", "resistor"], ["bypassC", "bypass C", "capacitor"]] as const;

/** Every place for a part on a board, in chain order with bands behind their stage, the supply's divider last. Ideal op amps are no parts. */
export function boardRoles(board: Board): BoardRole[] {
  const roles = board.chain.flatMap((item) => [...blockRoles(item.block, null), ...item.bands.flatMap((band) => blockRoles(band, band.id))]);
  const { supply } = board.project;
  if (supply.kind !== "single") return roles;
  const { reference } = supply;
  for (const [role, label, kind] of REFERENCE_ROLES) roles.push({ ...partRole(DIVIDER, role, `Supply reference: ${label}`, kind, null, reference[role]) });
  if (reference.opAmp !== undefined && reference.opAmp !== IDEAL) roles.push(opAmpRole(DIVIDER, "Supply reference: op amp", null, reference.opAmp, reference.opAmpStock));
  return roles;
}

function partRole(block: string, role: string, label: string, kind: StockKind, band: string | null, part: Part, law: SliderLaw | null = null): BoardRole {
  return { name: `${block === DIVIDER ? "reference" : block}.${role === TRACK ? "slider" : role}`, block, role, label, kind, band, value: part.value, type: null, part, law, stock: part.stock ?? null };
}

function opAmpRole(block: string, label: string, band: string | null, type: string, stock: string | undefined): BoardRole {
  return { name: `${block === DIVIDER ? "reference" : block}.opAmp`, block, role: "opAmp", label, kind: "op-amp", band, value: null, type, part: null, law: null, stock: stock ?? null };
}

function blockRoles(block: Block, band: string | null): BoardRole[] {
  const { roles, hasOpAmp, hasSlider } = BLOCKS[block.kind];
  const parts = partsOf(block);
  const found = roles.flatMap(({ role, label, quantity }) => (parts[role] ? [partRole(block.id, role, `${blockName(block)}: ${label}`, KIND_OF[quantity], band, parts[role])] : []));
  if (hasSlider && block.slider) found.push(partRole(block.id, TRACK, `${blockName(block)}: track`, "potentiometer", band, block.slider.track, block.slider.law ?? "linear"));
  if (hasOpAmp && block.opAmp !== undefined && block.opAmp !== IDEAL) found.push(opAmpRole(block.id, `${blockName(block)}: op amp`, band, block.opAmp, block.opAmpStock));
  return found;
}

/** Parts that a board's other roles take of each line, both pieces of a pair; of op amps, amplifiers. */
export function partsElsewhere(board: Board, role: BoardRole): ReadonlyMap<string, number> {
  const counts = new Map<string, number>();
  for (const { name, stock, part } of boardRoles(board)) {
    if (name === role.name) continue;
    for (const id of [stock, part?.second?.stock ?? null]) if (id !== null) counts.set(id, (counts.get(id) ?? 0) + 1);
  }
  return counts;
}

/** A role by its name; `b1k.track` is understood as `b1k.slider` is. */
export function findRole(board: Board, name: string): BoardRole | undefined {
  return boardRoles(board).find((r) => r.name === name || (r.role === TRACK && `${r.block}.${TRACK}` === name));
}

/** What may be put into a role. */
export type Filling = { readonly part: Part } | { readonly opAmp: string; readonly stock: string | null };

/** A block with something else in one of its roles. */
export function filledBlock(block: Block, role: string, filling: Filling): Block {
  if ("opAmp" in filling) {
    const { opAmpStock: _gone, ...rest } = block;
    return { ...rest, opAmp: filling.opAmp, ...(filling.stock === null ? {} : { opAmpStock: filling.stock }) };
  }
  if (role === TRACK) return block.slider ? { ...block, slider: { ...block.slider, track: filling.part } } : block;
  return { ...block, parts: { ...partsOf(block), [role]: filling.part } };
}

function filledReference(reference: SupplyReference, role: string, filling: Filling): SupplyReference {
  if ("opAmp" in filling) {
    const { opAmpStock: _gone, ...rest } = reference;
    return { ...rest, opAmp: filling.opAmp, ...(filling.stock === null ? {} : { opAmpStock: filling.stock }) };
  }
  return { ...reference, [role]: filling.part };
}

/** A project with other parts in some of its roles. */
export function filledProject(project: Project, fillings: readonly { readonly role: Pick<BoardRole, "block" | "role">; readonly filling: Filling }[]): Project {
  const byBlock = new Map<string, { role: string; filling: Filling }[]>();
  for (const { role, filling } of fillings) byBlock.set(role.block, [...(byBlock.get(role.block) ?? []), { role: role.role, filling }]);
  const blocks = project.blocks.map((block) => (byBlock.get(block.id) ?? []).reduce((b, f) => filledBlock(b, f.role, f.filling), block));
  const { supply } = project;
  const atReference = byBlock.get(DIVIDER) ?? [];
  if (supply.kind !== "single" || atReference.length === 0) return { ...project, blocks };
  return { ...project, blocks, supply: { ...supply, reference: atReference.reduce((r, f) => filledReference(r, f.role, f.filling), supply.reference) } };
}

/** The patch that puts parts into roles. */
export function fillingPatch(project: Project, fillings: Parameters<typeof filledProject>[1]): Patch {
  return patchBetween(project, filledProject(project, fillings));
}

/** A part with another value, tolerance and stock line. A coil gets the winding that the line states, and else keeps its own. */
export function partFromStock(old: Part, value: number, tolerance: number | null, stock: string, windingR: number | null = null): Part {
  const { tolerance: _gone, ...rest } = bareOf(old);
  return { ...rest, value, ...(tolerance === null || tolerance >= 1 ? {} : { tolerance }), stock, ...(windingR === null ? {} : { windingR }) };
}

/** Op amps in a package of a type; 1 where the type is not in the built-in table. */
export function amplifiersIn(type: string): number {
  const key = Object.keys(BUILT_IN_OP_AMPS).find((name) => name.toLowerCase() === type.toLowerCase());
  return key === undefined ? 1 : BUILT_IN_OP_AMPS[key].amplifiers;
}

/** A board with the blocks of a changed project in the same wiring. */
export function onProject(board: Board, project: Project): Board {
  const blocks = new Map(project.blocks.map((b) => [b.id, b]));
  const chain = board.chain.map((item) => ({ ...item, block: blocks.get(item.block.id)!, bands: item.bands.map((b) => blocks.get(b.id)!) }));
  return { ...board, project, chain };
}

/** Edits of a document: each is a pure function from the document to a patch, and only the editor's store applies it. */
import { BLOCKS } from "../blocks/index.ts";
import { patchBetween, type Patch } from "./patch.ts";
import { partsOf, type Block, type Part, type Project, type SheetPoint, type Slider } from "./project.ts";

/** An edit that may be refused, with the reason for the person who asked for it. */
export type Edit = { readonly ok: true; readonly patch: Patch } | { readonly ok: false; readonly message: string };

/** The role under which a slider's track is edited like any other part. */
export const TRACK = "track";

/** The name that people know a block by. */
export function blockName(block: Block): string {
  return block.label?.trim() || block.id;
}

/** The part of a role (the slider's track included), or undefined where it is absent. */
export function partOf(block: Block, role: string): Part | undefined {
  return role === TRACK ? block.slider?.track : Object.hasOwn(partsOf(block), role) ? partsOf(block)[role] : undefined;
}

/** Changes some blocks; those that `change` returns as they are stay out of the patch. */
export function changeBlocks(project: Project, ids: Iterable<string>, change: (block: Block) => Block): Patch {
  const wanted = new Set(ids);
  return patchBetween(project, { ...project, blocks: project.blocks.map((block) => (wanted.has(block.id) ? change(block) : block)) });
}

/** A copy without one key: an absent key, not one that holds undefined, is what a file can say. */
export function without<T extends object, K extends keyof T>(object: T, key: K): Omit<T, K> {
  const { [key]: _gone, ...rest } = object;
  return rest;
}

/** Sets slider positions by block id, each kept within 0 … 1. */
export function setPositions(project: Project, positions: Readonly<Record<string, number>>): Patch {
  return changeBlocks(project, Object.keys(positions), (block) => {
    if (!block.slider) return block;
    const position = Math.min(1, Math.max(0, positions[block.id]));
    return position === block.slider.position ? block : { ...block, slider: { ...block.slider, position } };
  });
}

/** Sets one slider's position. */
export function setPosition(project: Project, id: string, position: number): Patch {
  return setPositions(project, { [id]: position });
}

/** Changes law, end resistance or other keys of a slider. */
export function setSlider(project: Project, id: string, change: Partial<Slider>): Patch {
  return changeBlocks(project, [id], (block) => (block.slider ? { ...block, slider: { ...block.slider, ...change } } : block));
}

/** Puts a part in a role, or takes an optional one out (null). */
export function setPart(project: Project, id: string, role: string, part: Part | null): Patch {
  return changeBlocks(project, [id], (block) => {
    if (role === TRACK) return block.slider && part ? { ...block, slider: { ...block.slider, track: part } } : block;
    const parts = partsOf(block);
    return { ...block, parts: part ? { ...parts, [role]: part } : without(parts, role) };
  });
}

/** A part without what is known of one piece: the role's tolerance and a coil's winding stay. */
export function bareOf(part: Part): Part {
  return without(without(without(without(part, "stock"), "measured"), "piece"), "second");
}

/**
 * Gives a part another value. Which stock line and piece it was, what the meter said and any second piece go: all spoke
 * of what was there before. An absent optional part comes in with its usual tolerance.
 */
export function setPartValue(project: Project, id: string, role: string, value: number): Patch {
  const block = project.blocks.find((b) => b.id === id);
  if (!block) return [];
  const part = partOf(block, role);
  if (part?.value === value) return [];
  if (part) return setPart(project, id, role, { ...bareOf(part), value });
  const definition = BLOCKS[block.kind].roles.find((r) => r.role === role);
  return definition ? setPart(project, id, role, { value, tolerance: definition.tolerance }) : [];
}

/** Sets or clears (undefined) one further datum of a part, such as its tolerance or its measured value. */
export function setPartDatum(project: Project, id: string, role: string, key: "tolerance" | "measured" | "windingR" | "selfC", value: number | undefined): Patch {
  const block = project.blocks.find((b) => b.id === id);
  const part = block && partOf(block, role);
  if (!part || part[key] === value) return [];
  return setPart(project, id, role, value === undefined ? without(part, key) : { ...part, [key]: value });
}

/** Names the op amp of a block; its stock line goes, since it spoke of the type before. */
export function setOpAmp(project: Project, id: string, opAmp: string): Patch {
  return changeBlocks(project, [id], (block) => (block.opAmp === opAmp ? block : { ...without(block, "opAmpStock"), opAmp }));
}

/** Names a block; an empty text takes its label away. */
export function setLabel(project: Project, id: string, label: string): Patch {
  const text = label.trim();
  return changeBlocks(project, [id], (block) => {
    if ((block.label ?? "") === text) return block;
    return text === "" ? without(block, "label") : { ...block, label: text };
  });
}

export type ProjectField = "name" | "notes" | "supply" | "temperature";

/** Sets one of the project's own fields. */
export function setField<K extends ProjectField>(project: Project, key: K, value: NonNullable<Project[K]>): Patch {
  return project[key] === value ? [] : patchBetween(project, { ...project, [key]: value });
}

/** Puts blocks at places on the sheet. */
export function moveBlocks(project: Project, moves: readonly { readonly id: string; readonly at: SheetPoint }[]): Patch {
  const places = new Map(moves.map((move) => [move.id, move.at]));
  return changeBlocks(project, places.keys(), (block) => {
    const at = places.get(block.id)!;
    return block.at?.x === at.x && block.at.y === at.y && block.at.byHand === at.byHand ? block : { ...block, at };
  });
}

/** Whether a block carries a bus. */
export function isStage(block: Block): boolean {
  return BLOCKS[block.kind].place === "chain" && BLOCKS[block.kind].ports.includes("bus");
}

function blockOfEnd(end: string): string {
  return end.slice(0, end.lastIndexOf("."));
}

/**
 * Deletes blocks with their wires. What stood in the chain is bridged, so that the signal still gets through, and the
 * bands of a deleted stage go with it. The input, the output and the last stage stay: without them there is no board.
 */
export function removeBlocks(project: Project, ids: readonly string[]): Edit {
  const doomed = new Set(ids);
  for (const block of project.blocks) {
    if (!doomed.has(block.id)) continue;
    const { place } = BLOCKS[block.kind];
    if (place === "source" || place === "load") return { ok: false, message: `“${blockName(block)}” stays: a board needs its ${place === "source" ? "input" : "output"}.` };
  }
  const stages = project.blocks.filter(isStage);
  if (stages.some((s) => doomed.has(s.id)) && stages.every((s) => doomed.has(s.id))) {
    return { ok: false, message: `“${blockName(stages.find((s) => doomed.has(s.id))!)}” stays: it is the last stage, and bands need one to hang on.` };
  }
  for (const wire of project.wires) if (wire.from.endsWith(".bus") && stages.some((s) => s.id === blockOfEnd(wire.from) && doomed.has(s.id))) doomed.add(blockOfEnd(wire.to));

  // Whatever drove a deleted block drives what that block drove.
  const driver = new Map(project.wires.filter((w) => w.to.endsWith(".in")).map((w) => [blockOfEnd(w.to), w.from]));
  const sourceFor = (from: string): string | undefined => {
    const passed = new Set<string>();
    let at: string | undefined = from;
    while (at !== undefined && doomed.has(blockOfEnd(at)) && !passed.has(at)) {
      passed.add(at);
      at = driver.get(blockOfEnd(at));
    }
    return at !== undefined && doomed.has(blockOfEnd(at)) ? undefined : at;
  };
  const wires = project.wires.flatMap((wire) => {
    if (doomed.has(blockOfEnd(wire.to))) return [];
    if (!doomed.has(blockOfEnd(wire.from))) return [wire];
    const from = wire.to.endsWith(".in") ? sourceFor(wire.from) : undefined;
    return from === undefined ? [] : [{ ...wire, from }];
  });
  return { ok: true, patch: patchBetween(project, { ...project, blocks: project.blocks.filter((b) => !doomed.has(b.id)), wires }) };
}

/** Takes one wire out, by its place in the list. */
export function removeWire(project: Project, index: number): Patch {
  return patchBetween(project, { ...project, wires: project.wires.filter((_, i) => i !== index) });
}

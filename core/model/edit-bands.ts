/** Edits that bring blocks in: new bands and chain blocks, another kind for a band, copies. */
import { legFrequency } from "../analysis/laws.ts";
import { BAND_KINDS, BLOCKS } from "../blocks/index.ts";
import type { BlockKind } from "../blocks/kinds.ts";
import { nearestPreferred } from "../e-series.ts";
import { formatValue } from "../units.ts";
import { blockName, changeBlocks, isStage } from "./edit.ts";
import { newBlock } from "./new-project.ts";
import { patchBetween, type Patch } from "./patch.ts";
import { partsOf, type Block, type Part, type Project, type SheetPoint, type Wire } from "./project.ts";

/** An edit that brings blocks in, with their ids, to be selected, and their names, to be told. */
export type Addition = { readonly ok: true; readonly patch: Patch; readonly ids: readonly string[]; readonly names: readonly string[] } | { readonly ok: false; readonly message: string };

/** Nominal octave-band centres, Hz (ISO 266:1997, preferred frequencies), over the whole of hearing. */
export const OCTAVE_CENTRES = [16, 31.5, 63, 125, 250, 500, 1000, 2000, 4000, 8000, 16000] as const;

/**
 * Where a further band does most good: the octave above the highest centre; once that is past hearing, the octave below
 * the lowest; then the octave centre that lies furthest from the others.
 */
export function nextCentre(centres: readonly number[]): number {
  if (centres.length === 0) return 1000;
  const nearest = (frequency: number): number => {
    let best = 0;
    OCTAVE_CENTRES.forEach((centre, index) => {
      if (Math.abs(Math.log(frequency / centre)) < Math.abs(Math.log(frequency / OCTAVE_CENTRES[best]))) best = index;
    });
    return best;
  };
  const above = nearest(Math.max(...centres)) + 1;
  if (above < OCTAVE_CENTRES.length) return OCTAVE_CENTRES[above];
  const below = nearest(Math.min(...centres)) - 1;
  if (below >= 0) return OCTAVE_CENTRES[below];
  const distance = (centre: number): number => Math.min(...centres.map((f) => Math.abs(Math.log2(f / centre))));
  return [...OCTAVE_CENTRES].sort((a, b) => distance(b) - distance(a))[0];
}

/** The leg resonance that a kind's laws give for these parts, Hz; undefined for a kind without one. */
export function lawResonance(kind: BlockKind, parts: Readonly<Record<string, Part>>): number | undefined {
  return BLOCKS[kind].shape === "resonance" ? legFrequency(kind, parts) : undefined;
}

function isReactive(kind: BlockKind, role: string): boolean {
  const quantity = BLOCKS[kind].roles.find((r) => r.role === role)?.quantity;
  return quantity === "capacitance" || quantity === "inductance";
}

/** Parts tuned to a frequency: what stores energy is scaled in step, so that Q and range stay, and rounded to E24. */
function tuned(kind: BlockKind, parts: Readonly<Record<string, Part>>, frequency: number): Record<string, Part> {
  const present = lawResonance(kind, parts);
  if (present === undefined) return { ...parts };
  const scale = present / frequency;
  return Object.fromEntries(Object.entries(parts).map(([role, part]) => [role, isReactive(kind, role) ? { ...part, value: nearestPreferred(part.value * scale, 24) } : part]));
}

function freshId(project: Project, wish: string, taken: ReadonlySet<string> = new Set()): string {
  const used = new Set([...project.blocks.map((b) => b.id), ...taken]);
  if (!used.has(wish)) return wish;
  // Where the wish ends in a number, the next one is told apart by a letter-free suffix that cannot be misread as a value.
  for (let n = 2; ; n++) if (!used.has(`${wish}-${n}`)) return `${wish}-${n}`;
}

/** A name that no block has yet: `1 kHz`, then `1 kHz · 2`. */
function freshLabel(project: Project, wish: string, taken: ReadonlySet<string> = new Set()): string {
  const used = new Set([...project.blocks.map(blockName), ...taken]);
  if (!used.has(wish)) return wish;
  const stem = wish.replace(/ · \d+$/, "");
  for (let n = 2; ; n++) if (!used.has(`${stem} · ${n}`)) return `${stem} · ${n}`;
}

/** `1 kHz` → `b1k`, `31.5 Hz` → `b31.5`: short enough to type on the command line. A dot would end the id in a wire. */
function idForFrequency(frequency: number): string {
  return `b${formatValue(frequency, "frequency").replace(/\s|Hz/g, "").replace(".", "_")}`;
}

const KIND_ID: Partial<Record<BlockKind, string>> = { "shelf-section": "high", "low-shelf-section": "low", "level-section": "level", buffer: "buffer", "boost-cut-stage": "eq" };
const KIND_LABEL: Partial<Record<BlockKind, string>> = { "shelf-section": "High", "low-shelf-section": "Low", "level-section": "Level" };

/** The stage whose bus a block carries or hangs on. */
export function stageOf(project: Project, id: string): string | undefined {
  const block = project.blocks.find((b) => b.id === id);
  if (!block) return undefined;
  if (isStage(block)) return id;
  const from = project.wires.find((w) => w.to === `${id}.bus`)?.from;
  return from?.endsWith(".bus") ? from.slice(0, -".bus".length) : undefined;
}

/** The stages of a project, in file order. */
export function stagesOf(project: Project): Block[] {
  return project.blocks.filter(isStage);
}

function bandsOn(project: Project, stage: string): Block[] {
  const ids = new Set(project.wires.filter((w) => w.from === `${stage}.bus`).map((w) => w.to.slice(0, -".bus".length)));
  return project.blocks.filter((b) => ids.has(b.id));
}

/** Before the output, so that files read in the order of the signal. */
function withBlocks(project: Project, blocks: readonly Block[], wires: readonly Wire[]): Project {
  const at = project.blocks.findIndex((b) => BLOCKS[b.kind].place === "load");
  const where = at < 0 ? project.blocks.length : at;
  return { ...project, blocks: [...project.blocks.slice(0, where), ...blocks, ...project.blocks.slice(where)], wires: [...project.wires, ...wires] };
}

/**
 * Hangs a new band on a stage's bus, with its kind's defaults tuned to `frequency` where the kind resonates. Slider and
 * op amp are those of its neighbour on the bus: a row of equal sliders is what a builder buys.
 */
export function addBand(project: Project, stage: string, kind: BlockKind, frequency: number): Addition {
  if (!stagesOf(project).some((s) => s.id === stage)) return { ok: false, message: "There is no stage to hang the band on." };
  const neighbours = bandsOn(project, stage);
  const fresh = newBlock(kind, "");
  const isTuned = lawResonance(kind, partsOf(fresh)) !== undefined;
  const id = freshId(project, isTuned ? idForFrequency(frequency) : (KIND_ID[kind] ?? kind));
  const label = freshLabel(project, isTuned ? formatValue(frequency, "frequency") : (KIND_LABEL[kind] ?? BLOCKS[kind].label));
  const slider = neighbours.findLast((b) => b.slider)?.slider ?? fresh.slider;
  const opAmp = neighbours.findLast((b) => b.opAmp !== undefined && BLOCKS[b.kind].hasOpAmp)?.opAmp ?? fresh.opAmp;
  const band: Block = {
    id,
    kind,
    label,
    ...(fresh.opAmp !== undefined && opAmp !== undefined ? { opAmp } : {}),
    ...(slider ? { slider: { ...slider, position: 0.5 } } : {}),
    parts: isTuned ? tuned(kind, partsOf(fresh), frequency) : partsOf(fresh),
  };
  const wire = { from: `${stage}.bus`, to: `${id}.bus` };
  return { ok: true, ids: [id], names: [label], patch: patchBetween(project, withBlocks(project, [band], [wire])) };
}

/** Puts a buffer or a further stage into the chain, behind the given block (which must have an out). */
export function addToChain(project: Project, kind: BlockKind, after: string): Addition {
  const block = project.blocks.find((b) => b.id === after);
  if (!block || !BLOCKS[block.kind].ports.includes("out")) return { ok: false, message: "A new block goes behind one that has an output." };
  const id = freshId(project, KIND_ID[kind] ?? kind);
  const wires = project.wires.map((w) => (w.from === `${after}.out` ? { ...w, from: `${id}.out` } : w));
  const at = project.blocks.indexOf(block) + 1;
  const blocks = [...project.blocks.slice(0, at), newBlock(kind, id), ...project.blocks.slice(at)];
  return { ok: true, ids: [id], names: [blockName(blocks[at])], patch: patchBetween(project, { ...project, blocks, wires: [...wires, { from: `${after}.out`, to: `${id}.in` }] }) };
}

/**
 * Makes a band another kind. Parts whose role both kinds have stay; the rest come from the new kind's defaults, and
 * where both kinds resonate, the new ones are chosen so that the leg keeps its frequency.
 */
export function changeKind(project: Project, id: string, kind: BlockKind): Patch {
  return changeBlocks(project, [id], (block) => {
    if (block.kind === kind || BLOCKS[block.kind].place !== "band" || BLOCKS[kind].place !== "band") return block;
    const fresh = newBlock(kind, id);
    const oldRoles = new Set(BLOCKS[block.kind].roles.map((r) => r.role));
    const newRoles = new Set(BLOCKS[kind].roles.map((r) => r.role));
    const kept = Object.fromEntries(Object.entries(partsOf(block)).filter(([role]) => newRoles.has(role) || !oldRoles.has(role)));
    let parts: Record<string, Part> = { ...partsOf(fresh), ...kept };
    const target = lawResonance(block.kind, partsOf(block));
    const present = lawResonance(kind, parts);
    if (target !== undefined && present !== undefined) {
      // Only the new reactive parts move, and a resonance goes with the root of each.
      const scale = (present / target) ** 2;
      parts = Object.fromEntries(Object.entries(parts).map(([role, part]) => [role, !(role in kept) && isReactive(kind, role) ? { ...part, value: nearestPreferred(part.value * scale, 24) } : part]));
    }
    const { opAmp: _opAmp, slider: _slider, parts: _parts, ...rest } = block;
    const opAmp = block.opAmp ?? bandAmp(project, id) ?? fresh.opAmp;
    const slider = block.slider ?? fresh.slider;
    return { ...rest, kind, ...(BLOCKS[kind].hasOpAmp && opAmp !== undefined ? { opAmp } : {}), ...(slider ? { slider } : {}), parts };
  });
}

function bandAmp(project: Project, id: string): string | undefined {
  const stage = stageOf(project, id);
  return stage === undefined ? undefined : bandsOn(project, stage).findLast((b) => b.opAmp !== undefined)?.opAmp;
}

/** Copies of bands, each on the bus of its original (or, for bands from elsewhere, on the given stage's). */
export function copyBands(project: Project, bands: readonly Block[], stage: string | undefined, places?: ReadonlyMap<string, SheetPoint>): Addition {
  const able = bands.filter((b) => BAND_KINDS.includes(b.kind));
  if (able.length === 0) return { ok: false, message: "Only bands can be copied: the other blocks each have their one place in the chain." };
  const taken = new Set<string>();
  const labels = new Set<string>();
  const blocks: Block[] = [];
  const wires: Wire[] = [];
  for (const band of able) {
    const bus = stage ?? stageOf(project, band.id) ?? stagesOf(project)[0]?.id;
    if (bus === undefined) return { ok: false, message: "There is no stage to hang the copy on." };
    const id = freshId(project, band.id.replace(/-\d+$/, ""), taken);
    taken.add(id);
    const label = freshLabel(project, blockName(band), labels);
    labels.add(label);
    // Without a place of its own the copy goes under its frequency, beside the original.
    const { at: _at, ...rest } = band;
    const at = places?.get(band.id);
    blocks.push({ ...rest, id, label, ...(at ? { at } : {}) });
    wires.push({ from: `${bus}.bus`, to: `${id}.bus` });
  }
  return { ok: true, ids: blocks.map((b) => b.id), names: blocks.map(blockName), patch: patchBetween(project, withBlocks(project, blocks, wires)) };
}

/** Copies of bands within their project; `places`, by the original's id, for copies that a hand put somewhere. */
export function duplicateBands(project: Project, ids: readonly string[], places?: ReadonlyMap<string, SheetPoint>): Addition {
  return copyBands(project, project.blocks.filter((b) => ids.includes(b.id)), undefined, places);
}


/** What hangs where: a project's blocks as rails one under another, whatever is wrong with its wiring. */
import { BLOCKS } from "../blocks/index.ts";
import type { Block, Project } from "../model/project.ts";

/** What comes before a block: the buffers directly in front of it, and where the first of them takes its signal. */
export interface Feed {
  /** Id of the stage or input, null where the chain is open. */
  readonly from: string | null;
  /** In the order of the signal. */
  readonly buffers: readonly Block[];
}

export interface Rail {
  /** Null for the row of a board that has no stage, and for bands on no bus. */
  readonly stage: Block | null;
  readonly feed: Feed;
  readonly bands: readonly Block[];
  readonly isLoose: boolean;
}

export interface Rails {
  readonly rails: readonly Rail[];
  /** Blocks that nothing else places, drawn with the first rail. */
  readonly input: Block | null;
  readonly output: Block | null;
  readonly outputFeed: Feed;
}

/**
 * The stages in the order of the signal, each with what feeds it and the bands on its bus, in file order. Tolerant: the
 * first wire into a port counts, what hangs nowhere comes in a row of its own at the end.
 */
export function railsOf(project: Project): Rails {
  const byId = new Map(project.blocks.map((block) => [block.id, block]));
  const driverOf = new Map<string, string>();
  const stageOfBand = new Map<string, string>();
  for (const { from, to } of project.wires) {
    const [source, target] = [from.slice(0, from.lastIndexOf(".")), to.slice(0, to.lastIndexOf("."))];
    if (!byId.has(source) || !byId.has(target)) continue;
    if (from.endsWith(".out") && to.endsWith(".in") && !driverOf.has(target)) driverOf.set(target, source);
    if (from.endsWith(".bus") && to.endsWith(".bus") && !stageOfBand.has(target)) stageOfBand.set(target, source);
  }
  const stages = project.blocks.filter(isStage);
  const depth = (block: Block): number => {
    let steps = 0;
    for (let at = driverOf.get(block.id); at !== undefined && steps <= project.blocks.length; at = driverOf.get(at)) steps++;
    return steps;
  };
  const depths = new Map(stages.map((stage) => [stage.id, driverOf.has(stage.id) ? depth(stage) : Infinity]));
  stages.sort((a, b) => depths.get(a.id)! - depths.get(b.id)! || 0);
  const drawn = new Set<string>();
  const feedOf = (id: string): Feed => {
    const buffers: Block[] = [];
    let at = driverOf.get(id);
    for (; at !== undefined; at = driverOf.get(at)) {
      const block = byId.get(at)!;
      if (block.kind !== "buffer" || drawn.has(at)) break;
      drawn.add(at);
      buffers.unshift(block);
    }
    return { from: at ?? null, buffers };
  };
  const output = project.blocks.find((b) => BLOCKS[b.kind].place === "load") ?? null;
  const outputFeed = output ? feedOf(output.id) : { from: null, buffers: [] };
  const rails: Rail[] = stages.map((stage) => ({
    stage,
    feed: feedOf(stage.id),
    bands: project.blocks.filter((b) => isBand(b) && stageOfBand.get(b.id) === stage.id),
    isLoose: false,
  }));
  if (rails.length === 0) rails.push({ stage: null, feed: { from: null, buffers: [] }, bands: [], isLoose: false });
  const stray = project.blocks.filter((b) => b.kind === "buffer" && !drawn.has(b.id));
  if (stray.length > 0) rails[0] = { ...rails[0], feed: { from: rails[0].feed.from, buffers: [...rails[0].feed.buffers, ...stray] } };
  const hung = new Set(rails.flatMap((rail) => rail.bands.map((b) => b.id)));
  const loose = project.blocks.filter((b) => isBand(b) && !hung.has(b.id));
  if (loose.length > 0) rails.push({ stage: null, feed: { from: null, buffers: [] }, bands: loose, isLoose: true });
  return { rails, input: project.blocks.find((b) => BLOCKS[b.kind].place === "source") ?? null, output, outputFeed };
}

/** The rail whose stage drives the output, else the last one with a stage. */
export function lastRail(rails: Rails): number {
  const driving = rails.rails.findIndex((rail) => rail.stage !== null && rail.stage.id === rails.outputFeed.from);
  if (driving >= 0) return driving;
  return Math.max(0, rails.rails.findLastIndex((rail) => !rail.isLoose));
}

function isBand(block: Block): boolean {
  return BLOCKS[block.kind].place === "band";
}

function isStage(block: Block): boolean {
  return BLOCKS[block.kind].place === "chain" && BLOCKS[block.kind].ports.includes("bus");
}

/** Where a rail is, in pixels. */
export interface RailPlace {
  readonly rail: Rail;
  readonly index: number;
  readonly top: number;
  /** The boost side (m); the cut side (p) is `gap` lower. */
  readonly y: number;
  readonly gap: number;
  readonly bottom: number;
  readonly slot: number;
}

/**
 * Whether two projects give the same sheet but for slider positions: what is drawn and laid out once is kept while a
 * knob moves.
 */
export function isSameSheet(a: Project, b: Project): boolean {
  if (a === b) return true;
  if (a.wires !== b.wires || a.supply !== b.supply || a.blocks.length !== b.blocks.length) return false;
  return a.blocks.every((block, index) => {
    const other = b.blocks[index];
    return block === other || (block.id === other.id && block.kind === other.kind && block.label === other.label && block.opAmp === other.opAmp &&
      block.parts === other.parts && block.at === other.at && block.slider?.track === other.slider?.track);
  });
}

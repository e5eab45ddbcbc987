import { BLOCKS } from "../blocks/index.ts";
import type { Port } from "../blocks/definition.ts";
import { FaultError, type Fault } from "../errors.ts";
import type { Block, Project } from "../model/project.ts";

/** A block of the signal chain with what hangs on it. */
export interface ChainItem {
  readonly block: Block;
  /** Index in `chain` of the block that drives this one; −1 for the input. */
  readonly driver: number;
  /** Bands on the block's bus, in file order; empty where it has none. */
  readonly bands: readonly Block[];
}

/** A project whose wiring makes sense: a tree from the one input, drivers before what they drive. */
export interface Board {
  readonly project: Project;
  readonly chain: readonly ChainItem[];
  /** Index in `chain` of the one output. */
  readonly output: number;
  /** What takes no part, and why. */
  readonly warnings: readonly Fault[];
}

interface End {
  readonly block: Block;
  readonly port: Port;
}

/** The wiring of a project as a board. @throws FaultError with every wiring fault, each naming its blocks */
export function resolveBoard(project: Project): Board {
  const faults: Fault[] = [];
  const warnings: Fault[] = [];
  const byId = new Map(project.blocks.map((block) => [block.id, block]));
  const driverOf = new Map<string, { block: string; wire: number }>();
  const busOf = new Map<string, { stage: string; wire: number }>();
  const seen = new Map<string, number>();

  const readEnd = (text: string, path: string): End | undefined => {
    const dot = text.lastIndexOf(".");
    const block = byId.get(text.slice(0, dot));
    const expected = "must be block.port, such as “eq.bus”";
    if (dot <= 0) faults.push({ path, message: `${expected}, got “${text}”` });
    else if (!block) faults.push({ path, message: `there is no block “${text.slice(0, dot)}”`, blocks: [text.slice(0, dot)] });
    else {
      const port = text.slice(dot + 1) as Port;
      const ports = BLOCKS[block.kind].ports;
      if (ports.includes(port)) return { block, port };
      faults.push({ path, message: `“${block.id}” (${BLOCKS[block.kind].label.toLowerCase()}) has no port “${port}”: it has ${ports.join(", ")}`, blocks: [block.id] });
    }
    return undefined;
  };

  project.wires.forEach((wire, index) => {
    const path = `wires[${index}]`;
    const from = readEnd(wire.from, `${path}.from`);
    const to = readEnd(wire.to, `${path}.to`);
    if (!from || !to) return;
    const key = `${wire.from} ${wire.to}`;
    if (seen.has(key)) {
      warnings.push({ path, message: `repeats wires[${seen.get(key)}] and adds nothing`, blocks: [from.block.id, to.block.id] });
      return;
    }
    seen.set(key, index);
    const blocks = [from.block.id, to.block.id];
    if (from.port === "out" && to.port === "in") {
      const other = driverOf.get(to.block.id);
      if (other) faults.push({ path, message: `“${to.block.id}” is driven twice, by “${other.block}” and by “${from.block.id}”: an in takes one wire`, blocks: [to.block.id, other.block, from.block.id] });
      else driverOf.set(to.block.id, { block: from.block.id, wire: index });
    } else if (from.port === "bus" && to.port === "bus") {
      const [fromPlace, toPlace] = [BLOCKS[from.block.kind].place, BLOCKS[to.block.kind].place];
      if (fromPlace === "chain" && toPlace === "chain") faults.push({ path, message: `one bus joins two stages, “${from.block.id}” and “${to.block.id}”: a bus belongs to one stage`, blocks });
      else if (fromPlace !== "chain") faults.push({ path, message: `a bus wire runs from a stage to a band: “${from.block.id}” is not a stage`, blocks });
      else {
        const other = busOf.get(to.block.id);
        if (other) faults.push({ path, message: `“${to.block.id}” hangs on two buses, those of “${other.stage}” and “${from.block.id}”: a band hangs on one`, blocks: [to.block.id, other.stage, from.block.id] });
        else busOf.set(to.block.id, { stage: from.block.id, wire: index });
      }
    } else faults.push({ path, message: `a wire runs from an out to an in, or from a stage's bus to a band's bus, not from “${wire.from}” to “${wire.to}”`, blocks });
  });

  const inputs = project.blocks.filter((b) => BLOCKS[b.kind].place === "source");
  const outputs = project.blocks.filter((b) => BLOCKS[b.kind].place === "load");
  for (const [found, what] of [[inputs, "input"], [outputs, "output"]] as const) {
    if (found.length === 0) faults.push({ path: "blocks", message: `there is no ${what} block: a board has one` });
    if (found.length > 1) faults.push({ path: "blocks", message: `there are ${found.length} ${what} blocks (${found.map((b) => `“${b.id}”`).join(", ")}): a board has one`, blocks: found.map((b) => b.id) });
  }
  findLoops(project, driverOf, faults);
  if (faults.length > 0) throw new FaultError(faults);

  const [source, load] = [inputs[0], outputs[0]];
  let last = load.id;
  while (driverOf.has(last)) last = driverOf.get(last)!.block;
  if (last !== source.id) {
    const where = last === load.id ? `nothing drives “${load.id}”` : `going back from “${load.id}”, it ends at “${last}”, whose in has no wire`;
    throw new FaultError([{ path: "wires", message: `there is no path from “${source.id}” to “${load.id}”: ${where}`, blocks: [source.id, load.id, last] }]);
  }

  const driven = new Map<string, Block[]>();
  for (const block of project.blocks) {
    const driver = driverOf.get(block.id);
    if (driver) driven.set(driver.block, [...(driven.get(driver.block) ?? []), block]);
  }
  const hung = Map.groupBy(
    project.blocks.filter((b) => busOf.has(b.id)),
    (b) => busOf.get(b.id)!.stage,
  );
  // Depth first, drivers before what they drive; a stack of our own, since a chain may be longer than the engine's.
  const chain: ChainItem[] = [];
  const open = [{ block: source, driver: -1 }];
  for (let next = open.pop(); next; next = open.pop()) {
    const { block, driver: by } = next;
    const index = chain.push({ block, driver: by, bands: hung.get(block.id) ?? [] }) - 1;
    for (const after of (driven.get(block.id) ?? []).toReversed()) open.push({ block: after, driver: index });
  }

  const inChain = new Set(chain.flatMap((item) => [item.block.id, ...item.bands.map((b) => b.id)]));
  project.blocks.forEach((block, index) => {
    if (inChain.has(block.id)) return;
    const stage = busOf.get(block.id)?.stage;
    const why = BLOCKS[block.kind].place !== "band" ? "the signal does not reach it" : stage ? `the signal does not reach “${stage}”` : "it hangs on no bus";
    warnings.push({ path: `blocks[${index}]`, message: `“${block.id}” takes no part: ${why}`, blocks: [block.id] });
  });
  return { project, chain, output: chain.findIndex((item) => item.block.id === load.id), warnings };
}

function findLoops(project: Project, driverOf: ReadonlyMap<string, { block: string }>, faults: Fault[]): void {
  const done = new Set<string>();
  for (const start of project.blocks) {
    const trail: string[] = [];
    let at: string | undefined = start.id;
    while (at !== undefined && !done.has(at)) {
      const from = trail.indexOf(at);
      if (from >= 0) {
        const loop = trail.slice(from).reverse();
        faults.push({ path: "wires", message: `the signal runs in a loop: ${[...loop, loop[0]].map((id) => `“${id}”`).join(" → ")}`, blocks: loop });
        break;
      }
      trail.push(at);
      at = driverOf.get(at)?.block;
    }
    for (const id of trail) done.add(id);
  }
}

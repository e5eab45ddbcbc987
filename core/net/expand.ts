import { BLOCKS } from "../blocks/index.ts";
import type { Expander } from "../blocks/definition.ts";
import { partsOf, type Block } from "../model/project.ts";
import type { Board } from "./board.ts";
import { GROUND, NetlistBuilder, type Netlist, type NodeId } from "./netlist.ts";
import { opAmpModel, partValue, sliderPosition, sliderResistances, type ValueOpts } from "./values.ts";

/** The whole board as elements between nodes, from the definitions of its blocks. */
export function expandBoard(board: Board, opts: ValueOpts = {}): Netlist {
  const net = new NetlistBuilder();
  const reference = expandReference(board, net, opts);
  const out: NodeId[] = [];
  for (const item of board.chain) {
    const { block } = item;
    const ports = { in: item.driver < 0 ? GROUND : out[item.driver], out: net.node(`${block.id}.out`) };
    const bus = { boost: net.node(`${block.id}.m`), cut: net.node(`${block.id}.p`) };
    out.push(ports.out);
    const output = expandBlock(net, block, { ports, bus, wiper: GROUND, reference }, board, opts);
    if (BLOCKS[block.kind].place === "load") out[out.length - 1] = output.get("load")!;
    for (const band of item.bands) {
      const wiper = net.node(`${band.id}.w`);
      const { boost, cut } = sliderResistances(band.slider!, sliderPosition(band, opts), opts);
      net.resistor(bus.boost, wiper, boost, `${band.id}.slider`, "boost");
      net.resistor(wiper, bus.cut, cut, `${band.id}.slider`, "cut");
      expandBlock(net, band, { ports: { in: GROUND, out: GROUND }, bus, wiper, reference }, board, opts);
    }
  }
  return net.build(out[board.output]);
}

function expandBlock(
  net: NetlistBuilder,
  block: Block,
  place: { ports: { in: NodeId; out: NodeId }; bus: { boost: NodeId; cut: NodeId }; wiper: NodeId; reference: NodeId },
  board: Board,
  opts: ValueOpts,
): ReadonlyMap<string, NodeId> {
  const definition = BLOCKS[block.kind];
  const nodes = new Map<string, NodeId>();
  const quantities = new Map(definition.roles.map((r) => [r.role, r.quantity]));
  const expander: Expander = {
    port: (name) => place.ports[name],
    bus: place.bus,
    wiper: place.wiper,
    ground: GROUND,
    reference: place.reference,
    node(name) {
      const id = net.node(`${block.id}.${name}`);
      nodes.set(name, id);
      return id;
    },
    place(role, a, b) {
      const part = partsOf(block)[role];
      if (!part) return;
      const value = partValue(part, opts);
      const source = `${block.id}.${role}`;
      const quantity = quantities.get(role);
      if (quantity === "resistance") net.resistor(a, b, value, source);
      else if (quantity === "capacitance") net.capacitor(a, b, value, source);
      else {
        // A real coil: winding resistance in series, self-capacitance across both.
        const inner = net.node(`${block.id}.coil`);
        net.resistor(a, inner, part.windingR ?? 0, `${source}.windingR`);
        net.inductor(inner, b, value, source);
        net.capacitor(a, b, part.selfC ?? 0, `${source}.selfC`);
      }
    },
    placeOrWire(role, a, b) {
      if (partsOf(block)[role]) this.place(role, a, b);
      else net.merge(a, b);
    },
    opAmp(plus, minus, outNode) {
      net.opAmp(plus, minus, outNode, opAmpModel(board.project, block.opAmp, `blocks.${block.id}.opAmp`), `${block.id}.opAmp`);
    },
    emf(plus) {
      net.emf(plus, 1, `${block.id}.emf`);
    },
  };
  definition.expand(expander);
  return nodes;
}

/** The node of the signal reference: ground, or the single supply's divider with its bypass and optional follower. */
function expandReference(board: Board, net: NetlistBuilder, opts: ValueOpts): NodeId {
  const { supply } = board.project;
  if (supply.kind === "split") return GROUND;
  const { upperR, lowerR, bypassC, opAmp } = supply.reference;
  const divider = net.node("reference.divider");
  // The supply rail is ground to signals, so both arms stand between the node and ground.
  net.resistor(divider, GROUND, partValue(upperR, opts), "reference.upperR");
  net.resistor(divider, GROUND, partValue(lowerR, opts), "reference.lowerR");
  net.capacitor(divider, GROUND, partValue(bypassC, opts), "reference.bypassC");
  if (opAmp === undefined) return divider;
  const buffered = net.node("reference.out");
  net.opAmp(divider, buffered, buffered, opAmpModel(board.project, opAmp, "supply.reference.opAmp"), "reference.opAmp");
  return buffered;
}

import type { OpAmpModel } from "../model/project.ts";

/** A node of a netlist; 0 is ground. */
export type NodeId = number;

export const GROUND: NodeId = 0;

interface TwoTerminal<Type extends string> {
  readonly type: Type;
  readonly a: NodeId;
  readonly b: NodeId;
  readonly value: number;
  readonly source: string;
  /** Which part of the source, where it has several: `boost` and `cut` of a slider's track. */
  readonly detail?: string;
}

/** `source` is the part's name, `block.role`. Values in SI units, always above 0. */
export type Element =
  | TwoTerminal<"resistor">
  | TwoTerminal<"capacitor">
  | TwoTerminal<"inductor">
  | { readonly type: "opAmp"; readonly plus: NodeId; readonly minus: NodeId; readonly out: NodeId; readonly model: OpAmpModel | "ideal"; readonly source: string }
  | { readonly type: "emf"; readonly plus: NodeId; readonly value: number; readonly source: string };

export interface Netlist {
  /** Nodes 0 … nodeCount − 1, ground included. */
  readonly nodeCount: number;
  /** Names of the nodes, `block.node`; where several were merged, the first. */
  readonly nodeNames: readonly string[];
  readonly elements: readonly Element[];
  /** The node whose voltage is the response. */
  readonly output: NodeId;
}

/**
 * Collects elements and merges nodes that a wire or an exact 0 Ω joins (never a tiny resistor: circuits with sliders
 * at their ends must stay exact). Elements with both ends on one node carry no current and are dropped.
 */
export class NetlistBuilder {
  readonly #parent: NodeId[] = [GROUND];
  readonly #names: string[] = ["ground"];
  readonly #elements: Element[] = [];

  node(name: string): NodeId {
    this.#names.push(name);
    return this.#parent.push(this.#parent.length) - 1;
  }

  /** Joins two nodes as one. */
  merge(a: NodeId, b: NodeId): void {
    const rootA = this.#root(a);
    const rootB = this.#root(b);
    this.#parent[Math.max(rootA, rootB)] = Math.min(rootA, rootB);
  }

  /** Adds a resistor; exactly 0 Ω merges its ends. */
  resistor(a: NodeId, b: NodeId, value: number, source: string, detail?: string): void {
    if (value === 0) this.merge(a, b);
    else this.#elements.push({ type: "resistor", a, b, value, source, ...(detail === undefined ? {} : { detail }) });
  }

  capacitor(a: NodeId, b: NodeId, value: number, source: string): void {
    if (value > 0) this.#elements.push({ type: "capacitor", a, b, value, source });
  }

  inductor(a: NodeId, b: NodeId, value: number, source: string): void {
    this.#elements.push({ type: "inductor", a, b, value, source });
  }

  opAmp(plus: NodeId, minus: NodeId, out: NodeId, model: OpAmpModel | "ideal", source: string): void {
    this.#elements.push({ type: "opAmp", plus, minus, out, model, source });
  }

  emf(plus: NodeId, value: number, source: string): void {
    this.#elements.push({ type: "emf", plus, value, source });
  }

  /** The finished netlist: nodes renumbered without gaps, those that no element touches left out (a port or bus with nothing on it). */
  build(output: NodeId): Netlist {
    const elements = this.#elements
      .map((e): Element => {
        if (e.type === "opAmp") return { ...e, plus: this.#root(e.plus), minus: this.#root(e.minus), out: this.#root(e.out) };
        if (e.type === "emf") return { ...e, plus: this.#root(e.plus) };
        return { ...e, a: this.#root(e.a), b: this.#root(e.b) };
      })
      .filter((e) => e.type === "opAmp" || e.type === "emf" || e.a !== e.b);
    const used = new Set<NodeId>([GROUND, this.#root(output), ...elements.flatMap(terminals)]);
    const order = [...used].sort((a, b) => a - b);
    const numberOf = new Map(order.map((id, index) => [id, index]));
    const at = (id: NodeId): NodeId => numberOf.get(id)!;
    return {
      nodeCount: order.length,
      nodeNames: order.map((id) => this.#names[id]),
      output: at(this.#root(output)),
      elements: elements.map((e): Element => {
        if (e.type === "opAmp") return { ...e, plus: at(e.plus), minus: at(e.minus), out: at(e.out) };
        if (e.type === "emf") return { ...e, plus: at(e.plus) };
        return { ...e, a: at(e.a), b: at(e.b) };
      }),
    };
  }

  #root(id: NodeId): NodeId {
    let root = id;
    while (this.#parent[root] !== root) root = this.#parent[root];
    while (this.#parent[id] !== root) {
      const next = this.#parent[id];
      this.#parent[id] = root;
      id = next;
    }
    return root;
  }
}

function terminals(element: Element): NodeId[] {
  if (element.type === "opAmp") return [element.plus, element.minus, element.out];
  return element.type === "emf" ? [element.plus] : [element.a, element.b];
}

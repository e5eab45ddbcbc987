import type { Board } from "../net/board.ts";
import { expandBoard } from "../net/expand.ts";
import { GROUND, type Netlist } from "../net/netlist.ts";
import { describeNetlist } from "../net/nodal.ts";
import type { ValueOpts } from "../net/values.ts";
import type { OpAmpModel } from "../model/project.ts";
import { ComplexLu } from "../num/complex-lu.ts";

/** A current that leaves a node. A slider's two parts are named `block.slider.boost` and `block.slider.cut`. Node names are `block.node`; `ground` is 0 V. */
export type CurrentTerm =
  /** (v(from) − v(to)) / value */
  | { readonly type: "resistor"; readonly part: string; readonly value: number; readonly from: string; readonly to: string }
  /** s·value·(v(from) − v(to)) */
  | { readonly type: "capacitor"; readonly part: string; readonly value: number; readonly from: string; readonly to: string }
  /** sign·I(part): an inductor's, an op amp's or the source's own current */
  | { readonly type: "branch"; readonly part: string; readonly sign: 1 | -1 };

/** Kirchhoff's sum at a node: every term together is 0. */
export interface NodeEquation {
  readonly node: string;
  readonly terms: readonly CurrentTerm[];
}

/** The law of a branch whose current is an unknown of its own. */
export type BranchEquation =
  /** v(from) − v(to) = s·value·I */
  | { readonly type: "inductor"; readonly part: string; readonly value: number; readonly from: string; readonly to: string }
  /** v(plus) = value */
  | { readonly type: "emf"; readonly part: string; readonly value: number; readonly plus: string }
  /** ideal: v(plus) = v(minus); else (v(out) + outputR·I)/A(s) = v(plus) − v(minus), 1/A = 1/openLoopGain + s/(2π·gainBandwidth) */
  | { readonly type: "opAmp"; readonly part: string; readonly model: OpAmpModel | "ideal"; readonly plus: string; readonly minus: string; readonly out: string };

/** The equations that the nodal solver solves, as sums with named parts. */
export interface BoardEquations {
  readonly nodes: readonly NodeEquation[];
  readonly branches: readonly BranchEquation[];
  /** The node whose voltage, with 1 V at the source, is the response. */
  readonly output: string;
}

/** Writes the node equations of a board from its netlist: one Kirchhoff sum a node but ground, one law a branch. */
export function boardEquations(board: Board, opts: ValueOpts = {}): BoardEquations {
  return netlistEquations(expandBoard(board, opts));
}

function netlistEquations(netlist: Netlist): BoardEquations {
  const name = (node: number): string => netlist.nodeNames[node];
  const terms = new Map<number, CurrentTerm[]>(netlist.nodeNames.map((_, node) => [node, []]));
  const branches: BranchEquation[] = [];
  const add = (node: number, term: CurrentTerm): void => void terms.get(node)!.push(term);
  const across = (type: "resistor" | "capacitor", part: string, value: number, a: number, b: number): void => {
    add(a, { type, part, value, from: name(a), to: name(b) });
    add(b, { type, part, value, from: name(b), to: name(a) });
  };
  for (const e of netlist.elements) {
    if (e.type === "resistor" || e.type === "capacitor") across(e.type, e.detail === undefined ? e.source : `${e.source}.${e.detail}`, e.value, e.a, e.b);
    else if (e.type === "inductor") {
      add(e.a, { type: "branch", part: e.source, sign: 1 });
      add(e.b, { type: "branch", part: e.source, sign: -1 });
      branches.push({ type: "inductor", part: e.source, value: e.value, from: name(e.a), to: name(e.b) });
    } else if (e.type === "emf") {
      add(e.plus, { type: "branch", part: e.source, sign: -1 });
      branches.push({ type: "emf", part: e.source, value: e.value, plus: name(e.plus) });
    } else {
      add(e.out, { type: "branch", part: e.source, sign: -1 });
      if (e.model !== "ideal") across("resistor", `${e.source}.inputR`, e.model.inputR, e.plus, e.minus);
      branches.push({ type: "opAmp", part: e.source, model: e.model, plus: name(e.plus), minus: name(e.minus), out: name(e.out) });
    }
  }
  const nodes = [...terms].filter(([node]) => node !== GROUND).map(([node, list]) => ({ node: name(node), terms: list }));
  return { nodes, branches, output: name(netlist.output) };
}

export interface ComplexValue {
  readonly re: number;
  readonly im: number;
}

/** The unknowns of the node equations at one frequency: volts at every node, amperes in every branch, for 1 V at the source. */
export interface SolvedEquations {
  readonly frequency: number;
  readonly volts: ReadonlyMap<string, ComplexValue>;
  readonly amperes: ReadonlyMap<string, ComplexValue>;
}

/** Solves the node equations at a frequency, Hz. @throws RangeError where they have no unique or no finite solution */
export function solveEquations(board: Board, frequency: number, opts: ValueOpts = {}): SolvedEquations {
  const { size, conductance, storage, excitation, unknowns } = describeNetlist(expandBoard(board, opts));
  const lu = new ComplexLu(size);
  lu.re.set(conductance);
  for (let i = 0; i < size * size; i++) lu.im[i] = 2 * Math.PI * frequency * storage[i];
  if (!lu.factor()) throw new RangeError(`the node equations have no unique solution at ${frequency.toPrecision(4)} Hz`);
  const re = excitation.slice();
  const im = new Float64Array(size);
  lu.solve(re, im);
  if (!re.every(Number.isFinite) || !im.every(Number.isFinite)) throw new RangeError(`the node equations have no finite solution at ${frequency.toPrecision(4)} Hz`);
  const volts = new Map<string, ComplexValue>([["ground", { re: 0, im: 0 }]]);
  const amperes = new Map<string, ComplexValue>();
  unknowns.forEach((unknown, i) => {
    const branch = /^I\((.*)\)$/s.exec(unknown);
    if (branch) amperes.set(branch[1], { re: re[i], im: im[i] });
    else volts.set(unknown, { re: re[i], im: im[i] });
  });
  return { frequency, volts, amperes };
}

/** The current of a term in amperes, from solved unknowns. */
export function termCurrent(term: CurrentTerm, solved: SolvedEquations): ComplexValue {
  if (term.type === "branch") {
    const { re, im } = solved.amperes.get(term.part)!;
    return { re: term.sign * re, im: term.sign * im };
  }
  const [a, b] = [solved.volts.get(term.from)!, solved.volts.get(term.to)!];
  const [re, im] = [a.re - b.re, a.im - b.im];
  if (term.type === "resistor") return { re: re / term.value, im: im / term.value };
  const susceptance = 2 * Math.PI * solved.frequency * term.value;
  return { re: -susceptance * im, im: susceptance * re };
}

import type { Board } from "../net/board.ts";
import { expandBoard } from "../net/expand.ts";
import { GROUND, type Element, type Netlist } from "../net/netlist.ts";
import { describeNetlist } from "../net/nodal.ts";
import type { ValueOpts } from "../net/values.ts";
import { solveWithRank } from "../num/rank-solve.ts";

/** A range of steady voltages, V; both ends equal where the voltage is known. */
export interface DcRange {
  readonly low: number;
  readonly high: number;
}

export interface DcNode {
  readonly name: string;
  /** V against ground; null where nothing but leakage sets it. */
  readonly volts: number | null;
}

/** A capacitor or resistor with the steady voltage from its end `a` to its end `b`. */
export interface DcPart extends DcRange {
  /** `block.role`. */
  readonly source: string;
  readonly type: "capacitor" | "resistor";
  readonly detail?: string;
  readonly value: number;
  /** Names of the nodes at its ends. */
  readonly a: string;
  readonly b: string;
}

export interface DcOutput {
  /** `block.opAmp`. */
  readonly source: string;
  /** V at its output pin; null where undefined. */
  readonly volts: number | null;
  /** What the output can reach: the rails less the swing loss. */
  readonly reach: DcRange;
}

/** The board at rest. */
export interface DcPoint {
  readonly netlist: Netlist;
  readonly rails: DcRange;
  /** By node number of the netlist. */
  readonly nodes: readonly DcNode[];
  readonly parts: readonly DcPart[];
  readonly outputs: readonly DcOutput[];
}

/** The supply rails against ground, V. */
export function railsOf(board: Board): DcRange {
  const { supply } = board.project;
  return supply.kind === "split" ? { low: -supply.negative, high: supply.positive } : { low: 0, high: supply.voltage };
}

/**
 * The board at rest: capacitors open, inductors as their winding, the EMF at 0, the supply's divider fed from its rail,
 * op amps with their open-loop gain and neither offset nor bias current.
 *
 * A node is undefined where resistors, supplies and feedback leave it open, so that leakage alone would set it (an input
 * behind a capacitor without a resistor to the reference). What counts is the circuit with ideal op amps: one that only
 * the finite gain of an op amp pins down drifts to a rail in practice. An undefined node may be anywhere between the
 * rails, and the parts at it get that whole range.
 */
export function dcPoint(board: Board, opts: ValueOpts = {}): DcPoint {
  const netlist = expandBoard(board, opts);
  const rails = railsOf(board);
  const ideal = solveAtRest(board, { ...netlist, elements: netlist.elements.map((e): Element => (e.type === "opAmp" ? { ...e, model: "ideal" } : e)) });
  const real = solveAtRest(board, netlist);
  const volts = netlist.nodeNames.map((_, node) => {
    if (node === GROUND) return 0;
    const isKnown = ideal.isConsistent && real.isConsistent && !ideal.isOpen[node - 1] && !real.isOpen[node - 1];
    return isKnown ? real.x[node - 1] : null;
  });
  const rangeOf = (node: number): DcRange => {
    const known = volts[node];
    return known === null ? rails : { low: known, high: known };
  };
  const parts = netlist.elements.flatMap((e): DcPart[] => {
    if (e.type !== "capacitor" && e.type !== "resistor") return [];
    const [a, b] = [rangeOf(e.a), rangeOf(e.b)];
    const isFed = e.source === "reference.upperR";
    return [{
      source: e.source, type: e.type, value: e.value, ...(e.detail === undefined ? {} : { detail: e.detail }),
      a: netlist.nodeNames[e.a], b: isFed ? "supply" : netlist.nodeNames[e.b],
      low: a.low - (isFed ? rails.high : b.high), high: a.high - (isFed ? rails.high : b.low),
    }];
  });
  const outputs = netlist.elements.flatMap((e): DcOutput[] => {
    if (e.type !== "opAmp") return [];
    const loss = e.model === "ideal" ? 0 : (e.model.swingLoss ?? 0);
    return [{ source: e.source, volts: volts[e.out], reach: { low: rails.low + loss, high: rails.high - loss } }];
  });
  return { netlist, rails, nodes: netlist.nodeNames.map((name, node) => ({ name, volts: volts[node] })), parts, outputs };
}

function solveAtRest(board: Board, netlist: Netlist): ReturnType<typeof solveWithRank> {
  // With s = 0 the descriptor system is the circuit at rest: its storage matrix has dropped out.
  const { conductance, size } = describeNetlist(netlist);
  const feed = new Float64Array(size);
  const { supply } = board.project;
  if (supply.kind === "single") {
    for (const e of netlist.elements) if (e.type === "resistor" && e.source === "reference.upperR" && e.a !== GROUND) feed[e.a - 1] += supply.voltage / e.value;
  }
  return solveWithRank(conductance, feed);
}

/** Which end of a capacitor is positive at rest, by its node's name; null where neither is, or where it is not known. */
export function positiveEnd(part: Pick<DcPart, "a" | "b" | "low" | "high">): string | null {
  if (part.low >= 0 && part.high > NO_VOLTAGE) return part.a;
  return part.high <= 0 && part.low < -NO_VOLTAGE ? part.b : null;
}

/** Below this, V, a steady voltage counts as none. */
const NO_VOLTAGE = 0.05;

import { ComplexLu } from "../num/complex-lu.ts";
import { GROUND, type Netlist } from "./netlist.ts";
import type { TransferColumns } from "./transfer.ts";

/**
 * The netlist as a descriptor system (G + s·C)·x = b: modified nodal analysis (Ho, Ruehli and Brennan, IEEE Trans.
 * Circuits Syst. 22(6), 1975). Unknowns: the node voltages but ground, then one branch current for every inductor,
 * op amp and EMF. Both matrices are n×n, real and row-major.
 *
 * An op amp's branch current I leaves its pin; its equation is (v_out + outputR·I)/A = v+ − v− with
 * 1/A = 1/openLoopGain + s/(2π·gainBandwidth), which is linear in s and turns into the nullor v+ = v− when ideal.
 */
export interface Descriptor {
  /** C as a sum of one term a reactive element: value·u·vᵀ, with u and v given as [index, factor] pairs. */
  readonly storageTerms: readonly StorageTerm[];
  readonly size: number;
  readonly conductance: Float64Array;
  readonly storage: Float64Array;
  readonly excitation: Float64Array;
  /** Index of the unknown that is the response, −1 where the output is ground itself. */
  readonly outputIndex: number;
  /** What each unknown is: a node's name, or `I(part)`. */
  readonly unknowns: readonly string[];
}

export type SparseVector = readonly (readonly [index: number, factor: number])[];

/** A capacitor, an inductor or an op amp's pole. */
export interface StorageTerm {
  readonly source: string;
  readonly value: number;
  readonly u: SparseVector;
  readonly v: SparseVector;
}

/** Stamps a netlist into its descriptor matrices. */
export function describeNetlist(netlist: Netlist): Descriptor {
  const nodes = netlist.nodeCount - 1;
  const branches = netlist.elements.filter((e) => e.type === "inductor" || e.type === "opAmp" || e.type === "emf");
  const size = nodes + branches.length;
  const conductance = new Float64Array(size * size);
  const storage = new Float64Array(size * size);
  const excitation = new Float64Array(size);
  const add = (matrix: Float64Array, row: number, column: number, value: number): void => {
    if (row >= 0 && column >= 0) matrix[row * size + column] += value;
  };
  const admittance = (matrix: Float64Array, a: number, b: number, value: number): void => {
    add(matrix, a, a, value);
    add(matrix, b, b, value);
    add(matrix, a, b, -value);
    add(matrix, b, a, -value);
  };
  const storageTerms: StorageTerm[] = [];
  const store = (source: string, value: number, u: SparseVector, v: SparseVector): void => {
    const kept = [u, v].map((vector) => vector.filter(([index, factor]) => index >= 0 && factor !== 0));
    storageTerms.push({ source, value, u: kept[0], v: kept[1] });
    for (const [row, a] of kept[0]) for (const [column, b] of kept[1]) storage[row * size + column] += value * a * b;
  };
  const unknowns = [...netlist.nodeNames.slice(1), ...branches.map((e) => `I(${e.source})`)];
  let branch = nodes;
  for (const element of netlist.elements) {
    if (element.type === "resistor") admittance(conductance, element.a - 1, element.b - 1, 1 / element.value);
    else if (element.type === "capacitor") {
      const across: SparseVector = [[element.a - 1, 1], [element.b - 1, -1]];
      store(element.source, element.value, across, across);
    }
    else if (element.type === "inductor") {
      const [a, b] = [element.a - 1, element.b - 1];
      add(conductance, a, branch, 1);
      add(conductance, b, branch, -1);
      add(conductance, branch, a, 1);
      add(conductance, branch, b, -1);
      store(element.source, -element.value, [[branch, 1]], [[branch, 1]]);
      branch++;
    } else if (element.type === "emf") {
      add(conductance, element.plus - 1, branch, -1);
      add(conductance, branch, element.plus - 1, 1);
      excitation[branch] = element.value;
      branch++;
    } else {
      const [plus, minus, out] = [element.plus - 1, element.minus - 1, element.out - 1];
      add(conductance, out, branch, -1);
      add(conductance, branch, plus, -1);
      add(conductance, branch, minus, 1);
      if (element.model !== "ideal") {
        const { openLoopGain, gainBandwidth, inputR, outputR } = element.model;
        admittance(conductance, plus, minus, 1 / inputR);
        add(conductance, branch, out, 1 / openLoopGain);
        add(conductance, branch, branch, outputR / openLoopGain);
        store(element.source, 1 / (2 * Math.PI * gainBandwidth), [[branch, 1]], [[out, 1], [branch, outputR]]);
      }
      branch++;
    }
  }
  return { size, conductance, storage, storageTerms, excitation, outputIndex: netlist.output === GROUND ? -1 : netlist.output - 1, unknowns };
}

/**
 * The reference solver: a full complex LU at every frequency, H = v(output)/EMF and, where `out.slopeRe` is there,
 * dH/ds = −eᵀA⁻¹·C·x from the same factors. Cost grows with the cube of the unknowns.
 * @param omega rad/s, all above 0
 * @throws RangeError where the board has no unique solution at a frequency
 */
export function nodalTransfer(netlist: Netlist, omega: Float64Array, out: TransferColumns): void {
  const { size: n, conductance, storage, excitation, outputIndex } = describeNetlist(netlist);
  const lu = new ComplexLu(n);
  const xRe = new Float64Array(n);
  const xIm = new Float64Array(n);
  const dRe = new Float64Array(n);
  const dIm = new Float64Array(n);
  for (let point = 0; point < omega.length; point++) {
    const w = omega[point];
    lu.re.set(conductance);
    for (let i = 0; i < n * n; i++) lu.im[i] = w * storage[i];
    if (!lu.factor()) throw new RangeError(`the node equations have no unique solution at ${(w / 2 / Math.PI).toPrecision(4)} Hz`);
    xRe.set(excitation);
    xIm.fill(0);
    lu.solve(xRe, xIm);
    out.re[point] = outputIndex < 0 ? 0 : xRe[outputIndex];
    out.im[point] = outputIndex < 0 ? 0 : xIm[outputIndex];
    if (!out.slopeRe || !out.slopeIm) continue;
    for (let i = 0; i < n; i++) {
      let sr = 0;
      let si = 0;
      for (let j = 0; j < n; j++) {
        const c = storage[i * n + j];
        sr -= c * xRe[j];
        si -= c * xIm[j];
      }
      dRe[i] = sr;
      dIm[i] = si;
    }
    lu.solve(dRe, dIm);
    out.slopeRe[point] = outputIndex < 0 ? 0 : dRe[outputIndex];
    out.slopeIm[point] = outputIndex < 0 ? 0 : dIm[outputIndex];
  }
}

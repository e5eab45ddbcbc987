import { readFileSync } from "node:fs";
import * as fc from "fast-check";
import { LU, solve, Matrix } from "ml-matrix";
import { describe, expect, it } from "vitest";
import { dcPoint, positiveEnd, type DcPart } from "../../../core/analysis/dc.ts";
import { largestSwings } from "../../../core/analysis/swing.ts";
import { restoreProject } from "../../../core/model/restore.ts";
import { partsOf, type Project } from "../../../core/model/project.ts";
import { resolveBoard, type Board } from "../../../core/net/board.ts";
import { expandBoard } from "../../../core/net/expand.ts";
import type { Element, Netlist } from "../../../core/net/netlist.ts";
import { describeNetlist } from "../../../core/net/nodal.ts";
import { ComplexLu } from "../../../core/num/complex-lu.ts";
import { bandOf, boardArbitrary, oneBus } from "../../helpers/boards.ts";

const demo = (name: string): Board => resolveBoard(restoreProject(readFileSync(new URL(`../../../assets/demo/${name}.bandwright`, import.meta.url), "utf8")).project);
const part = (board: Board, source: string): DcPart => dcPoint(board).parts.find((p) => p.source === source)!;
const voltsOf = (board: Board, node: string): number | null => dcPoint(board).nodes.find((n) => n.name === node)!.volts;

const SINGLE: Project["supply"] = { kind: "single", voltage: 9, reference: { upperR: { value: 10e3 }, lowerR: { value: 10e3 }, bypassC: { value: 47e-6 } } };

function withInput(project: Project, parts: Readonly<Record<string, number>>): Project {
  return { ...project, blocks: project.blocks.map((b) => (b.id === "in" ? { ...b, parts: Object.fromEntries(Object.entries(parts).map(([role, value]) => [role, { value }])) } : b)) };
}

describe("a board at rest", () => {
  it("rests at the middle of one battery, with its coupling capacitors the right way round", () => {
    const board = demo("curlew-pedal");
    expect(voltsOf(board, "reference.divider")).toBeCloseTo(4.5, 3);
    for (const { volts } of dcPoint(board).outputs) expect(Math.abs(volts! - 4.5)).toBeLessThan(0.02);
    // The output's capacitor keeps 4.5 V from the load: + on the board's side; the input's: + inwards.
    const [input, output, level] = ["in.couplingC", "out.couplingC", "level.blockingC"].map((s) => part(board, s));
    expect(positiveEnd(input)).toBe("in.out");
    expect(input.low).toBeCloseTo(-4.5, 2);
    expect(positiveEnd(output)).toBe("out.series");
    expect(output.low).toBeCloseTo(4.5, 1);
    expect(positiveEnd(level)).toBe("level.w");
    expect(part(board, "reference.bypassC")).toMatchObject({ a: "reference.divider", b: "ground" });
    // Between the two sides of a gyrator there is no voltage to speak of.
    expect(positiveEnd(part(board, "b100.seriesC"))).toBeNull();
  });

  it("loads the divider with everything that hangs on it", () => {
    // Without a coupling capacitor, the input's resistor pulls at the reference through the source.
    const project = withInput({ ...oneBus([]), supply: SINGLE }, { sourceR: 1000, loadR: 9000 });
    const board = resolveBoard(project);
    const lower = 1 / (1 / 10e3 + 1 / 10e3);
    expect(voltsOf(board, "reference.divider")).toBeCloseTo((9 * lower) / (10e3 + lower), 9);
    expect(voltsOf(board, "in.out")).toBeCloseTo((9 * lower) / (10e3 + lower) / 10, 9);
    // A follower takes the load off.
    const followed = resolveBoard({ ...project, supply: { ...SINGLE, reference: { ...SINGLE.reference, opAmp: "ideal" } } });
    expect(voltsOf(followed, "reference.out")).toBeCloseTo(4.5, 9);
    expect(voltsOf(followed, "in.out")).toBeCloseTo(0.45, 9);
  });

  it("rests at ground on a split supply", () => {
    const { nodes, rails } = dcPoint(demo("saltmarsh-voice-channel"));
    expect(rails).toEqual({ low: -15, high: 15 });
    for (const { volts } of nodes) expect(volts).toBeCloseTo(0, 9);
  });

  it("names the nodes that nothing but leakage sets, and takes the worst for the capacitors at them", () => {
    const band = bandOf("b", "gyrator-section", { seriesC: 1e-7, seriesR: 470, gyratorC: 4e-9, gyratorR: 68e3 }, { opAmp: "TL072" });
    const project = withInput({ ...oneBus([band], { opAmp: "TL072" }), supply: SINGLE }, { sourceR: 100, couplingC: 1e-6 });
    const board = resolveBoard(project);
    const { nodes } = dcPoint(board);
    const open = nodes.filter((n) => n.volts === null).map((n) => n.name);
    expect(open).toEqual(expect.arrayContaining(["in.out", "eq.out", "eq.m", "eq.p", "b.w"]));
    expect(open).not.toContain("b.a");
    expect(voltsOf(board, "b.n")).toBeCloseTo(4.5, 3);
    // Source at 0 V, the other end anywhere from 0 to 9 V; the reference of the leg at 4.5 V.
    expect(part(board, "in.couplingC")).toMatchObject({ low: -9, high: 0 });
    expect(part(board, "b.seriesC").low).toBeCloseTo(-4.5, 2);
    expect(part(board, "b.seriesC").high).toBeCloseTo(4.5, 2);
    expect(positiveEnd(part(board, "in.couplingC"))).toBe("in.out");
    expect(positiveEnd(part(board, "b.seriesC"))).toBeNull();
  });

  it("is what a general solver makes of it with the supply as a source and capacitors as next to nothing, on random boards", () => {
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 2, mostInChain: 3 }), (project) => {
        const board = resolveBoard(project);
        const { netlist, nodes } = dcPoint(board);
        if (nodes.some((n) => n.volts === null)) return;
        const wanted = general(netlist, board);
        // Boards whose solution hangs on rounding prove nothing.
        if (wanted === null) return;
        for (const [node, { volts }] of nodes.entries()) if (node > 0) expect(Math.abs(volts! - wanted[node - 1])).toBeLessThan(1e-6 * Math.max(1, Math.abs(wanted[node - 1])));
      }),
      { numRuns: 150 },
    );
  });
});

/** Node voltages by ml-matrix: the supply is an EMF of its own, a capacitor a conductance of 1e-15 S. */
function general(netlist: Netlist, board: Board): number[] | null {
  const { supply } = board.project;
  const rail = netlist.nodeCount;
  const elements = netlist.elements.map((e): Element => {
    if (e.type === "capacitor") return { ...e, type: "resistor", value: 1e15 };
    if (e.type === "emf") return { ...e, value: 0 };
    return e.type === "resistor" && e.source === "reference.upperR" ? { ...e, b: rail } : e;
  });
  if (supply.kind === "single") elements.push({ type: "emf", plus: rail, value: supply.voltage, source: "supply" });
  const { size, conductance, excitation } = describeNetlist({ ...netlist, nodeCount: supply.kind === "single" ? rail + 1 : rail, nodeNames: [...netlist.nodeNames, "supply"].slice(0, supply.kind === "single" ? rail + 1 : rail), elements });
  const matrix = new Matrix(Array.from({ length: size }, (_, i) => [...conductance.subarray(i * size, i * size + size)]));
  if (new LU(matrix).isSingular()) return null;
  return solve(matrix, Matrix.columnVector([...excitation])).to1DArray();
}

describe("the largest signal across each part", () => {
  it("is what the node equations give at its frequency and setting, up to clipping", () => {
    for (const name of ["saltmarsh-voice-channel", "curlew-pedal"]) {
      const board = demo(name);
      const rails = name === "curlew-pedal" ? 4.5 : 15;
      const ids = board.chain.flatMap((item) => item.bands.map((b) => b.id));
      const standing = Object.fromEntries(board.chain.flatMap((item) => item.bands.map((b) => [b.id, b.slider!.position])));
      for (const swing of largestSwings(board).filter((s) => /seriesC|couplingC|gyratorC/.test(s.source))) {
        const [alone, end] = / alone /.test(swing.setting) ? [swing.setting.split(" ")[0], swing.setting.endsWith("boost") ? 1 : 0] : [null, 0.5];
        const everywhere = swing.setting === "every slider at full boost" ? 1 : swing.setting === "every slider at full cut" ? 0 : 0.5;
        const positions = swing.setting === "as it stands" ? standing : Object.fromEntries(ids.map((id) => [id, id === alone ? end : everywhere]));
        const net = expandBoard(board, { positions });
        const volts = phasors(net, swing.frequency);
        const across = (a: number, b: number): number => Math.hypot(volts.re[a] - volts.re[b], volts.im[a] - volts.im[b]);
        let input = rails;
        for (const e of net.elements) if (e.type === "opAmp" && e.model !== "ideal") input = Math.min(input, (rails - (e.model.swingLoss ?? 0)) / across(e.out, 0));
        const element = net.elements.find((e) => e.source === swing.source);
        if (element?.type !== "capacitor") throw new Error(`no capacitor ${swing.source}`);
        expect(swing.peak / (input * across(element.a, element.b)), `${swing.source} ${swing.setting}`).toBeCloseTo(1, 2);
      }
    }
  });

  it("grows with a stated input and keeps to it", () => {
    const board = demo("saltmarsh-voice-channel");
    const [one, two] = [1, 2].map((input) => largestSwings(board, { input }));
    for (const [i, swing] of one.entries()) expect(two[i].peak).toBeCloseTo(2 * swing.peak, 9);
  });

  it("leaves nothing out: no setting of the rule gives more at any of its frequencies", () => {
    const board = demo("curlew-pedal");
    const found = new Map(largestSwings(board, { input: 1 }).map((s) => [`${s.source} ${s.detail ?? ""}`, s.peak]));
    const ids = board.chain.flatMap((item) => item.bands.map((b) => b.id));
    for (const [k, id] of ids.entries()) {
      const net = expandBoard(board, { positions: Object.fromEntries(ids.map((other) => [other, other === id ? k % 2 : 0.5])) });
      for (const frequency of [5, 40_000]) {
        const volts = phasors(net, frequency);
        for (const e of net.elements) {
          if (e.type !== "capacitor") continue;
          const across = Math.hypot(volts.re[e.a] - volts.re[e.b], volts.im[e.a] - volts.im[e.b]);
          expect(across).toBeLessThanOrEqual(found.get(`${e.source} `)! * 1.005 + 1e-9);
        }
      }
    }
  });
});

function phasors(net: Netlist, frequency: number): { readonly re: Float64Array; readonly im: Float64Array } {
  const { size, conductance, storage, excitation } = describeNetlist(net);
  const lu = new ComplexLu(size);
  lu.re.set(conductance);
  for (let i = 0; i < size * size; i++) lu.im[i] = 2 * Math.PI * frequency * storage[i];
  expect(lu.factor()).toBe(true);
  const [re, im] = [Float64Array.from(excitation), new Float64Array(size)];
  lu.solve(re, im);
  return { re: Float64Array.from([0, ...re.subarray(0, net.nodeCount - 1)]), im: Float64Array.from([0, ...im.subarray(0, net.nodeCount - 1)]) };
}

describe("what the demos' parts have to bear", () => {
  it("has every part of the demos in it", () => {
    for (const name of ["curlew-pedal", "saltmarsh-voice-channel", "ferry-room-third-octaves"]) {
      const board = demo(name);
      const sources = new Set(largestSwings(board).map((s) => s.source));
      for (const block of board.project.blocks) for (const role of Object.keys(partsOf(block))) expect(sources).toContain(`${block.id}.${role}`);
    }
  });
});

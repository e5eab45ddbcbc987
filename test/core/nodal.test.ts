import * as fc from "fast-check";
import { complex, lusolve, type Complex } from "mathjs";
import { Matrix, solve } from "ml-matrix";
import { describe, expect, test, vi } from "vitest";
import { resolveBoard } from "../../core/net/board.ts";
import { expandBoard } from "../../core/net/expand.ts";
import { GROUND, NetlistBuilder, type Netlist } from "../../core/net/netlist.ts";
import { describeNetlist, nodalTransfer } from "../../core/net/nodal.ts";
import { transferColumns } from "../../core/net/transfer.ts";
import { runs } from "../fixtures/runs.ts";
import { boardArbitrary } from "../helpers/boards.ts";

vi.setConfig({ testTimeout: 30_000 });

interface Point {
  readonly re: number;
  readonly im: number;
}

/** G + jωC and the excitation, each row scaled to 1 at most: general-purpose solvers pivot by size alone. */
function system(netlist: Netlist, omega: number): { re: number[][]; im: number[][]; b: number[] } {
  const { size, conductance, storage, excitation } = describeNetlist(netlist);
  const rows = Array.from({ length: size }, (_, i) => {
    const re = [...conductance.subarray(i * size, (i + 1) * size)];
    const im = [...storage.subarray(i * size, (i + 1) * size)].map((c) => omega * c);
    const scale = Math.max(...re.map(Math.abs), ...im.map(Math.abs));
    return { re: re.map((x) => x / scale), im: im.map((x) => x / scale), b: excitation[i] / scale };
  });
  return { re: rows.map((r) => r.re), im: rows.map((r) => r.im), b: rows.map((r) => r.b) };
}

function byMathjs(netlist: Netlist, omega: number): Point {
  const { re, im, b } = system(netlist, omega);
  const x = lusolve(re.map((row, i) => row.map((value, j) => complex(value, im[i][j]))), b.map((value) => [complex(value, 0)])) as unknown as Complex[][];
  const [found] = x[describeNetlist(netlist).outputIndex];
  return { re: found.re, im: found.im };
}

/** The complex system as a real one of twice the size. */
function byMlMatrix(netlist: Netlist, omega: number): Point {
  const { re, im, b } = system(netlist, omega);
  const real = [...re.map((row, i) => [...row, ...im[i].map((x) => -x)]), ...im.map((row, i) => [...row, ...re[i]])];
  const x = solve(new Matrix(real), Matrix.columnVector([...b, ...b.map(() => 0)]));
  const at = describeNetlist(netlist).outputIndex;
  return { re: x.get(at, 0), im: x.get(b.length + at, 0) };
}

function byNodal(netlist: Netlist, omega: number): Point & { readonly slopeRe: number; readonly slopeIm: number } {
  const out = transferColumns(1, true);
  nodalTransfer(netlist, new Float64Array([omega]), out);
  return { re: out.re[0], im: out.im[0], slopeRe: out.slopeRe![0], slopeIm: out.slopeIm![0] };
}

const distance = (a: Point, b: Point): number => Math.hypot(a.re - b.re, a.im - b.im) / Math.hypot(b.re, b.im);

describe("the node equations of random boards, against general-purpose linear algebra", () => {
  const board = fc.tuple(boardArbitrary({ mostBands: 3, mostInChain: 3 }), fc.integer({ min: 1000, max: 4600 }));

  test.each([
    ["mathjs lusolve", byMathjs],
    ["ml-matrix solve", byMlMatrix],
  ])("%s", (_name, solveOther) => {
    fc.assert(
      fc.property(board, ([project, at]) => {
        const netlist = expandBoard(resolveBoard(project));
        const omega = 2 * Math.PI * 10 ** (at / 1000);
        // Both lose digits to the condition of the matrix; what is left of sixteen is held to eight.
        expect(distance(byNodal(netlist, omega), solveOther(netlist, omega))).toBeLessThan(1e-8);
      }),
      runs(80),
    );
  });
});

describe("circuits solved by hand", () => {
  const OMEGA = 2 * Math.PI * 1000;

  /** A netlist from a 1 V source on the node named first. */
  function net(build: (net: NetlistBuilder, source: number, output: number) => void): Netlist {
    const builder = new NetlistBuilder();
    const source = builder.node("source");
    const output = builder.node("output");
    builder.emf(source, 1, "emf");
    build(builder, source, output);
    return builder.build(output);
  }

  function expectTransfer(found: Point, re: number, im: number): void {
    expect(Math.hypot(found.re - re, found.im - im)).toBeLessThan(1e-13 * Math.max(1, Math.hypot(re, im)));
  }

  test("R–C low pass: 1/(1 + sRC), slope −RC/(1 + sRC)²", () => {
    const [r, c] = [10e3, 22e-9];
    const found = byNodal(net((n, source, output) => {
      n.resistor(source, output, r, "r");
      n.capacitor(output, GROUND, c, "c");
    }), OMEGA);
    const x = OMEGA * r * c;
    expectTransfer(found, 1 / (1 + x * x), -x / (1 + x * x));
    // (1 + jx)² = 1 − x² + 2jx
    const norm = (1 + x * x) ** 2;
    expect(found.slopeRe / ((-r * c * (1 - x * x)) / norm)).toBeCloseTo(1, 12);
    expect(found.slopeIm / ((r * c * 2 * x) / norm)).toBeCloseTo(1, 12);
  });

  test("L–R high pass: sL/(R + sL)", () => {
    const [r, l] = [1e3, 0.2];
    const found = byNodal(net((n, source, output) => {
      n.resistor(source, output, r, "r");
      n.inductor(output, GROUND, l, "l");
    }), OMEGA);
    const x = (OMEGA * l) / r;
    expectTransfer(found, (x * x) / (1 + x * x), x / (1 + x * x));
  });

  test("non-inverting amplifier with a one-pole op amp: (1 + Rf/Rg) less what the loop gain leaves", () => {
    const model = { openLoopGain: 1e5, gainBandwidth: 1e6, inputR: 1e15, outputR: 0 };
    const [rf, rg] = [9e3, 1e3];
    const found = byNodal(net((n, source, output) => {
      const minus = n.node("minus");
      n.resistor(output, minus, rf, "rf");
      n.resistor(minus, GROUND, rg, "rg");
      n.opAmp(source, minus, output, model, "amp");
    }), OMEGA);
    // H = A/(1 + A/10) with 1/A = 1e-5 + j·1e-3 at 1 kHz: 1/(0.1 + 1/A)
    const [re, im] = [0.1 + 1e-5, 1e-3];
    expectTransfer(found, re / (re * re + im * im), -im / (re * re + im * im));
  });

  test("output resistance and input resistance: an open-loop amplifier into a load", () => {
    const model = { openLoopGain: 100, gainBandwidth: 1e12, inputR: 2e3, outputR: 50 };
    const found = byNodal(net((n, source, output) => {
      const plus = n.node("plus");
      n.resistor(source, plus, 3e3, "rs");
      n.opAmp(plus, GROUND, output, model, "amp");
      n.resistor(output, GROUND, 150, "load");
    }), OMEGA);
    // 2/5 of the source across the inputs, ×100, 150/200 of it on the load; the pole at 10 GHz shows in the tenth digit.
    expect(found.re).toBeCloseTo(0.4 * 100 * 0.75, 8);
  });

  test("an ideal op amp is a nullor: an integrator gives −1/(sRC)", () => {
    const [r, c] = [10e3, 10e-9];
    const found = byNodal(net((n, source, output) => {
      const minus = n.node("minus");
      n.resistor(source, minus, r, "r");
      n.capacitor(minus, output, c, "c");
      n.opAmp(GROUND, minus, output, "ideal", "amp");
    }), OMEGA);
    expectTransfer(found, 0, 1 / (OMEGA * r * c));
  });

  test("an output at ground is 0, slope and all", () => {
    const builder = new NetlistBuilder();
    const source = builder.node("source");
    builder.emf(source, 1, "emf");
    builder.resistor(source, GROUND, 1e3, "r");
    expect(byNodal(builder.build(GROUND), OMEGA)).toEqual({ re: 0, im: 0, slopeRe: 0, slopeIm: 0 });
  });

  test("two sources on one node have no unique solution, and the frequency is named", () => {
    const twice = net((n, source, output) => {
      n.emf(source, 2, "second");
      n.resistor(source, output, 1e3, "r");
    });
    expect(() => byNodal(twice, OMEGA)).toThrow(/no unique solution at 1000 Hz/);
  });

  test("every unknown has its name", () => {
    const described = describeNetlist(net((n, source, output) => {
      n.inductor(source, output, 1, "b1.inductor");
      n.resistor(output, GROUND, 1, "r");
    }));
    expect(described.unknowns).toEqual(["source", "output", "I(emf)", "I(b1.inductor)"]);
    expect(described.outputIndex).toBe(1);
  });
});

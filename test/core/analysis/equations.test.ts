import * as fc from "fast-check";
import katex from "katex";
import { complex, lusolve, type Complex } from "mathjs";
import { describe, expect, test, vi } from "vitest";
import { blockIds, boardReport } from "../../../core/analysis/equation-report.ts";
import { branchEquationText, complexText, lawSteps, nodeEquationText, opAmpGainText, stageTransferText } from "../../../core/analysis/equation-text.ts";
import { idealTransfer } from "../../../core/analysis/ideal-transfer.ts";
import { lawAccounts } from "../../../core/analysis/laws.ts";
import { boardEquations, solveEquations, termCurrent, type BoardEquations } from "../../../core/analysis/node-equations.ts";
import type { Block, Project } from "../../../core/model/project.ts";
import { resolveBoard, type Board } from "../../../core/net/board.ts";
import { expandBoard } from "../../../core/net/expand.ts";
import { compileBoard, Sweep } from "../../../core/net/star.ts";
import { transferColumns } from "../../../core/net/transfer.ts";
import { DEMOS } from "../../fixtures/demos.ts";
import { preciseTransfer } from "../../fixtures/precise.ts";
import { runs } from "../../fixtures/runs.ts";
import { bandOf, boardArbitrary, oneBus, SPLIT, TABLE_OP_AMP, tenBandBoard } from "../../helpers/boards.ts";

vi.setConfig({ testTimeout: 60_000 });

interface Point {
  readonly re: number;
  readonly im: number;
}

const NEPER = 20 / Math.LN10;
/** How far two transfers are apart, dB, phase included. */
const apart = (a: Point, b: Point): number => NEPER * (Math.hypot(a.re - b.re, a.im - b.im) / Math.hypot(b.re, b.im));

function star(board: Board, frequency: number): Point {
  const compiled = compileBoard(board);
  const out = transferColumns(1, false);
  new Sweep(compiled, new Float64Array([2 * Math.PI * frequency])).run(compiled.positions, out);
  return { re: out.re[0], im: out.im[0] };
}

/** A linear system in named unknowns, assembled from the structured equations and from nothing else. */
function assemble({ nodes, branches, output }: BoardEquations, frequency: number): { rows: [number, number][][]; right: number[]; output: number } {
  const unknowns = [...nodes.map((n) => `v ${n.node}`), ...branches.map((b) => `i ${b.part}`)];
  const at = new Map(unknowns.map((name, i) => [name, i]));
  const w = 2 * Math.PI * frequency;
  const rows = unknowns.map(() => unknowns.map((): [number, number] => [0, 0]));
  const right = unknowns.map(() => 0);
  const add = (row: number, name: string, re: number, im = 0): void => {
    if (name === "v ground") return;
    const entry = rows[row][at.get(name)!];
    entry[0] += re;
    entry[1] += im;
  };
  nodes.forEach(({ terms }, row) => {
    for (const term of terms) {
      if (term.type === "branch") add(row, `i ${term.part}`, term.sign);
      else {
        const [re, im] = term.type === "resistor" ? [1 / term.value, 0] : [0, w * term.value];
        add(row, `v ${term.from}`, re, im);
        add(row, `v ${term.to}`, -re, -im);
      }
    }
  });
  branches.forEach((branch, i) => {
    const row = nodes.length + i;
    if (branch.type === "emf") {
      add(row, `v ${branch.plus}`, 1);
      right[row] = branch.value;
    } else if (branch.type === "inductor") {
      add(row, `v ${branch.from}`, 1);
      add(row, `v ${branch.to}`, -1);
      add(row, `i ${branch.part}`, 0, -w * branch.value);
    } else {
      add(row, `v ${branch.plus}`, -1);
      add(row, `v ${branch.minus}`, 1);
      if (branch.model === "ideal") return;
      const [e0, e1] = [1 / branch.model.openLoopGain, frequency / branch.model.gainBandwidth];
      add(row, `v ${branch.out}`, e0, e1);
      add(row, `i ${branch.part}`, e0 * branch.model.outputR, e1 * branch.model.outputR);
    }
  });
  for (const [i, row] of rows.entries()) {
    const scale = 1 / Math.max(...row.map(([re, im]) => Math.abs(re) + Math.abs(im)));
    for (const entry of row) [entry[0], entry[1]] = [entry[0] * scale, entry[1] * scale];
    right[i] *= scale;
  }
  return { rows, right, output: at.get(`v ${output}`)! };
}

function byMathjs(equations: BoardEquations, frequency: number): Point {
  const { rows, right, output } = assemble(equations, frequency);
  const x = lusolve(rows.map((row) => row.map(([re, im]) => complex(re, im))), right.map((b) => [complex(b, 0)])) as unknown as Complex[][];
  return { re: x[output][0].re, im: x[output][0].im };
}

/** Plain elimination for boards that are too large for mathjs's objects. */
function byElimination(equations: BoardEquations, frequency: number): Point {
  const { rows, right, output } = assemble(equations, frequency);
  const n = rows.length;
  const b = right.map((x): [number, number] => [x, 0]);
  for (let k = 0; k < n; k++) {
    let best = k;
    for (let i = k + 1; i < n; i++) if (Math.hypot(...rows[i][k]) > Math.hypot(...rows[best][k])) best = i;
    [rows[k], rows[best]] = [rows[best], rows[k]];
    [b[k], b[best]] = [b[best], b[k]];
    const [pr, pi] = rows[k][k];
    const norm = pr * pr + pi * pi;
    // Every other row, so that what is left is a diagonal.
    for (let i = 0; i < n; i++) {
      const [ar, ai] = rows[i][k];
      if (i === k || (ar === 0 && ai === 0)) continue;
      const [fr, fi] = [(ar * pr + ai * pi) / norm, (ai * pr - ar * pi) / norm];
      const take = (to: [number, number], [ur, ui]: readonly [number, number]): void => {
        to[0] -= fr * ur - fi * ui;
        to[1] -= fr * ui + fi * ur;
      };
      for (let j = k; j < n; j++) take(rows[i][j], rows[k][j]);
      take(b[i], b[k]);
    }
  }
  const [[pr, pi], [br, bi]] = [rows[output][output], b[output]];
  const norm = pr * pr + pi * pi;
  return { re: (br * pr + bi * pi) / norm, im: (bi * pr - br * pi) / norm };
}

describe("the equations alone", () => {
  test.each(DEMOS)("of %s give the response to 1e-9 dB", (_name, project) => {
    const board = resolveBoard(project);
    const equations = boardEquations(board);
    for (const f of [20, 440, 3150, 18e3]) expect(apart(byElimination(equations, f), star(board, f))).toBeLessThan(1e-9);
  });

  test.each([["mathjs", byMathjs, 2, 25], ["plain elimination", byElimination, 5, 80]] as const)("of random boards too, solved by %s", (_name, solve, mostInChain, count) => {
    let arbitrated = 0;
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 3, mostInChain }), fc.integer({ min: 1000, max: 4600 }), (project, at) => {
        const board = resolveBoard(project);
        const f = 10 ** (at / 1000);
        const fast = star(board, f);
        if (apart(solve(boardEquations(board), f), fast) < 1e-9) return;
        // Elimination in doubles loses digits on a board in some hundreds; the response then has to stand in 44.
        arbitrated += 1;
        expect(apart(fast, preciseTransfer(expandBoard(board), 2 * Math.PI * f))).toBeLessThan(1e-9);
        expect(apart(solve(boardEquations(board), f), fast)).toBeLessThan(1e-4);
      }),
      runs(count),
    );
    expect(arbitrated).toBeLessThanOrEqual(count / 20);
  });

  test("a value changed in one term is seen", () => {
    const board = resolveBoard(oneBus([bandOf("b", "level-section", { seriesR: 680 }, { slider: { position: 1 } })]));
    const equations = boardEquations(board);
    const wrong: BoardEquations = { ...equations, nodes: equations.nodes.map((n) => ({ ...n, terms: n.terms.map((t) => (t.part === "b.seriesR" && t.type === "resistor" ? { ...t, value: 681 } : t)) })) };
    expect(apart(byMathjs(equations, 1000), star(board, 1000))).toBeLessThan(1e-9);
    expect(apart(byMathjs(wrong, 1000), star(board, 1000))).toBeGreaterThan(1e-3);
  });

  test("solved, every Kirchhoff sum is rounding beside its currents, and the output is the response", () => {
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 3, mostInChain: 4 }), fc.integer({ min: 1000, max: 4600 }), (project, at) => {
        const board = resolveBoard(project);
        const frequency = 10 ** (at / 1000);
        const solved = solveEquations(board, frequency);
        const { nodes, output } = boardEquations(board);
        // Volts are right to rounding beside the largest volt of the board, and so are the currents of admittances between them.
        const largest = Math.max(...[...solved.volts.values()].map((v) => Math.hypot(v.re, v.im)));
        for (const { terms } of nodes) {
          const currents = terms.map((t) => termCurrent(t, solved));
          const size = terms.reduce((sum, t, i) => sum + Math.hypot(currents[i].re, currents[i].im) + (t.type === "branch" ? 0 : largest * (t.type === "resistor" ? 1 / t.value : 2 * Math.PI * frequency * t.value)), 0);
          expect(Math.hypot(currents.reduce((s, c) => s + c.re, 0), currents.reduce((s, c) => s + c.im, 0))).toBeLessThanOrEqual(1e-12 * size);
        }
        expect(apart(solved.volts.get(output)!, star(board, frequency))).toBeLessThan(1e-4);
      }),
      runs(100),
    );
  });

  test("stand once for every node and branch, and carry every part at both its ends", () => {
    fc.assert(
      fc.property(boardArbitrary(), (project) => {
        const board = resolveBoard(project);
        const netlist = expandBoard(board);
        const { nodes, branches } = boardEquations(board);
        expect(nodes.map((n) => n.node)).toEqual(netlist.nodeNames.slice(1));
        expect(new Set(nodes.map((n) => n.node)).size).toBe(nodes.length);
        expect(branches.map((b) => b.part)).toEqual(netlist.elements.filter((e) => e.type === "opAmp" || e.type === "emf" || e.type === "inductor").map((e) => e.source));
        for (const e of netlist.elements) {
          if (e.type !== "resistor" && e.type !== "capacitor") continue;
          const name = e.detail === undefined ? e.source : `${e.source}.${e.detail}`;
          const ends = [e.a, e.b].filter((node) => node !== 0).map((node) => netlist.nodeNames[node]);
          expect(nodes.filter((n) => n.terms.some((t) => t.part === name && t.type === e.type && t.from === n.node)).map((n) => n.node).sort()).toEqual(ends.sort());
        }
      }),
      runs(80),
    );
  });
});

describe("the closed form on paper", () => {
  /** The same board with all op amps ideal and a stiff reference. */
  const idealised = (project: Project): Project => ({ ...project, supply: SPLIT, blocks: project.blocks.map((b) => (b.opAmp === undefined ? b : { ...b, opAmp: "ideal" })) });

  test.each(DEMOS)("of %s is the response with ideal op amps to 1e-9 dB", (_name, project) => {
    const board = resolveBoard(project);
    const ideal = resolveBoard(idealised(project));
    for (const f of [10, 31.5, 440, 3150, 40e3]) expect(apart(idealTransfer(board, f).total, star(ideal, f))).toBeLessThan(1e-9);
  });

  test("of random boards too: dead ends that load, missing parts, stages one behind the other", () => {
    const seen = { feedbackC: 0, noLoad: 0, deadEnd: 0, unbuffered: 0 };
    fc.assert(
      fc.property(boardArbitrary(), fc.integer({ min: 1000, max: 4600 }), (project, at) => {
        const board = resolveBoard(project);
        const f = 10 ** (at / 1000);
        const transfer = idealTransfer(board, f);
        expect(apart(transfer.total, star(resolveBoard(idealised(project)), f))).toBeLessThan(1e-9);
        expect(transfer.stages.map((s) => s.id)).toEqual(board.chain.filter((i) => i.block.kind === "boost-cut-stage").map((i) => i.block.id));
        if (project.blocks.some((b) => b.parts?.feedbackC)) seen.feedbackC += 1;
        if (!board.chain[0].block.parts?.loadR) seen.noLoad += 1;
        if (board.chain.some((_, i) => i !== board.output && !board.chain.some((item) => item.driver === i))) seen.deadEnd += 1;
        if (board.chain.some((i) => i.driver > 0 && i.block.kind === "boost-cut-stage" && board.chain[i.driver].block.kind === "boost-cut-stage")) seen.unbuffered += 1;
      }),
      runs(300),
    );
    for (const count of Object.values(seen)) expect(count).toBeGreaterThan(20);
  });

  test("by hand: one level band at full boost is 1 + feedbackR/seriesR", () => {
    const { total, stages, input, output } = idealTransfer(resolveBoard(oneBus([bandOf("v", "level-section", { seriesR: 600 }, { slider: { position: 1 } })], { sourceR: 1e-9, outputSeriesR: 1e3, loadR: 3e3 })), 1000);
    expect(stages[0].transfer.re).toBeCloseTo(6, 12);
    expect([input.re, output.re]).toEqual([expect.closeTo(1, 9), 0.75]);
    expect(total.re).toBeCloseTo(4.5, 9);
    expect(stages[0].bands[0]).toMatchObject({ id: "v", boostR: 0, cutR: 10e3, admittance: { re: 1 / 600, im: -0 } });
    expect(stages[0].boostSum.re).toBeCloseTo(1 / 600, 15);
    expect(stages[0].cutSum.re).toBe(0);
  });
});

const SPECIAL = ["b_1k", "50%", "a&b", "x{y}", "back\\slash", "h#1", "$5", "^up", "~wave", "è Ω µ", "dot.ted", "dot"];

/** A band of some kind for each id; a single supply, so that every kind of term is there. */
function specialBoard(): Board {
  const kinds = ["gyrator-section", "inductor-section", "low-shelf-section", "shelf-section", "level-section"] as const;
  const values = {
    "gyrator-section": { seriesC: 220e-9, seriesR: 470, gyratorC: 3.9e-9, gyratorR: 68e3 },
    "inductor-section": { seriesC: 220e-9, seriesR: 390, inductor: { value: 0.12, windingR: 60, selfC: 100e-12 } },
    "low-shelf-section": { seriesR: 1000, gyratorC: 47e-9, gyratorR: 100e3, blockingC: 47e-6 },
    "shelf-section": { seriesC: 10e-9, seriesR: 470 },
    "level-section": { seriesR: 680, blockingC: 47e-6 },
  };
  const bands = SPECIAL.map((id, i): Block => bandOf(id, kinds[i % kinds.length], values[kinds[i % kinds.length]], { opAmp: i % 2 === 0 ? "table" : "ideal" }));
  const project = oneBus(bands, { opAmp: "table", opAmps: { table: TABLE_OP_AMP } });
  const blocks = project.blocks.map((b) => (b.kind === "boost-cut-stage" ? { ...b, parts: { ...b.parts, feedbackC: { value: 22e-12 } } } : b.kind === "input" ? { ...b, parts: { ...b.parts, couplingC: { value: 4.7e-6 }, loadR: { value: 1e5 } } } : b));
  return resolveBoard({ ...project, blocks, supply: { kind: "single", voltage: 9, reference: { upperR: { value: 1e4 }, lowerR: { value: 1e4 }, bypassC: { value: 1e-4 }, opAmp: "TL072" } } });
}

/** What the typesetter's own fonts lack is no fault of the formula. */
const MISSING_GLYPH = /unicodeTextInMathMode|unknownSymbol|symbolNotInFont/;

const isBalanced = (tex: string): boolean => {
  let depth = 0;
  for (const c of tex.replaceAll(/\\[{}]/g, "")) {
    depth += c === "{" ? 1 : c === "}" ? -1 : 0;
    if (depth < 0) return false;
  }
  return depth === 0;
};

describe("in print", () => {
  const boards: readonly (readonly [string, Board])[] = [...DEMOS.map(([name, project]) => [name, resolveBoard(project)] as const), ["a board whose ids are full of signs", specialBoard()], ["ten ideal bands", resolveBoard(tenBandBoard("ideal"))]];

  test.each(boards)("%s: every part has its own name in the text, every equation stands under one block", (_name, board) => {
    const report = boardReport(board, { style: "text", blocks: blockIds(board), frequency: 1000 });
    const lines = report.blocks.flatMap((b) => b.sections.flatMap((s) => s.lines.map((l) => l.text)));
    for (const e of expandBoard(board).elements) expect(lines.some((l) => l.includes(e.type === "resistor" && e.detail ? `${e.source}.${e.detail}` : e.source)), e.source).toBe(true);
    const { nodes, branches } = boardEquations(board);
    for (const equation of nodes) expect(lines.filter((l) => l === nodeEquationText(equation, "text")), equation.node).toHaveLength(1);
    for (const branch of branches) expect(lines.filter((l) => l === branchEquationText(branch, "text")).length, branch.part).toBeGreaterThan(0);
    // Each under its own block.
    for (const equation of nodes) {
      const owner = report.blocks.find((b) => b.sections.some((s) => s.lines.some((l) => l.text === nodeEquationText(equation, "text"))))!;
      expect(owner.id).toBe(equation.node.slice(0, equation.node.lastIndexOf(".")));
    }
    for (const line of lines) expect(line).not.toMatch(/NaN|undefined|Infinity|\[object/);
    expect(report.frequency).toBe(1000);
    expect(apart({ re: 10 ** (report.gain! / 20), im: 0 }, { re: Math.hypot(star(board, 1000).re, star(board, 1000).im), im: 0 })).toBeLessThan(1e-9);
  });

  test.each(boards)("%s: TeX is balanced, and a typesetter takes every line", (_name, board) => {
    const report = boardReport(board, { style: "tex", blocks: blockIds(board), frequency: 1000 });
    let count = 0;
    for (const { text, isProse } of report.blocks.flatMap((b) => b.sections.flatMap((s) => s.lines))) {
      if (isProse) continue;
      expect(isBalanced(text), text).toBe(true);
      expect(() => katex.renderToString(text, { throwOnError: true, displayMode: true, strict: (code: string) => (MISSING_GLYPH.test(code) ? "ignore" : "error") }), text).not.toThrow();
      count += 1;
    }
    expect(count).toBeGreaterThan(30);
  });

  test("text and TeX have the same terms of the same parts, sign for sign", () => {
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 3, mostInChain: 3 }), (project) => {
        const { nodes, branches } = boardEquations(resolveBoard(project));
        for (const equation of nodes) {
          const [text, tex] = [nodeEquationText(equation, "text"), nodeEquationText(equation, "tex")];
          for (const { part } of equation.terms) {
            expect(text).toContain(part);
            expect(tex).toContain(`\\text{${part}}`);
          }
          // A fraction a resistor, an s a capacitor, an I a branch.
          const of = (type: string): number => equation.terms.filter((t) => t.type === type).length;
          expect(tex.split("\\frac").length - 1).toBe(of("resistor"));
          expect(tex.split("s\\,C").length - 1).toBe(of("capacitor"));
          expect(text.split("s·").length - 1).toBe(of("capacitor"));
          expect(tex.split("I_{").length - 1).toBe(of("branch"));
          expect(text.split("I[").length - 1).toBe(of("branch"));
          expect(text.split(" − ").length).toBe(tex.split(" - ").length);
          expect(text.startsWith("−")).toBe(tex.startsWith("-"));
          expect(text.endsWith(" = 0") && tex.endsWith(" = 0")).toBe(true);
        }
        for (const branch of branches) {
          expect(branchEquationText(branch, "text")).toContain(" = ");
          expect(branchEquationText(branch, "tex")).toContain(" = ");
          const isReal = branch.type === "opAmp" && branch.model !== "ideal";
          for (const style of ["text", "tex"] as const) expect(opAmpGainText(branch, style) !== undefined).toBe(isReal);
        }
      }),
      runs(40),
    );
  });

  test("by hand", () => {
    const board = resolveBoard(oneBus([bandOf("v", "level-section", { seriesR: 680, blockingC: 47e-6 })], { opAmp: "table", opAmps: { table: TABLE_OP_AMP } }));
    const { nodes, branches } = boardEquations(board);
    const at = (node: string) => nodes.find((n) => n.node === node)!;
    expect(nodeEquationText(at("v.w"), "text")).toBe("(v[v.w] − v[eq.m])/v.slider.boost + (v[v.w] − v[eq.p])/v.slider.cut + s·v.blockingC·(v[v.w] − v[v.c]) = 0");
    expect(nodeEquationText(at("v.c"), "text")).toBe("s·v.blockingC·(v[v.c] − v[v.w]) + v[v.c]/v.seriesR = 0");
    expect(nodeEquationText(at("v.c"), "tex")).toBe("s\\,C_{\\text{v.blockingC}}\\left(V_{\\text{v.c}} - V_{\\text{v.w}}\\right) + \\frac{V_{\\text{v.c}}}{R_{\\text{v.seriesR}}} = 0");
    expect(branches.map((b) => branchEquationText(b, "text"))).toEqual(["v[in.emf] = 1 V", "(v[eq.out] + outputR·I[eq.opAmp])/A[eq.opAmp](s) = v[eq.p] − v[eq.m]"]);
    expect(opAmpGainText(branches[1], "text")).toBe("A[eq.opAmp](s) = 1/(1/100000 + s/(2π·10 MHz)), outputR = 50 Ω, inputR = 300 kΩ");
    expect(complexText({ re: 0, im: -2e-3 }, "A", "text")).toBe("2.000 mA ∠ −90.00°");
    expect(complexText({ re: 3, im: 4 }, "", "tex")).toBe("5.000\\angle{53.13}^\\circ");
    const [, f0] = lawAccounts(bandOf("g", "gyrator-section", { seriesC: 220e-9, seriesR: 470, gyratorC: 3.9e-9, gyratorR: 68e3 }), board.chain[1].block).map((a) => lawSteps(a, "gyrator-section", "text"));
    expect(f0.symbols).toBe("f0 = 1 / (2·π·√(L·seriesC))");
    expect(f0.values).toBe("1 / (2·π·√(124.6 mH·220 nF))");
    expect(f0.result).toBe("961 Hz");
    expect(stageTransferText("text", true)[2]).not.toBe(stageTransferText("text", false)[2]);
  });
});

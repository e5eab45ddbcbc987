import { describe, expect, test } from "vitest";
import { FaultError, faultText, type Fault } from "../../core/errors.ts";
import type { Block, Project, Wire } from "../../core/model/project.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { compileBoard } from "../../core/net/star.ts";
import { bandOf, projectOf } from "../helpers/boards.ts";

const stage = (id: string): Block => ({ id, kind: "boost-cut-stage", opAmp: "ideal", parts: { inputR: { value: 3000 }, feedbackR: { value: 3000 } } });
const buffer = (id: string): Block => ({ id, kind: "buffer", opAmp: "ideal" });
const input = (id: string): Block => ({ id, kind: "input", parts: { sourceR: { value: 100 } } });
const output = (id: string): Block => ({ id, kind: "output", parts: { seriesR: { value: 100 }, loadR: { value: 10e3 } } });
const band = (id: string): Block => bandOf(id, "level-section", { seriesR: 680 });

/** `in.out eq.in` */
function wires(...pairs: string[]): Wire[] {
  return pairs.map((pair) => {
    const [from, to] = pair.split(" ");
    return { from, to };
  });
}

const SOUND = { blocks: [input("in"), stage("eq"), band("b"), output("out")], wires: wires("in.out eq.in", "eq.bus b.bus", "eq.out out.in") };

function faultsOf(blocks: readonly Block[], wired: readonly Wire[]): readonly Fault[] {
  try {
    resolveBoard(projectOf(blocks, wired));
  } catch (error) {
    if (error instanceof FaultError) return error.faults;
    throw error;
  }
  return [];
}

describe("a sound board", () => {
  test("is a tree from the input: drivers before what they drive, bands in file order", () => {
    const board = resolveBoard(projectOf([output("out"), band("b2"), band("b1"), stage("late"), input("in"), stage("early"), buffer("buf")], wires("late.bus b2.bus", "late.bus b1.bus", "buf.out late.in", "early.out buf.in", "in.out early.in", "late.out out.in")));
    expect(board.chain.map((item) => item.block.id)).toEqual(["in", "early", "buf", "late", "out"]);
    expect(board.chain.map((item) => item.driver)).toEqual([-1, 0, 1, 2, 3]);
    expect(board.chain[3].bands.map((b) => b.id)).toEqual(["b2", "b1"]);
    expect(board.chain[board.output].block.id).toBe("out");
    expect(board.warnings).toEqual([]);
  });

  test("may have a branch that ends nowhere: it stays in the chain, to load its driver", () => {
    const board = resolveBoard(projectOf([...SOUND.blocks, stage("side"), band("b2"), buffer("end")], [...SOUND.wires, ...wires("in.out side.in", "side.bus b2.bus", "side.out end.in")]));
    expect(board.warnings).toEqual([]);
    expect(board.chain.map((item) => item.block.id).sort()).toEqual(["end", "eq", "in", "out", "side"]);
    expect(compileBoard(board).bands.map((b) => b.id).sort()).toEqual(["b", "b2"]);
  });

  test("may do without a stage, and its stages without bands", () => {
    expect(faultsOf([input("in"), output("out")], wires("in.out out.in"))).toEqual([]);
    expect(faultsOf([input("in"), stage("eq"), output("out")], wires("in.out eq.in", "eq.out out.in"))).toEqual([]);
  });

  test("block ids may hold dots: the port stands after the last", () => {
    const blocks = [input("in"), stage("eq.1"), band("31.5"), output("out")];
    const board = resolveBoard(projectOf(blocks, wires("in.out eq.1.in", "eq.1.bus 31.5.bus", "eq.1.out out.in")));
    expect(board.chain[1].bands[0].id).toBe("31.5");
  });
});

describe("what takes no part is a warning, with its place and its block", () => {
  const warningsOf = (blocks: readonly Block[], wired: readonly Wire[]) => resolveBoard(projectOf(blocks, wired)).warnings;

  test("a band on no bus", () => {
    const board = resolveBoard(projectOf([...SOUND.blocks, band("loose")], SOUND.wires));
    expect(board.warnings).toEqual([{ path: "blocks[4]", message: "“loose” takes no part: it hangs on no bus", blocks: ["loose"] }]);
    expect(board.chain.flatMap((item) => item.bands.map((b) => b.id))).toEqual(["b"]);
    expect(compileBoard(board).bands.map((b) => b.id)).toEqual(["b"]);
  });

  test("a stage that the signal does not reach, and the band on it", () => {
    const warnings = warningsOf([...SOUND.blocks, stage("far"), band("b2")], [...SOUND.wires, ...wires("far.bus b2.bus")]);
    expect(warnings.map((w) => [w.path, w.blocks])).toEqual([["blocks[4]", ["far"]], ["blocks[5]", ["b2"]]]);
    expect(warnings[0].message).toContain("the signal does not reach it");
    expect(warnings[1].message).toContain("does not reach “far”");
  });

  test("a wire that is there twice", () => {
    const warnings = warningsOf(SOUND.blocks, [...SOUND.wires, SOUND.wires[1]]);
    expect(warnings).toMatchObject([{ path: "wires[3]", blocks: ["eq", "b"] }]);
    expect(warnings[0].message).toContain("repeats wires[1]");
    expect(resolveBoard(projectOf(SOUND.blocks, [...SOUND.wires, SOUND.wires[1]])).chain[1].bands).toHaveLength(1);
  });
});

interface Case {
  readonly blocks: readonly Block[];
  readonly wired: readonly Wire[];
  readonly path: string;
  readonly message: RegExp;
  readonly names: readonly string[];
}

const CASES: Readonly<Record<string, Case>> = {
  "a bus wired to two stages": { blocks: [...SOUND.blocks, stage("eq2")], wired: [...SOUND.wires, ...wires("eq.bus eq2.bus")], path: "wires[3]", message: /two stages, “eq” and “eq2”/, names: ["eq", "eq2"] },
  "a band on two buses": {
    blocks: [input("in"), stage("eq"), stage("eq2"), band("b"), output("out")],
    wired: wires("in.out eq.in", "eq.out eq2.in", "eq2.out out.in", "eq.bus b.bus", "eq2.bus b.bus"),
    path: "wires[4]",
    message: /“b” hangs on two buses, those of “eq” and “eq2”/,
    names: ["b", "eq", "eq2"],
  },
  "a loop beside the chain": { blocks: [...SOUND.blocks, buffer("u"), buffer("v")], wired: [...SOUND.wires, ...wires("u.out v.in", "v.out u.in")], path: "wires", message: /loop: “[uv]” → “[uv]” → “[uv]”/, names: ["u", "v"] },
  "a block that drives itself": { blocks: [...SOUND.blocks, buffer("u")], wired: [...SOUND.wires, ...wires("u.out u.in")], path: "wires", message: /loop: “u” → “u”/, names: ["u"] },
  "a loop on the way to the output": { blocks: SOUND.blocks, wired: wires("eq.out eq.in", "eq.bus b.bus", "eq.out out.in"), path: "wires", message: /loop: “eq” → “eq”/, names: ["eq"] },
  "two inputs": { blocks: [...SOUND.blocks, input("in2")], wired: SOUND.wires, path: "blocks", message: /2 input blocks \(“in”, “in2”\)/, names: ["in", "in2"] },
  "two outputs": { blocks: [...SOUND.blocks, output("out2")], wired: SOUND.wires, path: "blocks", message: /2 output blocks \(“out”, “out2”\)/, names: ["out", "out2"] },
  "no path from input to output": { blocks: SOUND.blocks, wired: wires("eq.bus b.bus", "eq.out out.in"), path: "wires", message: /no path from “in” to “out”: .*“eq”/, names: ["in", "out", "eq"] },
  "an output that nothing drives": { blocks: SOUND.blocks, wired: wires("in.out eq.in", "eq.bus b.bus"), path: "wires", message: /no path from “in” to “out”: nothing drives “out”/, names: ["in", "out"] },
  "an in driven twice": { blocks: [...SOUND.blocks, buffer("u")], wired: [...SOUND.wires, ...wires("in.out u.in", "u.out eq.in")], path: "wires[4]", message: /“eq” is driven twice, by “in” and by “u”/, names: ["eq", "in", "u"] },
  "a wire to a block that is not there": { blocks: SOUND.blocks, wired: [...SOUND.wires, ...wires("eq.bus ghost.bus")], path: "wires[3].to", message: /no block “ghost”/, names: ["ghost"] },
  "a wire from a block that is not there": { blocks: SOUND.blocks, wired: [...SOUND.wires, ...wires("ghost.out eq.in")], path: "wires[3].from", message: /no block “ghost”/, names: ["ghost"] },
  "a port that the block does not have": { blocks: SOUND.blocks, wired: [...SOUND.wires, ...wires("b.out eq.in")], path: "wires[3].from", message: /“b” \(level section\) has no port “out”: it has bus/, names: ["b"] },
  "a port misspelt": { blocks: SOUND.blocks, wired: [...SOUND.wires, ...wires("in.Out eq.in")], path: "wires[3].from", message: /no port “Out”: it has out/, names: ["in"] },
  "an end without a port": { blocks: SOUND.blocks, wired: [...SOUND.wires, { from: "eq", to: "b.bus" }], path: "wires[3].from", message: /must be block\.port/, names: [] },
  "an empty end": { blocks: SOUND.blocks, wired: [...SOUND.wires, { from: "eq.bus", to: "" }], path: "wires[3].to", message: /must be block\.port.*got “”/, names: [] },
  "an end that starts with the dot": { blocks: SOUND.blocks, wired: [...SOUND.wires, { from: ".out", to: "eq.in" }], path: "wires[3].from", message: /must be block\.port/, names: [] },
  "an out wired to a bus": { blocks: SOUND.blocks, wired: [...SOUND.wires, ...wires("in.out b.bus")], path: "wires[3]", message: /from an out to an in, or from a stage's bus/, names: ["in", "b"] },
  "an in wired to an out": { blocks: SOUND.blocks, wired: [...SOUND.wires, ...wires("eq.in in.out")], path: "wires[3]", message: /from an out to an in/, names: ["eq", "in"] },
  "two outs wired together": { blocks: SOUND.blocks, wired: [...SOUND.wires, ...wires("in.out eq.out")], path: "wires[3]", message: /from an out to an in/, names: ["in", "eq"] },
  "a bus wire the wrong way round": { blocks: [input("in"), stage("eq"), band("b"), output("out")], wired: wires("in.out eq.in", "eq.out out.in", "b.bus eq.bus"), path: "wires[2]", message: /“b” is not a stage/, names: ["b", "eq"] },
  "a band hung on a band": { blocks: [...SOUND.blocks, band("b2")], wired: [...SOUND.wires, ...wires("b.bus b2.bus")], path: "wires[3]", message: /“b” is not a stage/, names: ["b", "b2"] },
  "no input": { blocks: [stage("eq"), output("out")], wired: wires("eq.out out.in"), path: "blocks", message: /no input block/, names: [] },
  "no output": { blocks: [input("in"), stage("eq")], wired: wires("in.out eq.in"), path: "blocks", message: /no output block/, names: [] },
  "names of the prototype": { blocks: SOUND.blocks, wired: [...SOUND.wires, { from: "__proto__.out", to: "eq.in" }], path: "wires[3].from", message: /no block “__proto__”/, names: ["__proto__"] },
};

describe("a wiring fault is told once, with its place, in words, and names its blocks", () => {
  test.each(Object.entries(CASES))("%s", (_name, { blocks, wired, path, message, names }) => {
    const faults = faultsOf(blocks, wired);
    expect(faults).toHaveLength(1);
    const [fault] = faults;
    expect(fault.path).toBe(path);
    expect(fault.message).toMatch(message);
    for (const name of names) expect(fault.blocks).toContain(name);
    expect(faultText(fault)).toBe(`${path}: ${fault.message}`);
  });

  test("every fault is told, not the first alone", () => {
    const blocks = [...SOUND.blocks, input("in2"), buffer("u")];
    const faults = faultsOf(blocks, [...SOUND.wires, ...wires("u.out u.in", "eq.bus ghost.bus", "b.out eq.in")]);
    expect(faults.map((f) => f.path).sort()).toEqual(["blocks", "wires", "wires[4].to", "wires[5].from"]);
  });

  test("a loop is told once, however many blocks hang on it", () => {
    const blocks = [...SOUND.blocks, buffer("u"), buffer("v"), buffer("w"), buffer("x"), buffer("y")];
    const faults = faultsOf(blocks, [...SOUND.wires, ...wires("u.out v.in", "v.out w.in", "w.out u.in", "w.out x.in", "x.out y.in")]);
    expect(faults).toHaveLength(1);
    expect([...faults[0].blocks!].sort()).toEqual(["u", "v", "w"]);
  });

  test("a chain of ten thousand blocks needs no deep stack and no long wait", () => {
    const many = Array.from({ length: 9998 }, (_, n) => buffer(`u${n}`));
    const chainWires = many.map((b, n): Wire => ({ from: n === 0 ? "in.out" : `u${n - 1}.out`, to: `${b.id}.in` }));
    const project: Project = projectOf([input("in"), ...many, output("out")], [...chainWires, { from: "u9997.out", to: "out.in" }]);
    expect(resolveBoard(project).chain).toHaveLength(10_000);
  });
});

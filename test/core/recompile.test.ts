import * as fc from "fast-check";
import { describe, expect, it } from "vitest";
import { logFrequencies, angular } from "../../core/analysis/response.ts";
import type { Block, Project } from "../../core/model/project.ts";
import { partsOf } from "../../core/model/project.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { compileBoard, recompileBlock, recompileReference, Sweep } from "../../core/net/star.ts";
import { transferColumns } from "../../core/net/transfer.ts";
import { boardArbitrary } from "../helpers/boards.ts";

const omega = angular(logFrequencies(10, 40_000, 9));

/** The same block with every value, track and op amp another. */
function changed(block: Block, factor: number): Block {
  const parts = Object.fromEntries(Object.entries(partsOf(block)).map(([role, part]) => [role, { ...part, value: part.value * factor }]));
  return {
    ...block, parts,
    ...(block.opAmp === undefined ? {} : { opAmp: "NE5532" }),
    ...(block.slider ? { slider: { ...block.slider, track: { value: block.slider.track.value * factor } } } : {}),
  };
}

/** What a sweep gives without slopes and with them: each has its own way of working. */
function columnsOf(sweep: Sweep, positions: Float64Array) {
  return [false, true].map((withSlope) => {
    const out = transferColumns(omega.length, withSlope);
    sweep.run(positions, out);
    return out;
  });
}

describe("a compiled board with one block changed", () => {
  it("is the changed project compiled, for every block of random boards, in a sweep that is kept", () => {
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 3, mostInChain: 3 }), fc.nat(100), fc.integer({ min: 50, max: 200 }), (project: Project, pick, percent) => {
        const board = resolveBoard(project);
        const compiled = compileBoard(board);
        const sweep = new Sweep(compiled, omega);
        const before = columnsOf(sweep, compiled.positions);
        const inChain = board.chain.flatMap((item) => [item.block, ...item.bands]);
        const block = changed(inChain[pick % inChain.length], percent / 100);
        const other = recompileBlock(compiled, board, block);
        sweep.replace(other);
        const whole = compileBoard(resolveBoard({ ...project, blocks: project.blocks.map((b) => (b.id === block.id ? block : b)) }));
        expect(columnsOf(sweep, other.positions)).toEqual(columnsOf(new Sweep(whole, omega), whole.positions));
        sweep.replace(compiled);
        expect(columnsOf(sweep, compiled.positions)).toEqual(before);
      }),
      { numRuns: 150 },
    );
  });

  it("takes another supply reference", () => {
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 2, mostInChain: 2 }), (project) => {
        if (project.supply.kind !== "single") return;
        const { reference } = project.supply;
        const other: Project = { ...project, supply: { ...project.supply, reference: { ...reference, upperR: { value: reference.upperR.value * 2 } } } };
        const compiled = compileBoard(resolveBoard(project));
        const sweep = new Sweep(compiled, omega);
        columnsOf(sweep, compiled.positions);
        sweep.replace(recompileReference(compiled, { ...project, supply: { kind: "split", positive: 9, negative: 9 } }));
        sweep.replace(recompileReference(compiled, other));
        expect(columnsOf(sweep, compiled.positions)).toEqual(columnsOf(new Sweep(compileBoard(resolveBoard(other)), omega), compiled.positions));
      }),
      { numRuns: 100 },
    );
  });

  it("refuses a board of other bands", () => {
    const [one, two] = [1, 2].map((seed) => fc.sample(boardArbitrary({ supply: "split", isStraight: true }).filter((p) => p.blocks.length === 4 + seed), { numRuns: 1, seed })[0]);
    const sweep = new Sweep(compileBoard(resolveBoard(one)), omega);
    expect(() => sweep.replace(compileBoard(resolveBoard(two)))).toThrow(/not a version/);
    expect(() => recompileBlock(sweep.board, resolveBoard(one), { id: "nobody", kind: "buffer" })).toThrow(/nobody/);
  });
});

import * as fc from "fast-check";
import { describe, expect, test, vi } from "vitest";
import { polesAndZeros, unstablePoles, unstableText, type Root } from "../../../core/analysis/poles.ts";
import type { Block, Project } from "../../../core/model/project.ts";
import { resolveBoard } from "../../../core/net/board.ts";
import { expandBoard } from "../../../core/net/expand.ts";
import { describeNetlist } from "../../../core/net/nodal.ts";
import { withEnds } from "../../fixtures/ends.ts";
import { OSCILLATING } from "../../fixtures/oscillating.ts";
import { preciseStep } from "../../fixtures/precise.ts";
import { runs } from "../../fixtures/runs.ts";
import { bandOf, boardArbitrary, oneBus, projectOf, TABLE_OP_AMP } from "../../helpers/boards.ts";

vi.setConfig({ testTimeout: 60_000 });

const sizeOf = ({ re, im }: Root): number => Math.hypot(re, im);
const gyrator = { seriesC: 220e-9, seriesR: 470, gyratorC: 3.9e-9, gyratorR: 68e3 };

describe("participation", () => {
  test("names the block to which a pole belongs", () => {
    const low = bandOf("low", "gyrator-section", { seriesC: 4.7e-6, seriesR: 560, gyratorC: 0.12e-6, gyratorR: 75e3 }, { opAmp: "table" });
    const high = bandOf("high", "inductor-section", { seriesC: 10e-9, seriesR: 470, inductor: { value: 0.03, windingR: 30, selfC: 50e-12 } });
    const project = withEnds(oneBus([low, high], { opAmp: "table", opAmps: { table: TABLE_OP_AMP } }), { out: { couplingC: { value: 100e-6 } } });
    const { poles } = polesAndZeros(resolveBoard(project));
    const blockNear = (hz: number): string => poles.reduce((best, p) => (Math.abs(Math.log(sizeOf(p) / hz)) < Math.abs(Math.log(sizeOf(best) / hz)) ? p : best)).block;
    expect(blockNear(2 * Math.PI * 32)).toBe("low");
    expect(blockNear(2 * Math.PI * 9.19e3)).toBe("high");
    expect(blockNear(1 / (100e-6 * 1e6))).toBe("out");
    expect(blockNear(2 * Math.PI * 5e6)).toBe("eq");
    for (const pole of poles) expect(["low", "high", "out", "eq"]).toContain(pole.block);
  });

  test("shares are largest first and sum to 1, as far as they are listed", () => {
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 1, mostInChain: 1 }), (project) => {
        const board = resolveBoard(project);
        const parts = describeNetlist(expandBoard(board)).storageTerms.length;
        for (const { shares } of polesAndZeros(board).poles) {
          const sum = shares.reduce((total, s) => total + s.share, 0);
          const sizes = shares.map((s) => Math.abs(s.share));
          expect(sizes).toEqual([...sizes].sort((a, b) => b - a));
          expect(Math.min(...sizes)).toBeGreaterThan(0.01);
          expect(Math.abs(sum - 1)).toBeLessThan(shares.length === parts ? 1e-6 : 0.01 * (parts - shares.length) + 1e-6);
        }
      }),
      runs(200),
    );
    // A series resonance is coil and capacitor in equal parts.
    const [pole] = polesAndZeros(resolveBoard(oneBus([bandOf("i", "inductor-section", { seriesC: 1e-6, seriesR: 220, inductor: 1.2 }, { slider: { position: 1 } })]))).poles;
    expect(pole.shares.map((s) => s.source).sort()).toEqual(["i.inductor", "i.seriesC"]);
    for (const { share } of pole.shares) expect(share).toBeCloseTo(0.5, 9);
  });

  test("a share is how far the part moves the root: −d ln|s|/d ln(part)", () => {
    const project = (scale: Readonly<Record<string, number>> = {}): Project => {
      const values = Object.fromEntries(Object.entries(gyrator).map(([role, value]) => [role, value * (scale[`b.${role}`] ?? 1)]));
      return withEnds(oneBus([bandOf("b", "gyrator-section", values, { opAmp: "table", slider: { position: 0.8 } })], { opAmp: "table", opAmps: { table: TABLE_OP_AMP } }), { out: { couplingC: { value: 1e-6 * (scale["out.couplingC"] ?? 1) } } });
    };
    const poles = polesAndZeros(resolveBoard(project())).poles;
    for (const source of ["b.seriesC", "b.gyratorC", "out.couplingC"]) {
      const [above, below] = [1.0001, 0.9999].map((factor) => polesAndZeros(resolveBoard(project({ [source]: factor }))).poles);
      poles.forEach((pole, i) => {
        const share = pole.shares.find((s) => s.source === source)?.share;
        if (share !== undefined) expect(-Math.log(sizeOf(above[i]) / sizeOf(below[i])) / Math.log(1.0001 / 0.9999)).toBeCloseTo(share, 5);
      });
    }
    expect(poles.flatMap((p) => p.shares).filter((s) => s.share > 0.4).length).toBeGreaterThanOrEqual(3);
  });
});

describe("instability", () => {
  test.each(Object.entries(OSCILLATING))("%s: a pair of poles in the right half plane, where det(G + sC) vanishes indeed", (_name, project) => {
    const board = resolveBoard(project);
    const { unstable, reproducedWithin } = polesAndZeros(board);
    expect(unstable).toHaveLength(2);
    expect(unstable[0].re).toBeGreaterThan(0);
    expect(unstable[0].im).toBe(-unstable[1].im);
    expect(reproducedWithin).toBeLessThan(1e-8);
    expect(preciseStep(expandBoard(board), unstable[0])).toBeLessThan(1e-9);
    const quick = unstablePoles(board);
    expect(quick.map(({ re, im, block }) => ({ re, im, block }))).toEqual(unstable.map(({ re, im, block }) => ({ re, im, block })));
    expect(unstableText(unstable)).toContain("“eq”");
    expect(unstableText(unstable)).toMatch(/unstable.*right half plane.*oscillates/);
  });

  test("goes when its slider is centred or its load is light", () => {
    const { boosted } = OSCILLATING;
    expect(unstablePoles(resolveBoard(boosted), { positions: { hi: 0.5 } })).toEqual([]);
    expect(unstablePoles(resolveBoard(withEnds(boosted, { out: { seriesR: { value: 1000 }, loadR: { value: 10e3 } } })))).toEqual([]);
  });

  test("the quick look and the full table agree on random boards", () => {
    fc.assert(
      fc.property(boardArbitrary(), (project) => {
        const board = resolveBoard(project);
        const [quick, full] = [unstablePoles(board), polesAndZeros(board).unstable];
        expect(quick.map((p) => sizeOf(p).toPrecision(8))).toEqual(full.map((p) => sizeOf(p).toPrecision(8)));
      }),
      runs(150),
    );
  });

  test("a lone buffer cannot oscillate: two poles, whatever hangs on it", () => {
    const source: Block = { id: "in", kind: "input", parts: { sourceR: { value: 1e3 } } };
    const ends = fc.record({ ro: fc.integer({ min: 0, max: 5000 }), c: fc.integer({ min: 1, max: 1e6 }), r: fc.integer({ min: 1, max: 1000 }), gbw: fc.integer({ min: 5, max: 9 }) });
    fc.assert(
      fc.property(ends, ({ ro, c, r, gbw }) => {
        const out: Block = { id: "out", kind: "output", parts: { seriesR: { value: 0.001 * r }, couplingC: { value: c * 1e-12 }, loadR: { value: r } } };
        const board = resolveBoard(projectOf([source, { id: "u", kind: "buffer", opAmp: "house" }, out], [{ from: "in.out", to: "u.in" }, { from: "u.out", to: "out.in" }], { opAmps: { house: { openLoopGain: 1e6, gainBandwidth: 10 ** gbw, inputR: 1e9, outputR: ro } } }));
        const { poles, unstable } = polesAndZeros(board);
        expect(poles).toHaveLength(2);
        expect(unstable).toEqual([]);
      }),
      runs(60),
    );
  });
});

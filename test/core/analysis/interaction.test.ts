import * as fc from "fast-check";
import { describe, expect, test, vi } from "vitest";
import { bandFigures } from "../../../core/analysis/bands.ts";
import { lossAccount, type LossAccount } from "../../../core/analysis/interaction.ts";
import { angular, logFrequencies } from "../../../core/analysis/response.ts";
import type { Block, Project } from "../../../core/model/project.ts";
import { resolveBoard, type Board } from "../../../core/net/board.ts";
import { expandBoard } from "../../../core/net/expand.ts";
import type { Element, Netlist } from "../../../core/net/netlist.ts";
import { nodalTransfer } from "../../../core/net/nodal.ts";
import { compileBoard, Sweep } from "../../../core/net/star.ts";
import { transferColumns } from "../../../core/net/transfer.ts";
import { DEMOS } from "../../fixtures/demos.ts";
import { centredBut, netlistOf, nodalGain, searchPeak } from "../../fixtures/figures.ts";
import { preciseTransfer } from "../../fixtures/precise.ts";
import { runs } from "../../fixtures/runs.ts";
import { bandOf, boardArbitrary, oneBus, TABLE_OP_AMP, tenBandBoard } from "../../helpers/boards.ts";

vi.setConfig({ testTimeout: 60_000 });

const bandIds = (board: Board): string[] => board.chain.flatMap((item) => item.bands.map((b) => b.id));
const sumOf = (account: LossAccount): number => account.shares.reduce((sum, s) => sum + s.loss, account.own);
const shareOf = (account: LossAccount, id: string): number => account.shares.find((s) => s.id === id)!.loss;

/** Every element of some bands with its admittance times their factor. */
function withAdmittanceTimes(netlist: Netlist, factorOf: (band: string) => number | undefined): Netlist {
  const elements = netlist.elements.map((e): Element => {
    const t = factorOf(e.source.slice(0, e.source.indexOf(".")));
    if (t === undefined || e.type === "emf") return e;
    if (e.type === "opAmp") return e.model === "ideal" ? e : { ...e, model: { ...e.model, inputR: e.model.inputR / t, outputR: e.model.outputR / t } };
    return { ...e, value: e.type === "capacitor" ? e.value * t : e.value / t };
  });
  return { ...netlist, elements };
}

describe("the weight of a band", () => {
  const OMEGA = angular(logFrequencies(10, 40e3, 9));

  test("t is its impedances over t: the track, every part of the leg and the op amp's two resistances", () => {
    let arbitrated = 0;
    let points = 0;
    fc.assert(
      fc.property(boardArbitrary({ mostBands: 3, mostInChain: 3 }), fc.array(fc.integer({ min: 10, max: 3000 }).map((n) => n / 1000), { minLength: 9, maxLength: 9 }), (project, factors) => {
        const board = resolveBoard(project);
        const compiled = compileBoard(board);
        const factorOf = new Map(compiled.bands.map((band, i) => [band.id, factors[i]]));
        const netlist = withAdmittanceTimes(expandBoard(board), (id) => factorOf.get(id));
        const reference = transferColumns(OMEGA.length, false);
        nodalTransfer(netlist, OMEGA, reference);
        const weights = Float64Array.from(compiled.bands, (band) => factorOf.get(band.id)!);
        // Without a slope the fast columns run on a split supply, with one the general reduction.
        for (const isWithSlope of [false, true]) {
          const out = transferColumns(OMEGA.length, isWithSlope);
          new Sweep(compiled, OMEGA).run(compiled.positions, out, weights);
          for (let k = 0; k < OMEGA.length; k++) {
            points += 1;
            const agrees = (re: number, im: number): boolean => Math.hypot(out.re[k] - re, out.im[k] - im) < 1e-9 * (Math.LN10 / 20) * Math.hypot(re, im);
            if (agrees(reference.re[k], reference.im[k])) continue;
            // The dense solve loses digits on a board in a thousand: 44 digits tell who is right.
            arbitrated += 1;
            const exact = preciseTransfer(netlist, OMEGA[k]);
            expect(agrees(exact.re, exact.im)).toBe(true);
          }
        }
      }),
      runs(150),
    );
    expect(arbitrated / points).toBeLessThan(0.01);
  });
});

function expectAccount(board: Board, account: LossAccount): void {
  expect(Math.abs(sumOf(account) - account.whole)).toBeLessThan(1e-5);
  expect(account.whole).toBe(account.isolatedBoost - account.peak);
  const losses = account.shares.map((s) => s.loss);
  expect(losses).toEqual([...losses].sort((a, b) => b - a));
  expect(account.shares.map((s) => s.id).sort()).toEqual(bandIds(board).filter((id) => id !== account.id).sort());
}

describe("the account of a loss", () => {
  test.each(DEMOS)("%s: own and shares add up to the whole within 1e-5 dB, as the band figures state it", (_name, project) => {
    const board = resolveBoard(project);
    for (const figures of bandFigures(board)) {
      const account = lossAccount(board, figures.id);
      expectAccount(board, account);
      expect(account.peak).toBeCloseTo(figures.boost.peak, 9);
      expect(account.whole).toBeCloseTo(figures.interactionLoss, 9);
    }
  });

  test("adds up on random boards of all kinds of band, high-Q legs and tiny tracks included", () => {
    let accounts = 0;
    fc.assert(
      fc.property(boardArbitrary(), (project) => {
        const board = resolveBoard(project);
        for (const id of bandIds(board)) {
          expectAccount(board, lossAccount(board, id));
          accounts += 1;
        }
      }),
      runs(50),
    );
    expect(accounts).toBeGreaterThan(120);
  });

  test("charges the same whatever the order of the bands in the file", () => {
    const ids = ["b125", "b1000", "b4000"];
    const board = resolveBoard(tenBandBoard());
    const accounts = ids.map((id) => lossAccount(board, id));
    fc.assert(
      fc.property(fc.shuffledSubarray(tenBandBoard().blocks.map((_, i) => i), { minLength: 13, maxLength: 13 }), fc.shuffledSubarray(tenBandBoard().wires.map((_, i) => i), { minLength: 12, maxLength: 12 }), (blocks, wires) => {
        const project = tenBandBoard();
        const shuffled = resolveBoard({ ...project, blocks: blocks.map((i) => project.blocks[i]), wires: wires.map((i) => project.wires[i]) });
        for (const account of accounts) {
          const other = lossAccount(shuffled, account.id);
          expect(other.own).toBeCloseTo(account.own, 9);
          for (const { id, loss } of account.shares) expect(shareOf(other, id)).toBeCloseTo(loss, 8);
        }
      }),
      runs(8),
    );
  });

  const leg = { seriesC: 220e-9, seriesR: 470, gyratorC: 3.9e-9, gyratorR: 68e3 };
  const twin = (id: string): Block => bandOf(id, "gyrator-section", { ...leg, seriesC: 330e-9 }, { opAmp: "table" });
  const three = (): Project =>
    oneBus([twin("left"), bandOf("own", "gyrator-section", leg, { opAmp: "table" }), twin("right"), bandOf("air", "shelf-section", { seriesC: 10e-9, seriesR: 470 })], { opAmp: "table", opAmps: { table: TABLE_OP_AMP } });

  test("charges twins alike, and each other the same", () => {
    const board = resolveBoard(three());
    const account = lossAccount(board, "own");
    expect(shareOf(account, "left")).toBeGreaterThan(0.5);
    expect(shareOf(account, "left")).toBeCloseTo(shareOf(account, "right"), 10);
    expect(shareOf(account, "air")).not.toBeCloseTo(shareOf(account, "left"), 1);
    expect(shareOf(lossAccount(board, "left"), "right")).toBeCloseTo(shareOf(lossAccount(board, "right"), "left"), 9);
    expect(shareOf(lossAccount(board, "left"), "own")).toBeCloseTo(shareOf(lossAccount(board, "right"), "own"), 9);
  });

  test("of two bands charges the other what its going gives back, by the node equations of the board without it", () => {
    const pair = (bands: readonly Block[]): Project => oneBus(bands, { opAmp: "table", opAmps: { table: TABLE_OP_AMP } });
    const own = bandOf("own", "gyrator-section", leg, { opAmp: "table" });
    const account = lossAccount(resolveBoard(pair([own, twin("other")])), "own");
    const both = searchPeak(netlistOf(pair([own, twin("other")]), { own: 1, other: 0.5 }), 300, 3000).peak;
    const alone = searchPeak(netlistOf(pair([own]), { own: 1 }), 300, 3000).peak;
    expect(account.peak).toBeCloseTo(both, 7);
    expect(account.shares[0].loss).toBeCloseTo(alone - both, 6);
    expect(account.own).toBeCloseTo(20 * Math.log10(1 + 3000 / 470) - alone, 6);
  });

  /** The same integral by Simpson's rule on a dense grid, from the node equations and a peak found by search. */
  function bySimpson(project: Project, own: string, frequencyAt: (gain: (f: number) => number) => number): Map<string, number> {
    const others = bandIds(resolveBoard(project)).filter((id) => id !== own);
    const netlist = netlistOf(project, centredBut(project, { [own]: 1 }));
    const gainAt = (weights: ReadonlyMap<string, number>, f: number): number => nodalGain(withAdmittanceTimes(netlist, (id) => weights.get(id)), [f])[0];
    const steps = 120;
    const total = new Map(others.map((id) => [id, 0]));
    for (let k = 0; k <= steps; k++) {
      // t = u² gathers points where the bands first come in.
      const u = Math.max(k / steps, 1e-4);
      const weights = new Map(others.map((id) => [id, u * u]));
      const f = frequencyAt((x) => gainAt(weights, x));
      const simpson = (k === 0 || k === steps ? 1 : k % 2 === 1 ? 4 : 2) / (3 * steps);
      for (const id of others) {
        const moved = (factor: number): number => gainAt(new Map(weights).set(id, u * u * factor), f);
        const slope = (moved(1.001) - moved(0.999)) / (0.002 * u * u);
        total.set(id, total.get(id)! - simpson * slope * 2 * u);
      }
    }
    return total;
  }

  test("of a resonant band is the integral along the moving peak", () => {
    const project = three();
    const account = lossAccount(resolveBoard(project), "own");
    const dense = bySimpson(project, "own", (gain) => {
      let [a, b] = [Math.log(700), Math.log(1400)];
      for (let i = 0; i < 34; i++) {
        const [c, d] = [b - 0.618034 * (b - a), a + 0.618034 * (b - a)];
        if (gain(Math.exp(c)) > gain(Math.exp(d))) b = d;
        else a = c;
      }
      return Math.exp((a + b) / 2);
    });
    for (const [id, loss] of dense) expect(shareOf(account, id)).toBeCloseTo(loss, 4);
  });

  test("of a level is the integral at the frequency of its plateau", () => {
    const project = oneBus([bandOf("own", "level-section", { seriesR: 470 }), bandOf("other", "level-section", { seriesR: 2200 }), bandOf("wide", "level-section", { seriesR: 270 })]);
    const account = lossAccount(resolveBoard(project), "own");
    for (const [id, loss] of bySimpson(project, "own", () => 1000)) expect(shareOf(account, id)).toBeCloseTo(loss, 5);
    // The lower a neighbour's leg, the more it takes.
    expect(account.shares.map((s) => s.id)).toEqual(["wide", "other"]);
  });

  test("of a lone band is all its own; an unknown band is refused", () => {
    const board = resolveBoard(oneBus([bandOf("own", "level-section", { seriesR: 470 })]));
    const account = lossAccount(board, "own");
    expect(account.shares).toEqual([]);
    expect(account.own).toBe(account.whole);
    expect(() => lossAccount(board, "b2")).toThrow("no band “b2”");
  });
});

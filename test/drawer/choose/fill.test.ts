import { readFileSync } from "node:fs";
import * as fc from "fast-check";
import { describe, expect, it } from "vitest";
import { logFrequencies, ResponseSweep } from "../../../core/analysis/response.ts";
import { buildBill } from "../../../core/drawer/bill.ts";
import { boardProblems } from "../../../core/drawer/board-problems.ts";
import { fillBoard, type FillOpts, type FillResult } from "../../../core/drawer/fill.ts";
import { boardRoles, filledProject, findRole, partFromStock } from "../../../core/drawer/roles.ts";
import { availableOf, type StockedLine } from "../../../core/drawer/stock.ts";
import { applyPatch } from "../../../core/model/patch.ts";
import type { Project } from "../../../core/model/project.ts";
import { restoreProject } from "../../../core/model/restore.ts";
import { resolveBoard, type Board } from "../../../core/net/board.ts";
import { compileBoard } from "../../../core/net/star.ts";
import { bandOf, oneBus } from "../../helpers/boards.ts";
import { fullDrawer, lineOf } from "../../helpers/drawer-lines.ts";

const DEMOS = ["curlew-pedal", "saltmarsh-voice-channel", "ferry-room-third-octaves"];
const demo = (name: string): Board => resolveBoard(restoreProject(readFileSync(new URL(`../../../assets/demo/${name}.bandwright`, import.meta.url), "utf8")).project);

function gainsOf(project: Project): Float64Array[] {
  const compiled = compileBoard(resolveBoard(project));
  const sweep = new ResponseSweep(compiled, logFrequencies(20, 20_000, 61));
  const alone = compiled.bands.map((_, i) => new Float64Array(compiled.bands.length).fill(0.5).with(i, 1));
  return [compiled.positions, ...alone].map((positions) => sweep.run(positions).gain.slice());
}

const targets = new WeakMap<Project, Float64Array[]>();

/** The stated measure, worked out afresh: mean square as it stands plus the mean over the bands' full-boost responses. */
function errorOf(project: Project, target: Project): number {
  if (!targets.has(target)) targets.set(target, gainsOf(target));
  const b = targets.get(target)!;
  const means = gainsOf(project).map((gain, s) => gain.reduce((sum, g, i) => sum + (g - b[s][i]) ** 2, 0) / gain.length);
  const [standing, ...boosts] = means;
  return standing + boosts.reduce((sum, m) => sum + m, 0) / boosts.length;
}

/** One or two gyrator bands with random values, ideal op amps, a slider off its middle. */
function smallBoard(values: readonly (readonly [seriesC: number, seriesR: number, gyratorC: number])[]): Board {
  return resolveBoard(oneBus(values.map(([seriesC, seriesR, gyratorC], i) => bandOf(`b${i}`, "gyrator-section", { seriesC: seriesC * 1e-9, seriesR, gyratorC: gyratorC * 1e-12, gyratorR: 68e3 }, { slider: { position: 0.7 } }))));
}

/** What fill minimises: the error, and 0.1·ln(value/wanted)² a role on top. */
function objective(project: Project, target: Project, names: readonly string[]): number {
  const [board, wanted] = [resolveBoard(project), resolveBoard(target)];
  return errorOf(project, target) + names.reduce((sum, name) => sum + 0.1 * Math.log(findRole(board, name)!.value! / findRole(wanted, name)!.value!) ** 2, 0);
}

/** Every way to fill the given roles within stock and ceiling: fewest empty roles first, then the least error. */
function bruteForce(board: Board, names: readonly string[], lines: readonly StockedLine[], opts: FillOpts): { readonly empty: number; readonly error: number } {
  const { units = 1, window = 0.2, ceiling } = opts;
  const roles = names.map((name) => findRole(board, name)!);
  const used = new Map<string, number>();
  let best = { empty: Infinity, error: Infinity };
  const visit = (at: number, project: Project, empty: number, spent: number): void => {
    if (empty > best.empty || (ceiling && spent > ceiling.amount + 1e-12)) return;
    if (at === roles.length) {
      const error = objective(project, board.project, names);
      if (empty < best.empty || error < best.error) best = { empty, error };
      return;
    }
    const role = roles[at];
    for (const line of lines) {
      if (line.kind !== role.kind || Math.abs(line.value! / role.value! - 1) > window + 1e-9) continue;
      if (((used.get(line.id) ?? 0) + 1) * units > availableOf(line)) continue;
      used.set(line.id, (used.get(line.id) ?? 0) + 1);
      const part = partFromStock(role.part!, line.value!, line.tolerance, line.id);
      visit(at + 1, filledProject(project, [{ role, filling: { part } }]), empty, spent + (line.prices[0]?.unitCost ?? 0));
      used.set(line.id, used.get(line.id)! - 1);
    }
    visit(at + 1, project, empty + 1, spent);
  };
  visit(0, board.project, 0, 0);
  return best;
}

function usage(result: FillResult): Map<string, number> {
  const counts = new Map<string, number>();
  for (const { line, role } of result.placed) if (role.kind !== "op-amp") counts.set(line.id, (counts.get(line.id) ?? 0) + 1);
  return counts;
}

const near = (value: number): fc.Arbitrary<number> => fc.integer({ min: -24, max: 24 }).map((p) => Number((value * (1 + p / 100)).toPrecision(4)));
const valuesArbitrary = fc.tuple(fc.integer({ min: 50, max: 400 }), fc.integer({ min: 300, max: 700 }), fc.integer({ min: 2000, max: 9000 }));

describe("a board filled from the drawer", () => {
  it("is filled as trying every way fills it, with short stock, several units and a ceiling", () => {
    fc.assert(
      fc.property(
        fc.array(valuesArbitrary, { minLength: 1, maxLength: 2 }).chain((values) => {
          const wanted = values.flatMap(([c, r, g]) => [["capacitor", c * 1e-9], ["resistor", r], ["capacitor", g * 1e-12]] as const);
          const stocked = fc.constantFrom(...wanted).chain(([kind, value]) => fc.record({ kind: fc.constant(kind), value: near(value), quantity: fc.integer({ min: 0, max: 3 }), cost: fc.integer({ min: 1, max: 9 }) }));
          return fc.tuple(fc.constant(values), fc.array(stocked, { minLength: 2, maxLength: 5 }));
        }),
        fc.integer({ min: 1, max: 2 }),
        fc.option(fc.integer({ min: 3, max: 25 }), { nil: undefined }),
        (case_, units, ceiling) => {
          const [values, stocked] = case_;
          const board = smallBoard(values);
          const lines = stocked.map(({ kind, value, quantity, cost }, i) => lineOf(`L${i}`, kind, value, { quantity, prices: [{ from: 1, unitCost: cost / 10 }] }));
          const only = values.length === 1 ? ["b0.seriesC", "b0.seriesR", "b0.gyratorC"] : ["b0.seriesC", "b1.seriesC", "b1.gyratorC"];
          const opts: FillOpts = { only, units, pairs: false, ...(ceiling === undefined ? {} : { ceiling: { amount: ceiling / 10, currency: "EUR" } }) };
          const result = fillBoard(board, lines, opts);
          const wanted = bruteForce(board, only, lines, opts);
          expect(result.unplaced).toHaveLength(wanted.empty);
          // Lines that do the same may differ by their tolerance and price alone.
          expect(objective(result.project, board.project, only)).toBeCloseTo(wanted.error, 6);
          expect(result.error ** 2).toBeCloseTo(errorOf(result.project, board.project), 9);
          expect(result.isExhaustive).toBe(true);
          for (const [id, count] of usage(result)) expect(count * units).toBeLessThanOrEqual(availableOf(lines.find((l) => l.id === id)!));
        },
      ),
      { numRuns: 60 },
    );
  }, 30_000);

  it("comes as near by search as by trying every way, where there are too many ways to try", () => {
    let exact = 0;
    const runs = 4;
    for (let run = 0; run < runs; run++) {
      const board = smallBoard([[180 + 11 * run, 470, 3300 + 130 * run]]);
      const shift = (i: number, k: number): number => 1 + (((i * 37 + run * 11 + k * 5) % 35) - 17) / 100;
      const lines = [
        ...Array.from({ length: 8 }, (_, i) => lineOf(`S${i}`, "capacitor", (180 + 11 * run) * 1e-9 * shift(i, 1), { quantity: 1 })),
        ...Array.from({ length: 8 }, (_, i) => lineOf(`R${i}`, "resistor", 470 * shift(i, 2), { quantity: 1 })),
        ...Array.from({ length: 8 }, (_, i) => lineOf(`G${i}`, "capacitor", (3300 + 130 * run) * 1e-12 * shift(i, 3), { quantity: 1 })),
        ...Array.from({ length: 5 }, (_, i) => lineOf(`T${i}`, "potentiometer", 10e3 * shift(i, 4), { quantity: 1, tolerance: 0.2 })),
      ];
      const only = ["b0.seriesC", "b0.seriesR", "b0.gyratorC", "b0.slider"];
      // Single parts against every way of placing single parts.
      const result = fillBoard(board, lines, { only, pairs: false });
      expect(result.isExhaustive).toBe(false);
      const wanted = bruteForce(board, only, lines, {});
      const reached = objective(result.project, board.project, only);
      expect(reached).toBeLessThanOrEqual(wanted.error * 1.25 + 1e-6);
      if (reached <= wanted.error + 1e-6) exact++;
    }
    expect(exact).toBeGreaterThanOrEqual(runs / 2);
  }, 30_000);

  it.each(DEMOS)("has a line for every role of %s, close to its design, within stock", (name) => {
    const board = demo(name);
    const lines = fullDrawer();
    const result = fillBoard(board, lines, { units: 2 });
    expect(result.unplaced).toEqual([]);
    expect(result.placed).toHaveLength(boardRoles(board).length);
    expect(result.error).toBeLessThan(0.15);
    const { project } = result;
    expect(applyPatch(board.project, result.patch)).toEqual(project);
    const bill = buildBill(resolveBoard(project), lines, 2);
    expect(bill.isReady).toBe(true);
    for (const { left, line, candidate } of result.placed) expect(left).toBe(Math.min(...bill.rows.filter((r) => (candidate?.lines ?? [line]).some((l) => l.id === r.line.id)).map((r) => r.available - r.total)));
    expect(bill.costPerUnit).toHaveLength(1);
    expect(bill.costPerUnit[0].amount).toBeCloseTo(result.cost[0].amount, 9);
    for (const { line, candidate } of result.placed) if (candidate && candidate.joined === null) expect(Math.abs(candidate.value! / line.value! - 1)).toBeLessThan(1e-12);
    expect(fillBoard(board, lines, { units: 2 })).toEqual(result);
  });

  it("joins two pieces where the nearest single one is far off, and is better for it", () => {
    const board = demo("curlew-pedal");
    // 1.2 µF is what the lowest band wants.
    const lines = fullDrawer().filter((l) => l.kind !== "capacitor" || Math.abs(l.value! / 1.2e-6 - 1) > 0.06);
    const joined = fillBoard(board, lines);
    const single = fillBoard(board, lines, { pairs: false });
    expect(joined.error).toBeLessThan(single.error / 2);
    expect(joined.placed.filter((p) => p.candidate?.joined).map((p) => p.role.name)).toContain("b100.seriesC");
    for (const { candidate } of joined.placed) if (candidate) expect(Math.abs(candidate.deviation)).toBeLessThan(0.05);
  });

  it("changes nothing where every value is there", () => {
    const board = demo("saltmarsh-voice-channel");
    const lines = boardRoles(board).map((r, i) => lineOf(`L${i}`, r.kind, r.type ?? r.value!, { quantity: 20 }));
    const result = fillBoard(board, lines);
    expect(result.error).toBe(0);
    expect(result.unplaced).toEqual([]);
    for (const { role, line } of result.placed) if (role.kind !== "op-amp") expect(line.value).toBe(role.value);
  });

  it("counts op amps by the package", () => {
    const board = demo("saltmarsh-voice-channel");
    // Seven TL072 amplifiers are four duals; two NE5532 amplifiers are one.
    const fill = (tl: number, ne: number) => fillBoard(board, [...fullDrawer().filter((l) => l.kind !== "op-amp"), lineOf("TL", "op-amp", "TL072", { quantity: tl }), lineOf("NE", "op-amp", "NE5532", { quantity: ne })], { units: 3, only: boardRoles(board).filter((r) => r.kind === "op-amp").map((r) => r.name) });
    expect(fill(12, 3).unplaced).toEqual([]);
    expect(fill(11, 3).unplaced.map((u) => u.role.name)).toHaveLength(7);
    expect(fill(11, 3).unplaced[0].reason).toBe("12 TL072 packages are needed (7 amplifiers a unit), 11 are free in one line");
    expect(fill(12, 2).unplaced).toHaveLength(2);
  });

  it("says why it leaves a role alone", () => {
    const board = demo("saltmarsh-voice-channel");
    const reason = (lines: readonly StockedLine[], opts: FillOpts = {}) => fillBoard(board, lines, { only: ["b1k.seriesC"], ...opts }).unplaced[0]?.reason;
    expect(reason([])).toBe("the drawer has no capacitor");
    expect(reason([lineOf("C", "capacitor", 270e-9)])).toMatch(/no value within 20 %.*nearest is C, 50 % above\)/);
    expect(reason([lineOf("C", "capacitor", 180e-9, { rating: 10 })])).toMatch(/^C: rated 10 V, but/);
    expect(reason([lineOf("C", "capacitor", 180e-9, { quantity: 3 })], { units: 4 })).toMatch(/1 too few of C: 3 are free/);
    expect(reason([lineOf("C", "capacitor", 180e-9, { currency: "USD" })], { ceiling: { amount: 9, currency: "EUR" } })).toMatch(/no price in EUR/);
    expect(reason([lineOf("C", "capacitor", 180e-9, { technology: "tantalum" })])).toMatch(/polarised/);
  });

  it("takes a sound part before one with a caution, however near that is", () => {
    const board = demo("saltmarsh-voice-channel");
    const lines = [lineOf("wet", "capacitor", 22e-6, { technology: "electrolytic", rating: 35 }), lineOf("dry", "capacitor", 20e-6)];
    const only = ["out.couplingC"];
    expect(fillBoard(board, lines, { only }).placed[0].line.id).toBe("dry");
    const left = fillBoard(board, lines.slice(0, 1), { only }).placed[0];
    expect(left.line.id).toBe("wet");
    expect(left.problems[0]).toMatchObject({ level: "caution", about: "polarity" });
  });

  it("keeps to a ceiling, at the price of some error, and says where it cannot", () => {
    const board = demo("saltmarsh-voice-channel");
    // The exact values are dear, E6 is cheap.
    const cheap = (v: number): boolean => [1, 1.5, 2.2, 3.3, 4.7, 6.8].some((m) => Math.abs(Math.log10(v / m) - Math.round(Math.log10(v / m))) < 1e-6);
    const lines = fullDrawer().map((l) => ({ ...l, prices: [{ from: 1, unitCost: l.value !== null && cheap(l.value) ? 0.05 : 0.5 }] }));
    const free = fillBoard(board, lines);
    const spent = free.cost[0].amount;
    const tight = fillBoard(board, lines, { ceiling: { amount: spent - 4, currency: "EUR" } });
    expect(tight.isWithinCeiling).toBe(true);
    expect(tight.unplaced).toEqual([]);
    expect(tight.cost[0].amount).toBeLessThanOrEqual(spent - 4);
    expect(tight.error).toBeGreaterThan(free.error);
    expect(tight.error).toBeLessThan(1.5);
    expect(fillBoard(board, lines, { ceiling: { amount: 1, currency: "EUR" } }).isWithinCeiling).toBe(false);
  });

  it("leaves alone what already has its line, where asked", () => {
    const board = demo("saltmarsh-voice-channel");
    const project: Project = { ...board.project, blocks: board.project.blocks.map((b) => (b.id === "b1k" ? { ...b, parts: { ...b.parts, seriesC: { value: 150e-9, stock: "mine" } } } : b)) };
    const lines = [...fullDrawer(), lineOf("mine", "capacitor", 150e-9, { quantity: 1 })];
    const kept = fillBoard(resolveBoard(project), lines, { keep: true });
    expect(kept.project.blocks.find((b) => b.id === "b1k")!.parts!.seriesC).toEqual({ value: 150e-9, stock: "mine" });
    expect(kept.placed.filter((p) => p.line.id === "mine")).toHaveLength(1);
  });

  it("does not keep a line of another kind or value than the board says, nor half of a pair of one", () => {
    const board = demo("saltmarsh-voice-channel");
    const pair = { value: 182e-9, stock: "mine", second: { stock: "other", value: 82e-9, joined: "parallel" as const, firstValue: 100e-9 } };
    const own = { seriesR: { value: 470, stock: "megohm" }, gyratorR: { value: 91e3, stock: "film" }, seriesC: pair };
    const project: Project = { ...board.project, blocks: board.project.blocks.map((b) => (b.id === "b1k" ? { ...b, parts: { ...b.parts, ...own } } : b)) };
    const lines = [...fullDrawer(), lineOf("megohm", "resistor", 1e6), lineOf("film", "capacitor", 100e-9), lineOf("mine", "capacitor", 100e-9), lineOf("other", "capacitor", 91e-9)];
    const named = resolveBoard(project);
    expect(boardProblems(named, lines).map((p) => p.role.name)).toEqual(expect.arrayContaining(["b1k.seriesR", "b1k.gyratorR", "b1k.seriesC"]));
    const only = ["b1k.seriesR", "b1k.gyratorR", "b1k.seriesC"];
    const { project: after, placed } = fillBoard(named, lines, { keep: true, only });
    expect(placed.map((p) => [p.role.name, p.candidate === null])).toEqual(expect.arrayContaining(only.map((name) => [name, false])));
    expect(boardProblems(resolveBoard(after), lines).filter((p) => only.includes(p.role.name))).toEqual([]);
  });
});


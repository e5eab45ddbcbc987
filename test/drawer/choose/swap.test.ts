import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { bandFigures } from "../../../core/analysis/bands.ts";
import { instability, troubleText } from "../../../core/analysis/summary.ts";
import { logFrequencies, ResponseSweep } from "../../../core/analysis/response.ts";
import { hasFault } from "../../../core/drawer/place-problems.ts";
import { buildBill } from "../../../core/drawer/bill.ts";
import { fillBoard } from "../../../core/drawer/fill.ts";
import { filledProject, findRole } from "../../../core/drawer/roles.ts";
import { rankSwaps, type Swap, type SwapOpts } from "../../../core/drawer/swap.ts";
import { freeForBuild, type StockedLine } from "../../../core/drawer/stock.ts";
import { applyPatch } from "../../../core/model/patch.ts";
import type { Project } from "../../../core/model/project.ts";
import { restoreProject } from "../../../core/model/restore.ts";
import { serializeProject } from "../../../core/model/serialize.ts";
import { resolveBoard, type Board } from "../../../core/net/board.ts";
import { compileBoard } from "../../../core/net/star.ts";
import { bandOf, oneBus } from "../../helpers/boards.ts";
import { fullDrawer, lineOf } from "../../helpers/drawer-lines.ts";

const demo = (name: string): Board => resolveBoard(restoreProject(readFileSync(new URL(`../../../assets/demo/${name}.bandwright`, import.meta.url), "utf8")).project);
const voice = demo("saltmarsh-voice-channel");
const pedal = demo("curlew-pedal");

function rank(board: Board, name: string, lines: readonly StockedLine[], opts: SwapOpts = {}): Swap {
  const role = findRole(board, name);
  if (!role) throw new Error(`no role ${name}`);
  return rankSwaps(board, role, lines, opts);
}

const frequency = logFrequencies(20, 20_000, 121);
function gainOf(project: Project, positions: Readonly<Record<string, number>> = {}): Float64Array {
  const compiled = compileBoard(resolveBoard(project), { positions });
  return new ResponseSweep(compiled, frequency).run(compiled.positions).gain.slice();
}
const departure = (a: Float64Array, b: Float64Array): number => a.reduce((most, g, i) => Math.max(most, Math.abs(g - b[i])), 0);

describe("parts for a role, ranked by what they do to the board", () => {
  it.each([
    ["saltmarsh-voice-channel", "b1k.seriesC", "b1k"],
    ["saltmarsh-voice-channel", "b125.gyratorR", "b125"],
    ["saltmarsh-voice-channel", "b8k.seriesR", "b8k"],
    ["saltmarsh-voice-channel", "b2k.slider", "b2k"],
    ["curlew-pedal", "b800.gyratorC", "b800"],
  ])("says for %s, %s what the whole analysis of the changed project says", (name, roleName, band) => {
    const board = demo(name);
    const { candidates } = rank(board, roleName, fullDrawer(), { window: 1 });
    expect(candidates.length).toBeGreaterThan(1);
    const before = bandFigures(board).find((f) => f.id === band)!.boost;
    for (const c of candidates.slice(0, 6)) {
      const project = applyPatch(board.project, c.patch);
      const after = bandFigures(resolveBoard(project)).find((f) => f.id === band)!.boost;
      // A shelf's plateau is read where a scan finds it flattest, and the scans differ.
      const isShelf = before.q === null;
      expect(c.change.band).toBe(band);
      expect(c.change.peak).toBeCloseTo(after.peak - before.peak, isShelf ? 1 : 6);
      if (!isShelf) {
        expect(c.change.centre!).toBeCloseTo(after.frequency! / before.frequency! - 1, 6);
        expect(c.change.q!).toBeCloseTo(after.q! / before.q - 1, 6);
      }
      expect(c.asItStands).toBeCloseTo(departure(gainOf(project), gainOf(board.project)), 9);
      expect(c.atFullBoost).toBeCloseTo(departure(gainOf(project, { [band]: 1 }), gainOf(board.project, { [band]: 1 })), 9);
      expect(c.worst).toBe(Math.max(c.asItStands, c.atFullBoost));
    }
  });

  it("puts the least change first and what is barred last", () => {
    const lines = [
      lineOf("near", "capacitor", 0.19e-6), lineOf("same", "capacitor", 0.18e-6), lineOf("far", "capacitor", 0.215e-6),
      lineOf("weak", "capacitor", 0.18e-6, { rating: 10 }), lineOf("other", "resistor", 0.18e-6), lineOf("gone", "capacitor", 0.18e-6, { quantity: 3, reserved: 3 }), lineOf("off", "capacitor", 0.3e-6),
    ];
    const { candidates } = rank(voice, "b1k.seriesC", lines);
    expect(candidates.map((c) => c.lines[0].id)).toEqual(["same", "near", "far", "weak"]);
    expect(candidates[0].worst).toBe(0);
    expect(candidates.map(hasFault)).toEqual([false, false, false, true]);
    expect(candidates[3].problems[0]).toMatchObject({ level: "fault", about: "rating" });
    expect(candidates[0].cost).toEqual({ amount: 0.1, currency: "EUR" });
    expect(candidates[0].left).toBe(99);
  });

  it("tries what is sound before what is barred, however near that is", () => {
    const lines = [lineOf("near", "capacitor", 0.19e-6), ...[1, 2, 3].map((n) => lineOf(`weak${n}`, "capacitor", 0.18e-6, { rating: 10 }))];
    expect(rank(voice, "b1k.seriesC", lines, { most: 2 }).candidates.map((c) => c.lines[0].id)).toEqual(["near", "weak1"]);
  });

  it("counts stock for every unit, and prices at their quantity", () => {
    const lines = [lineOf("few", "capacitor", 0.18e-6, { quantity: 4 }), lineOf("many", "capacitor", 0.18e-6, { quantity: 30, reserved: 5, prices: [{ from: 1, unitCost: 0.2 }, { from: 10, unitCost: 0.15 }] })];
    const { candidates } = rank(voice, "b1k.seriesC", lines, { units: 10 });
    expect(candidates.map((c) => [c.lines[0].id, c.left, c.cost!.amount])).toEqual([["many", 15, 0.15]]);
    const short = rank(voice, "b1k.seriesC", lines, { units: 10, withShort: true }).candidates.find((c) => c.lines[0].id === "few")!;
    expect(short.problems).toEqual([{ level: "fault", about: "stock", message: "6 too few of few: 4 are free" }]);
  });

  it("counts as left what the bill of the board with the candidate counts, other roles on its line and op amps by the package included", () => {
    const lines = freeForBuild(fullDrawer(90), new Map([["TL072", 3], ["R-4.7E2", 40]])).map((l) => ({ ...l, reserved: l.reserved + 45 }));
    const filled = resolveBoard(fillBoard(voice, lines).project);
    let shared = 0;
    for (const name of ["b1k.seriesR", "b1k.seriesC", "b1k.opAmp", "b1k.slider", "eq.opAmp", "in.loadR"]) {
      for (const c of rank(filled, name, lines, { units: 3, pairs: true, most: 6 }).candidates) {
        const rows = buildBill(resolveBoard(applyPatch(filled.project, c.patch)), lines, 3).rows.filter((r) => c.lines.some((l) => l.id === r.line.id));
        expect([name, c.lines.map((l) => l.id), c.left]).toEqual([name, c.lines.map((l) => l.id), Math.min(...rows.map((r) => r.available - r.total))]);
        if (rows.some((r) => r.perUnit > c.lines.length)) shared++;
      }
    }
    expect(shared).toBeGreaterThan(4);
  });

  it("offers no line whose pieces the board's other roles take", () => {
    const both = (quantity: number) => rank(resolveBoard(filledProject(voice.project, [{ role: findRole(voice, "b63.seriesR")!, filling: { part: { value: 470, stock: "mine" } } }])), "b1k.seriesR", [lineOf("mine", "resistor", 470, { quantity })], { units: 2 }).candidates.length;
    expect([both(4), both(3)]).toEqual([1, 0]);
  });

  it("joins two pieces where asked, and writes both down", () => {
    const lines = [lineOf("C100n", "capacitor", 100e-9), lineOf("C82n", "capacitor", 82e-9, { tolerance: 0.1 }), lineOf("C360n", "capacitor", 360e-9)];
    expect(rank(voice, "b1k.seriesC", lines).candidates).toEqual([]);
    const { candidates } = rank(voice, "b1k.seriesC", lines, { pairs: true });
    const [best, second] = candidates;
    expect(best.lines.map((l) => l.id)).toEqual(["C360n", "C360n"]);
    expect(best.joined).toBe("series");
    expect(best.value).toBeCloseTo(180e-9, 15);
    expect(best.worst).toBeLessThan(1e-6);
    expect(second.joined).toBe("parallel");
    expect(new Set(second.lines.map((l) => l.id))).toEqual(new Set(["C100n", "C82n"]));
    expect(second.tolerance!).toBeCloseTo((100 * 0.05 + 82 * 0.1) / 182, 9);
    const project = applyPatch(voice.project, second.patch);
    const written = project.blocks.find((b) => b.id === "b1k")!.parts!.seriesC;
    expect(written.value).toBeCloseTo(182e-9, 15);
    expect(new Set([written.stock, written.second!.stock])).toEqual(new Set(["C100n", "C82n"]));
    expect(written.second!.firstValue + written.second!.value).toBeCloseTo(written.value, 15);
    // The file keeps it, and the response takes the whole value.
    const again = restoreProject(serializeProject(project)).project;
    expect(again.blocks.find((b) => b.id === "b1k")!.parts!.seriesC).toEqual(written);
    expect(serializeProject(again)).toBe(serializeProject(project));
  });

  it("judges a part that all bands share by the band that it moves most", () => {
    const { candidates } = rank(voice, "eq.feedbackR", [lineOf("R3k6", "resistor", 3600)]);
    const [only] = candidates;
    const figures = bandFigures(voice);
    const after = bandFigures(resolveBoard(applyPatch(voice.project, only.patch)));
    const worst = Math.max(...figures.map((f, i) => Math.abs(after[i].boost.peak - f.boost.peak)));
    expect(only.changes).toHaveLength(8);
    expect(Math.abs(only.change.peak)).toBeCloseTo(worst, 2);
  });

  it("tries op amps by type, refuses those without figures, and keeps the rest of the package in mind", () => {
    const { candidates } = rank(voice, "b1k.opAmp", [lineOf("a", "op-amp", "TL072"), lineOf("b", "op-amp", "ne5532"), lineOf("c", "op-amp", "XYZ9"), lineOf("d", "op-amp", "TL074", { prices: [{ from: 1, unitCost: 0.4 }] })]);
    expect(candidates.map((c) => c.lines[0].id).slice(0, 2)).toEqual(["a", "d"]);
    expect(candidates[0].worst).toBeLessThan(1e-9);
    expect(candidates.find((c) => c.lines[0].id === "d")!.cost!.amount).toBeCloseTo(0.1, 12);
    expect(candidates.at(-1)!.lines[0].id).toBe("c");
    expect(candidates.at(-1)!.problems[0]).toMatchObject({ level: "fault", about: "model" });
    const block = applyPatch(voice.project, candidates.find((c) => c.lines[0].id === "b")!.patch).blocks.find((b) => b.id === "b1k")!;
    expect(block).toMatchObject({ opAmp: "NE5532", opAmpStock: "b" });
  });

  it("says of a board too large to be looked at that nobody knows whether it oscillates with an op amp, as the check of the board does", () => {
    const wide = (bands: number): Board => resolveBoard(oneBus(Array.from({ length: bands }, (_, i) => bandOf(`x${i}`, "gyrator-section", { seriesC: 1e-6 / (i + 1), seriesR: 470, gyratorC: 1e-8 / (i + 1), gyratorR: 68e3 }, { opAmp: "TL072" })), { opAmp: "NE5532" }));
    const problems = (bands: number) => rank(wide(bands), "x3.opAmp", [lineOf("a", "op-amp", "TL062")]).candidates[0].problems;
    expect(problems(4)).toEqual([]);
    const [only] = problems(110);
    expect(only).toMatchObject({ level: "caution", about: "model", message: expect.stringMatching(/^whether the board oscillates with it is not known: it has \d+ nodes, and more than 320 would take too long$/) });
    expect(troubleText(instability(wide(110))!)).toBe(only.message.replace(" with it", ""));
  });

  it("holds polarised capacitors to the voltage that keeps them the right way round", () => {
    const wet = (c: number): StockedLine => lineOf("wet", "capacitor", c, { technology: "electrolytic", rating: 16 });
    const problems = (board: Board, role: string, c: number) => rank(board, role, [wet(c)]).candidates[0].problems.map((p) => [p.level, p.about]);
    // 4.5 V keep it; the signal takes off 0.7 V.
    expect(problems(pedal, "level.blockingC", 22e-6)).toEqual([]);
    expect(problems(pedal, "reference.bypassC", 47e-6)).toEqual([]);
    // Nothing keeps it, and close to the whole output voltage lies across it at low frequencies.
    expect(problems(voice, "b63.seriesC", 3.3e-6)).toEqual([["fault", "polarity"]]);
    // Nothing keeps it, but the signal across a large coupling capacitor is small.
    expect(problems(voice, "in.couplingC", 10e-6)).toEqual([]);
    const coupling = (rating: number) => rank(voice, "out.couplingC", [{ ...wet(22e-6), rating }]).candidates[0].problems.map((p) => [p.level, p.about]);
    expect(coupling(25)).toEqual([["caution", "polarity"]]);
    expect(coupling(10)).toEqual([["fault", "polarity"]]);
    expect(rank(voice, "b63.seriesC", [lineOf("np", "capacitor", 3.3e-6, { technology: "bipolar electrolytic", rating: 16 })]).candidates[0].problems).toEqual([]);
    // 4.5 V on a 4 V capacitor.
    expect(rank(pedal, "reference.bypassC", [lineOf("low", "capacitor", 47e-6, { technology: "electrolytic", rating: 4 })]).candidates[0].problems[0]).toMatchObject({ level: "fault", about: "rating" });
  });

  it("has nothing to compare with where the board has no finite response", () => {
    const lost = resolveBoard(filledProject(voice.project, [{ role: findRole(voice, "b1k.seriesC")!, filling: { part: { value: 1e300 } } }]));
    for (const work of [() => rank(lost, "b1k.seriesR", fullDrawer()), () => fillBoard(lost, fullDrawer())]) expect(work).toThrow("there is no finite response to compare with: some value of the board is out of any practical range");
  });

  it("bars a resistor that would burn", () => {
    const { candidates } = rank(voice, "b1k.seriesR", [lineOf("tiny", "resistor", 470, { rating: 0.001 }), lineOf("usual", "resistor", 470)]);
    expect(candidates.map((c) => [c.lines[0].id, c.problems.map((p) => p.about)])).toEqual([["usual", []], ["tiny", ["power"]]]);
  });

  it("knows the line that is in place", () => {
    const project: Project = { ...voice.project, blocks: voice.project.blocks.map((b) => (b.id === "b1k" ? { ...b, parts: { ...b.parts, seriesC: { value: 0.18e-6, stock: "mine" } } } : b)) };
    const { candidates } = rank(resolveBoard(project), "b1k.seriesC", [lineOf("mine", "capacitor", 0.18e-6), lineOf("other", "capacitor", 0.18e-6)]);
    expect(candidates.map((c) => [c.lines[0].id, c.isInPlace])).toEqual([["mine", true], ["other", false]]);
  });
});

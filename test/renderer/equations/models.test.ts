import { readFile } from "node:fs/promises";
import { beforeAll, describe, expect, test } from "vitest";
import { lossAccount } from "../../../core/analysis/interaction.ts";
import { polesAndZeros } from "../../../core/analysis/poles.ts";
import { loopMargins } from "../../../core/analysis/stability.ts";
import { restoreProject } from "../../../core/model/restore.ts";
import { resolveBoard, type Board } from "../../../core/net/board.ts";
import { accountModel, lossText } from "../../../renderer/equations/account-model.ts";
import { lawModels, nodesModel, placeIn, transferModel } from "../../../renderer/equations/block-model.ts";
import { planeOf } from "../../../renderer/equations/plane-model.ts";
import { dampingText, loopRows, qText, radText, rootRows, rootText, sortedRows, withinText, type RootRow } from "../../../renderer/equations/roots-model.ts";
import { shownBlock, shownFrequency } from "../../../renderer/equations/shown.ts";
import { OSCILLATING } from "../../fixtures/oscillating.ts";

let board: Board;
let rows: RootRow[];
const asIs = (id: string): string => id;

beforeAll(async () => {
  const file = new URL("../../../assets/demo/saltmarsh-voice-channel.bandwright", import.meta.url);
  board = resolveBoard(restoreProject(await readFile(file, "utf8")).project);
  rows = rootRows(plain(board));
});

function plain(of: Board): Parameters<typeof rootRows>[0] {
  const { poles, zeros, unstable } = polesAndZeros(of);
  const copy = (all: typeof poles) => all.map((pole) => ({ ...pole, shares: [...pole.shares] }));
  return { poles: copy(poles), zeros: [...zeros], unstable: copy(unstable) };
}

describe("what is shown", () => {
  test("follows the selection, and falls back to the first band", () => {
    expect(shownBlock(board, [], "block")).toBe("b63");
    expect(shownBlock(board, ["b63", "eq"], "block")).toBe("eq");
    expect(shownBlock(board, ["gone"], "poles")).toBe("b63");
    expect(shownBlock(board, ["eq"], "reference")).toBe("eq");
    const single: Board = { ...board, project: { ...board.project, supply: { kind: "single", voltage: 9, reference: { upperR: { value: 1e4 }, lowerR: { value: 1e4 }, bypassC: { value: 1e-5 } } } } };
    expect(shownBlock(single, ["eq"], "reference")).toBe("reference");
  });

  test("a block without a centre is worked out at 1 kHz", () => {
    expect(shownFrequency("eq", new Map())).toBe(1000);
  });
});

describe("laws", () => {
  test("stand as symbols, values and result, with what each part does", () => {
    const [inductance, resonance, , boost] = lawModels(placeIn(board, "b1k")!);
    expect(inductance).toMatchObject({ symbol: "L", result: "141 mH", moves: [{ part: "series R", percent: "+1.00 %" }, { part: "gyrator R" }, { part: "gyrator C" }] });
    expect(inductance.tex).toBe(
      "\\begin{aligned} L &= R_{\\text{series}}\\cdot R_{\\text{gyrator}}\\cdot C_{\\text{gyrator}} \\\\[9pt] &= 470\\,\\mathrm{\\Omega}\\cdot 91\\,\\mathrm{k\\Omega}\\cdot 3.3\\,\\mathrm{nF} \\\\[9pt] &= 141\\,\\mathrm{mH} \\end{aligned}",
    );
    expect(resonance.moves.map((m) => m.percent)).toEqual(["−0.50 %", "−0.50 %", "−0.50 %", "−0.50 %"]);
    expect(resonance.tex).toContain("2\\pi\\,\\sqrt");
    expect(resonance.tex).not.toContain("\\left(");
    expect(boost).toMatchObject({ result: "8.02 = +18.08 dB", moves: [{ part: "feedback R", percent: "+0.88 %" }, { part: "series R", percent: "−0.88 %" }] });
  });

  test("only bands have them", () => {
    expect(lawModels(placeIn(board, "eq")!)).toEqual([]);
    expect(placeIn(board, "reference")).toBeNull();
  });
});

describe("numbers at a frequency", () => {
  test("a stage's transfer function agrees with the whole chain", () => {
    const model = transferModel(board, placeIn(board, "eq")!, 1000)!;
    expect(model.bands).toHaveLength(8);
    expect(Math.abs(Number.parseFloat(model.onPaper) - Number.parseFloat(model.real))).toBeLessThan(0.05);
    expect(transferModel(board, placeIn(board, "b1k")!, 1000)).toBeNull();
  });

  test("every current of a node is listed with its part", () => {
    const { nodes, branches } = nodesModel(board, "b1k", 1000);
    expect(nodes.map((n) => n.node)).toEqual(["b1k.w", "b1k.a", "b1k.n", "b1k.o"]);
    expect(nodes[0].currents.map((c) => [c.part, c.towards])).toEqual([["b1k.slider.boost", "eq.m"], ["b1k.slider.cut", "eq.p"], ["b1k.seriesC", "b1k.a"]]);
    expect(nodes[0].volts).toBe("49.95 mV ∠ 12.04°");
    expect(branches.map((b) => b.part)).toEqual(["b1k.opAmp"]);
    expect(new Set(nodes.flatMap((n) => n.currents.map((c) => c.key))).size).toBeGreaterThan(8);
  });
});

describe("the account", () => {
  test("lists neighbours largest first, then the band's own loss, and adds up", () => {
    const account = lossAccount(board, "b1k");
    const model = accountModel({ ...account, shares: [...account.shares] });
    const losses = model.rows.map((row) => row.loss);
    expect(losses.slice(0, -1)).toEqual(losses.slice(0, -1).toSorted((a, b) => b - a));
    expect(model.rows.at(-1)).toMatchObject({ id: "b1k", loss: account.own });
    expect(losses.reduce((sum, loss) => sum + loss, 0)).toBeCloseTo(account.whole, 4);
    expect(Math.max(...model.rows.map((row) => row.length))).toBe(1);
    expect(model.total).toBe("+18.08 dB − 7.30 dB = +10.79 dB");
    expect(model.summary).toContain("goes to 500 Hz");
  });

  test("of a band alone has no neighbour to name, and a gain is told as one", () => {
    const model = accountModel({ id: "a", isolatedBoost: 10, peak: 10.5, whole: -0.5, own: -0.5, shares: [] });
    expect(model.rows).toHaveLength(1);
    expect(model.total).toBe("+10.00 dB + 0.50 dB = +10.50 dB");
    expect(model.summary).not.toContain("share");
    expect(model.rest).toBe("");
    const far = accountModel({ id: "a", isolatedBoost: 10, peak: 9, whole: 1, own: 0.997, shares: [{ id: "b", label: "b", loss: 0.002 }, { id: "c", label: "c", loss: 0.001 }] });
    expect(far.rows.map((row) => row.id)).toEqual(["a"]);
    expect(far.rest).toBe("2 other bands take less than 0.01 dB each.");
    expect(lossText(-0.5)).toBe("−0.50 dB");
    expect(lossText(-0.001)).toBe("0.00 dB");
  });
});

describe("roots", () => {
  test("a pair is one row, and every root is in some row", () => {
    const { poles, zeros } = polesAndZeros(board);
    const count = (kind: RootRow["kind"]): number => rows.filter((r) => r.kind === kind).reduce((sum, r) => sum + (r.isPair ? 2 : 1), 0);
    expect(count("pole")).toBe(poles.length);
    expect(count("zero")).toBe(zeros.length);
    for (const row of rows) {
      expect(row.q === null).toBe(!row.isPair);
      if (row.damping !== null && row.isPair) expect(row.damping).toBeCloseTo(1 / (2 * row.q!), 9);
    }
  });

  test("sort by any column, either way, with what has no value last", () => {
    const by = (column: "frequency" | "q" | "block", isDescending: boolean): RootRow[] => sortedRows(rows, { column, isDescending }, asIs);
    const frequencies = by("frequency", true).map((r) => r.frequency);
    expect(frequencies).toEqual(frequencies.toSorted((a, b) => b - a));
    for (const isDescending of [false, true]) {
      const qs = by("q", isDescending).map((r) => r.q);
      const known = qs.filter((q) => q !== null);
      expect(qs.slice(known.length).every((q) => q === null)).toBe(true);
      expect(known).toEqual(known.toSorted((a, b) => (isDescending ? b - a : a - b)));
    }
    const blocks = by("block", false).map((r) => r.block);
    expect(blocks.indexOf("b63")).toBeLessThan(blocks.indexOf("b125"));
  });

  test("an oscillating board's poles are marked, and only they", () => {
    const { poles, zeros, unstable } = plain(resolveBoard(OSCILLATING.slow));
    const marked = rootRows({ poles, zeros, unstable }).filter((r) => r.isUnstable);
    expect(marked).toHaveLength(1);
    expect(marked[0].re).toBeGreaterThan(0);
    expect(rootText(marked[0], asIs)).toMatch(/^pair of poles at 1\d\.\d kHz, Q −.*, unstable$/);
    expect(rows.some((r) => r.isUnstable)).toBe(false);
  });

  test("are written as people read them", () => {
    expect(radText(-4981.8)).toBe("−4982");
    expect(radText(-2.9275e6)).toBe("−2.928e6");
    expect(radText(0.0012345)).toBe("1.234e−3");
    expect(radText(0)).toBe("0");
    expect(withinText(1.9e-10)).toBe("2·10⁻¹⁰ dB");
    expect(qText({ q: -0.512 })).toBe("−0.512");
    expect(dampingText({ damping: null })).toBe("–");
  });
});

describe("the plane", () => {
  test("places a root by distance and angle, in the picture", () => {
    const plane = planeOf(rows, 800, 320);
    expect(plane.marks.reduce((sum, mark) => sum + mark.count, 0)).toBe(rows.length);
    for (const { x, y } of plane.marks) {
      expect(x).toBeGreaterThan(plane.left);
      expect(x).toBeLessThanOrEqual(plane.right);
      expect(y).toBeGreaterThanOrEqual(plane.top);
      expect(y).toBeLessThan(plane.height);
    }
    const at = plane.decades.map((d) => d.x);
    const steps = at.slice(1).map((x, i) => x - at[i]);
    for (const step of steps) expect(step).toBeCloseTo(steps[0], 9);
    const pair = plane.marks.find((mark) => mark.row.isPair)!;
    const real = plane.marks.find((mark) => !mark.row.isPair)!;
    expect(pair.y).toBeLessThan(real.y);
  });

  test("an unstable pole stands above the edge, a stable one below", () => {
    const { poles, zeros, unstable } = plain(resolveBoard(OSCILLATING.slow));
    const plane = planeOf(rootRows({ poles, zeros, unstable }), 800, 320);
    for (const { row, y } of plane.marks.filter((mark) => mark.row.kind === "pole")) expect(y < plane.edgeY).toBe(row.isUnstable);
    expect(plane.levels.at(-1)!.label).toBe("ζ −1");
    expect(planeOf(rows, 800, 320).levels.at(-1)!.label).toBe("ζ 0");
  });
});

test("loops stand smallest margin first, those that never cross last", () => {
  const loops = loopMargins(board);
  const shown = loopRows([{ ...loops[0], source: "x.opAmp", block: "x", phaseMargin: null, crossover: null, gainMargin: null, phaseCrossing: null }, ...loops]);
  expect(shown[0].isSmallest).toBe(true);
  expect(shown.filter((row) => row.isSmallest)).toHaveLength(1);
  const margins = shown.slice(0, -1).map((row) => Number.parseFloat(row.phaseMargin));
  expect(margins).toEqual(margins.toSorted((a, b) => a - b));
  expect(shown.at(-1)).toMatchObject({ source: "x.opAmp", phaseMargin: "never passes 1", crossover: "–", gainMargin: "never turns" });
});

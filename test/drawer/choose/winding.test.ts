import { describe, expect, it } from "vitest";
import { boardProblems } from "../../../core/drawer/board-problems.ts";
import { fillBoard } from "../../../core/drawer/fill.ts";
import { filledProject, findRole } from "../../../core/drawer/roles.ts";
import type { StockedLine } from "../../../core/drawer/stock.ts";
import { rankSwaps } from "../../../core/drawer/swap.ts";
import type { Part, Project } from "../../../core/model/project.ts";
import { resolveBoard, type Board } from "../../../core/net/board.ts";
import { bandOf, oneBus } from "../../helpers/boards.ts";
import { lineOf } from "../../helpers/drawer-lines.ts";

const COIL: Part = { value: 0.12, windingR: 60 };
const boardOf = (inductor: Part, bands = 1): Board =>
  resolveBoard(oneBus(Array.from({ length: bands }, (_, i) => bandOf(`b${i}`, "inductor-section", { seriesC: (220 / 3 ** i) * 1e-9, seriesR: 390, inductor: { ...inductor, value: inductor.value / 3 ** i } }, { slider: { position: 0.7 } }))));
const coil = (id: string, value: number, windingR: number | null): StockedLine => lineOf(id, "inductor", value, { windingR, quantity: 1 });
const coilAt = (project: Project, id = "b0"): Part => project.blocks.find((b) => b.id === id)!.parts!.inductor;

describe("a coil's winding resistance", () => {
  it("comes with the line, and decides where the inductance does not", () => {
    const lines = [coil("A", 0.12, 5), coil("B", 0.12, 64), coil("C", 0.12, 150)];
    const { project, placed } = fillBoard(boardOf(COIL), lines, { only: ["b0.inductor"] });
    expect(placed[0]).toMatchObject({ line: { id: "B" }, problems: [] });
    expect(coilAt(project)).toEqual({ value: 0.12, windingR: 64, tolerance: 0.05, stock: "B" });
    const { candidates } = rankSwaps(boardOf(COIL), findRole(boardOf(COIL), "b0.inductor")!, lines);
    expect(candidates.map((c) => c.lines[0].id)).toEqual(["B", "A", "C"]);
    // 90 Ω more in the leg take boost away.
    expect(candidates[2].change.peak).toBeLessThan(-1);
  });

  it("that is not stated is kept from the part before, as something to weigh", () => {
    const [only] = fillBoard(boardOf(COIL), [coil("A", 0.12, null)], { only: ["b0.inductor"] }).placed;
    expect(only.problems).toEqual([{ level: "caution", about: "winding", message: "winding resistance not stated: the 60 Ω of the part before are kept" }]);
    const swap = (part: Part) => rankSwaps(boardOf(part), findRole(boardOf(part), "b0.inductor")!, [coil("A", 0.12, null)]).candidates[0].problems.map((p) => [p.level, p.message]);
    expect(swap({ value: 0.12 })).toEqual([["caution", "winding resistance not stated: none is reckoned with"]]);
    expect(swap({ ...COIL, selfC: 120e-12 })[1]).toEqual(["note", "the self-capacitance of the part before, 120 pF, is kept"]);
    // A coil that states it comes first.
    expect(fillBoard(boardOf(COIL), [coil("A", 0.12, null), coil("B", 0.123, 55)], { only: ["b0.inductor"] }).placed[0].line.id).toBe("B");
  });

  it("is weighed where there are too many ways to try them all, however many coils are nearer in value", () => {
    const board = boardOf(COIL, 2);
    const lines = [
      ...Array.from({ length: 20 }, (_, i) => coil(`X${i}`, 0.12 * (1 + (i - 10) / 1000), 300 + i)),
      coil("RIGHT", 0.123, 62),
      ...Array.from({ length: 20 }, (_, i) => coil(`Y${i}`, 0.04 * (1 + (i - 10) / 1000), i % 2 === 0 ? 4 : 280)),
      coil("TOO", 0.0385, 57),
    ];
    const result = fillBoard(board, lines, { only: ["b0.inductor", "b1.inductor", "b0.seriesC", "b1.seriesC"] });
    expect(result.isExhaustive).toBe(true);
    const tracks = Array.from({ length: 20 }, (_, i) => lineOf(`T${i}`, "potentiometer", 10e3 * (1 + i / 100), { technology: "linear", quantity: 1 }));
    const searched = fillBoard(board, [...lines, ...tracks], { only: ["b0.inductor", "b1.inductor", "b0.slider", "b1.slider"] });
    expect(searched.isExhaustive).toBe(false);
    for (const { placed } of [result, searched]) expect(placed.filter((p) => p.role.kind === "inductor").map((p) => p.line.id)).toEqual(["RIGHT", "TOO"]);
  });

  it("of the line that a board names is held against the board's", () => {
    const named = resolveBoard(filledProject(boardOf(COIL).project, [{ role: findRole(boardOf(COIL), "b0.inductor")!, filling: { part: { ...COIL, stock: "A" } } }]));
    expect(boardProblems(named, [coil("A", 0.12, 60)])).toEqual([]);
    expect(boardProblems(named, [coil("A", 0.12, null)])).toEqual([]);
    expect(boardProblems(named, [coil("A", 0.12, 90)])[0].problems).toEqual([{ level: "caution", about: "winding", message: "the board says 60 Ω of winding resistance, and A has 90 Ω" }]);
  });
});

import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { boardProblems } from "../../../core/drawer/board-problems.ts";
import { fillBoard } from "../../../core/drawer/fill.ts";
import { filledProject, findRole, type Filling } from "../../../core/drawer/roles.ts";
import { restoreProject } from "../../../core/model/restore.ts";
import { resolveBoard, type Board } from "../../../core/net/board.ts";
import { fullDrawer, lineOf } from "../../helpers/drawer-lines.ts";

const voice = resolveBoard(restoreProject(readFileSync(new URL("../../../assets/demo/saltmarsh-voice-channel.bandwright", import.meta.url), "utf8")).project);
const withIn = (name: string, filling: Filling): Board => resolveBoard(filledProject(voice.project, [{ role: findRole(voice, name)!, filling }]));

describe("the lines that a board names", () => {
  it("are all well after a fill", () => {
    const lines = fullDrawer();
    const filled = resolveBoard(fillBoard(voice, lines).project);
    // The output's electrolytic has no steady voltage; the drawer of the test has nothing better.
    expect(boardProblems(filled, lines).map((p) => [p.role.name, p.problems.map((q) => [q.level, q.about])])).toEqual([["out.couplingC", [["caution", "polarity"]]]]);
  });

  it("are held to kind, value, type, rating and polarity", () => {
    const found = (name: string, filling: Filling, line: ReturnType<typeof lineOf>) => boardProblems(withIn(name, filling), [line]).flatMap((p) => p.problems.map((q) => [q.level, q.about]));
    const part = (value: number): Filling => ({ part: { value, stock: "L" } });
    expect(found("b1k.seriesC", part(180e-9), lineOf("L", "capacitor", 180e-9))).toEqual([]);
    expect(found("b1k.seriesC", part(180e-9), lineOf("L", "resistor", 180))).toEqual([["fault", "kind"]]);
    expect(found("b1k.seriesC", part(180e-9), lineOf("L", "capacitor", 220e-9))).toEqual([["fault", "value"]]);
    expect(found("b1k.seriesC", part(180e-9), lineOf("L", "capacitor", 180e-9, { rating: 10 }))).toEqual([["fault", "rating"]]);
    expect(found("b1k.seriesC", part(180e-9), lineOf("L", "capacitor", 180e-9, { technology: "tantalum", rating: 35 }))).toEqual([["fault", "polarity"]]);
    expect(found("b1k.opAmp", { opAmp: "TL072", stock: "L" }, lineOf("L", "op-amp", "NE5532"))).toEqual([["fault", "kind"]]);
    expect(found("b1k.opAmp", { opAmp: "TL072", stock: "L" }, lineOf("L", "op-amp", "tl072"))).toEqual([]);
  });

  it("are held to it in both halves of a pair", () => {
    const pair: Filling = { part: { value: 182e-9, stock: "A", second: { stock: "B", value: 82e-9, joined: "parallel", firstValue: 100e-9 } } };
    const problems = boardProblems(withIn("b1k.seriesC", pair), [lineOf("A", "capacitor", 100e-9), lineOf("B", "capacitor", 91e-9, { rating: 10 })]);
    expect(problems.map((p) => [p.line.id, p.problems.map((q) => q.about)])).toEqual([["B", ["value", "rating"]]]);
  });
});

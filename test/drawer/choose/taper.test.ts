import { describe, expect, it } from "vitest";
import { fillBoard } from "../../../core/drawer/fill.ts";
import { findRole } from "../../../core/drawer/roles.ts";
import { rankSwaps } from "../../../core/drawer/swap.ts";
import { taperOf, taperProblems } from "../../../core/drawer/taper.ts";
import type { SliderLaw } from "../../../core/model/project.ts";
import { resolveBoard, type Board } from "../../../core/net/board.ts";
import { bandOf, oneBus } from "../../helpers/boards.ts";
import { lineOf } from "../../helpers/drawer-lines.ts";

describe("a taper", () => {
  it.each([
    ["carbon, linear", "linear"],
    ["lin", "linear"],
    ["Conductive plastic LINEAR", "linear"],
    ["carbon, log", "logarithmic"],
    ["logarithmic", "logarithmic"],
    ["carbon, audio taper", "logarithmic"],
    ["carbon, audio", "logarithmic"],
    ["carbon, audio law", "logarithmic"],
    ["audio, 60 mm", "logarithmic"],
    ["log pot", "logarithmic"],
    ["log carbon, 45 mm", "logarithmic"],
    ["reversed log", "reverse logarithmic"],
    ["anti-log", "reverse logarithmic"],
    ["reverse audio taper", "reverse logarithmic"],
    ["power law of 2", "power law 2"],
    ["reverse log", "reverse logarithmic"],
    ["carbon, anti-logarithmic", "reverse logarithmic"],
    ["carbon, power law", "power law"],
    ["carbon, power law 0,5", "power law 0.5"],
    ["slider, S-taper", "power law"],
    // Which of the two?
    ["linear or log", null],
    ["log or linear", null],
    ["log/lin", null],
    ["linear, reverse log", null],
    ["semi-log", null],
    ["semi-logarithmic, carbon", null],
    ["non-log", null],
    ["dual log pot catalog", null],
    ["log book", null],
    ["conductive plastic, for audio", null],
    ["for audio, conductive plastic", null],
    ["carbon", null],
    ["", null],
    // Letters mean one taper to one maker and another to the next.
    ["A10K", null],
    ["non-linear", null],
    ["cermet, linearity 1 %", null],
    ["cermet, power 2 W", null],
    ["analog grade", null],
    ["audio grade plastic", null],
  ])("“%s” is %s", (technology, expected) => {
    const taper = taperOf({ technology });
    expect(taper === null ? null : `${taper.name}${"power" in taper && taper.power !== null ? ` ${taper.power}` : ""}`).toBe(expected);
  });

  it.each<[SliderLaw, string, string | null, string?]>([
    ["linear", "linear", null],
    ["linear", "", "note", "taper not stated"],
    ["linear", "log", "fault", "its taper is logarithmic, but the slider's law is linear"],
    ["linear", "reverse log", "fault"],
    ["linear", "S-taper", "fault", "its taper is a power law, but the slider's law is linear"],
    ["linear", "power law 2", "fault", "its taper is a power law of 2, but the slider's law is linear"],
    // The same law under another name.
    ["linear", "power law 1", null],
    [{ power: 1 }, "linear", null],
    [{ power: 1.05 }, "linear", null],
    [{ power: 2 }, "linear", "fault", "its taper is linear, but the slider's law is a power law of 2"],
    [{ power: 2 }, "power law 2", null],
    [{ power: 2 }, "power law 2.1", null],
    [{ power: 2 }, "power law 0.5", "fault"],
    [{ power: 0.5 }, "S-taper", "note", "exponent of its taper not stated"],
    [{ power: 0.5 }, "log", "fault"],
    [{ power: 0.5 }, "", "note", "taper not stated"],
  ])("with a law of %j, “%s” is %s", (law, technology, level, message) => {
    const [problem] = taperProblems(law, { technology });
    expect(problem?.level ?? null).toBe(level);
    if (message !== undefined) expect(problem.message).toBe(message);
  });
});

describe("a slider's track", () => {
  const board = (law: SliderLaw): Board => resolveBoard(oneBus([bandOf("b", "gyrator-section", { seriesC: 180e-9, seriesR: 470, gyratorC: 3.3e-9, gyratorR: 68e3 }, { slider: { position: 0.7, law } })]));
  const track = (id: string, value: number, technology: string) => lineOf(id, "potentiometer", value, { technology });
  const LINES = [track("LOG", 10e3, "carbon, log"), track("LIN", 9500, "carbon, linear"), track("POWER", 11e3, "carbon, power law 2"), track("MUTE", 11.5e3, "carbon")];
  const fill = (law: SliderLaw, lines = LINES) => fillBoard(board(law), lines, { only: ["b.slider"] });

  it("is filled with what does not contradict its law, however near the others are", () => {
    expect(fill("linear").placed[0]).toMatchObject({ line: { id: "LIN" }, problems: [] });
    expect(fill({ power: 2 }).placed[0]).toMatchObject({ line: { id: "POWER" }, problems: [] });
    expect(fill({ power: 2 }, LINES.slice(0, 2)).unplaced[0].reason).toMatch(/^LOG: its taper is logarithmic, but the slider's law is a power law of 2/);
  });

  it("takes a line that does not say as fitting, and says so", () => {
    const nearer = [...LINES, track("NEAR", 10.1e3, "cermet")];
    expect(fill("linear", nearer).placed[0]).toMatchObject({ line: { id: "NEAR" }, problems: [{ level: "note", message: "taper not stated" }] });
  });

  it("is not kept where its taper contradicts the law, and kept where it does not say", () => {
    const named = (stock: string): Board => {
      const { value } = LINES.find((l) => l.id === stock)!;
      const { project } = board("linear");
      return resolveBoard({ ...project, blocks: project.blocks.map((b) => (b.slider ? { ...b, slider: { ...b.slider, track: { value: value!, stock } } } : b)) });
    };
    const kept = (stock: string) => fillBoard(named(stock), LINES, { only: ["b.slider"], keep: true }).placed[0];
    expect(kept("LOG").line.id).toBe("LIN");
    expect(kept("MUTE")).toMatchObject({ line: { id: "MUTE" }, candidate: null, problems: [{ level: "note" }] });
  });

  it("shows the others last among the candidates, each with the reason", () => {
    const { candidates } = rankSwaps(board("linear"), findRole(board("linear"), "b.slider")!, LINES);
    expect(candidates.map((c) => [c.lines[0].id, c.problems.map((p) => [p.level, p.about])])).toEqual([
      ["LIN", []],
      ["MUTE", [["note", "taper"]]],
      ["LOG", [["fault", "taper"]]],
      ["POWER", [["fault", "taper"]]],
    ]);
  });
});

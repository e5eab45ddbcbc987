import { describe, expect, test } from "vitest";
import type { Part, SecondPart } from "../../../core/model/project.ts";
import { partEditText, partText, piecesNote, piecesText } from "../../../renderer/editor/part-text.ts";

function pair(value: number, firstValue: number, second: number, joined: SecondPart["joined"]): Part {
  return { value, second: { value: second, firstValue, joined } };
}

describe("values as fields show them", () => {
  test("at rest with as many digits as can be read, for editing with all of them", () => {
    expect([partText(4700, "resistance"), partText(349.206349206e-9, "capacitance"), partText(1.8, "inductance")]).toEqual(["4.7 kΩ", "349.2 nF", "1.8 H"]);
    expect(partEditText({ value: 349.206349206e-9 }, "capacitance")).toBe("349.206349206n");
  });

  test("two pieces are told as people write them", () => {
    expect(piecesText(pair(4920, 4700, 220, "series"), "resistance")).toBe("4k7 + 220R in series");
    expect(piecesText(pair(12.2e-9, 10e-9, 2.2e-9, "parallel"), "capacitance")).toBe("10n ∥ 2n2 in parallel");
    expect(piecesText({ value: 4700 }, "resistance")).toBeNull();
    expect(piecesNote(pair(4920, 4700, 220, "series"), "resistance")).toBe("4k7 + 220R in series · typing replaces both");
    expect(piecesNote({ value: 4700 }, "resistance")).toBeNull();
  });

  test("nobody has to edit digits that nobody set", () => {
    const value = 1 / (1 / 4700 + 1 / 220);
    expect(String(value).length).toBeGreaterThan(12);
    expect(partEditText(pair(value, 4700, 220, "parallel"), "resistance")).toBe("210.2");
    expect(partText(value, "resistance")).toBe("210.2 Ω");
  });
});

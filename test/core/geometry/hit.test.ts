import { describe, expect, test } from "vitest";
import { knobY, positionAt } from "../../../core/geometry/band-place.ts";
import { blocksIn, hitTest, placeOf } from "../../../core/geometry/hit.ts";
import { layoutSheet } from "../../../core/geometry/layout.ts";
import { px } from "../../../core/geometry/units.ts";
import { bandValues, chainValues } from "../../../core/geometry/values.ts";
import { boardOf, gyratorAt, THIRD_OCTAVES } from "../../helpers/sheet-boards.ts";

const at = (x: number, y: number) => ({ x: px(x), y: px(y) });

function laidOut(frequencies: readonly number[], width = 1090) {
  const project = boardOf(frequencies.map((f, i) => {
    const band = gyratorAt(f, `b${i}`);
    return { ...band, slider: { ...band.slider!, position: (i % 11) / 10 } };
  }));
  const layout = layoutSheet({ project, figures: null, width, height: 780, range: { from: 20, to: 20e3 }, span: null, scroll: 0 });
  return { layout, blocks: new Map(project.blocks.map((b) => [b.id, b])) };
}

describe("hit test", () => {
  test.each([[[63, 125, 250, 500, 1000, 2000, 4000, 8000]], [THIRD_OCTAVES]])("finds every knob where it is drawn", (frequencies) => {
    const { layout, blocks } = laidOut(frequencies);
    for (const band of layout.bands) {
      const place = placeOf(layout, blocks, band.id, "knob")!;
      expect(hitTest(layout, blocks, at(place.x, place.y))).toEqual({ part: "knob", id: band.id });
    }
  });

  test("finds every value where it is written, but for those that a knob lies over", () => {
    const { layout, blocks } = laidOut([63, 125, 250, 500, 1000, 2000, 4000, 8000]);
    const values = [...layout.bands.flatMap((band) => bandValues(band, blocks.get(band.id)!)), ...layout.chain.flatMap(chainValues)];
    expect(values.length).toBeGreaterThan(8 * 4);
    for (const value of values) {
      const hit = hitTest(layout, blocks, at((value.box.left + value.box.right) / 2, value.y));
      if (hit?.part === "knob") continue;
      expect(hit).toMatchObject({ part: "value", id: value.id, value: { role: value.role } });
    }
  });

  test("on a crowded bus the only selected band shows its values, and they can be taken", () => {
    const { layout, blocks } = laidOut([100, 160, 250, 400, 630, 1000, 1600, 2500, 4000, 6300, 10e3, 16e3, 20, 31, 50, 80], 960);
    const band = layout.bands[3];
    expect([band.hasValues, band.detail]).toEqual([false, "short"]);
    const value = bandValues(band, blocks.get(band.id)!).find((v) => v.role === "seriesC")!;
    const place = at((value.box.left + value.box.right) / 2, value.y);
    expect(hitTest(layout, blocks, place)?.part).toBe("block");
    expect(hitTest(layout, blocks, place, band.id)).toMatchObject({ part: "value", id: band.id, value: { role: "seriesC" } });
  });

  test("finds blocks by their figures and symbols, and nothing on bare paper or in the response", () => {
    const { layout, blocks } = laidOut([100, 1000, 10e3]);
    for (const band of layout.bands) expect(hitTest(layout, blocks, at(band.x, band.figuresTop + 8))).toEqual({ part: "block", id: band.id });
    const [a, b] = layout.bands;
    expect(hitTest(layout, blocks, at((a.x + b.x) / 2, a.trackBottom))).toBeNull();
    expect(hitTest(layout, blocks, at(a.x, layout.frame.response.top + 5))).toBeNull();
    const eq = placeOf(layout, blocks, "eq", "block")!;
    expect(hitTest(layout, blocks, at(eq.x, eq.y))?.id).toBe("eq");
  });

  test("a marquee takes what it touches", () => {
    const { layout } = laidOut([100, 1000, 10e3]);
    const [a, b] = layout.bands;
    expect(blocksIn(layout, { left: a.x - 2, right: b.x + 2, top: a.trackTop, bottom: a.trackTop + 4 })).toEqual(["b0", "b1"]);
    expect(blocksIn(layout, { ...layout.frame.board })).toHaveLength(6);
  });

  test("a slider position and its height lead back to each other, boost up", () => {
    const { layout } = laidOut([1000]);
    const [band] = layout.bands;
    for (const position of [0, 0.25, 0.5, 1]) expect(positionAt(band, knobY(band, position))).toBeCloseTo(position, 9);
    expect(knobY(band, 1)).toBeLessThan(knobY(band, 0));
    expect(positionAt(band, -1e4)).toBe(1);
  });
});

import * as fc from "fast-check";
import { describe, expect, test } from "vitest";
import { runs } from "../../fixtures/runs.ts";
import { bandFrequency } from "../../../core/geometry/band-frequency.ts";
import { arrangedPlaces, layoutSheet, movedPlace, type LayoutOpts, type SheetLayout } from "../../../core/geometry/layout.ts";
import { pixelOf } from "../../../core/geometry/ruling.ts";
import { overlaps, type Box } from "../../../core/geometry/units.ts";
import { bandValues, chainValues, showsValues } from "../../../core/geometry/values.ts";
import type { Block, Project } from "../../../core/model/project.ts";
import { boardOf, gyratorAt, THIRD_OCTAVES, twoStages } from "../../helpers/sheet-boards.ts";

const RANGE = { from: 20, to: 20e3 };

function layOut(project: Project, opts: Partial<LayoutOpts> = {}): SheetLayout {
  return layoutSheet({ project, figures: null, width: 1090, height: 780, range: RANGE, span: null, scroll: 0, ...opts });
}

function expectApart(layout: SheetLayout): void {
  const { bands } = layout;
  for (let i = 0; i < bands.length; i++) {
    for (let j = i + 1; j < bands.length; j++) {
      // Places are whole pixels: sides may share one.
      const [a, b] = [bands[i].box, bands[j].box];
      expect(overlaps({ ...a, left: a.left + 1, right: a.right - 1 }, b), `${bands[i].id} and ${bands[j].id}`).toBe(false);
    }
  }
}

/** Where the letters of a value are, within the box in which it can be taken. */
function letters({ box, fontSize, y }: ReturnType<typeof bandValues>[number]): Box {
  return { left: box.left + 3, right: box.right - 3, top: y - fontSize * 0.4, bottom: y + fontSize * 0.4 };
}

const OCTAVES = [63, 125, 250, 500, 1000, 2000, 4000, 8000];

describe("layout", () => {
  test("an octave band hangs under its own frequency, with its values and all figures", () => {
    const layout = layOut(boardOf(OCTAVES.map((f) => gyratorAt(f))));
    for (const band of layout.bands) {
      expect(Math.abs(band.x - band.trueX!)).toBeLessThan(12);
      expect(band.detail).toBe("full");
      expect(band.hasValues).toBe(true);
    }
    expectApart(layout);
  });

  test("the ruling of the response is that of the board", () => {
    const layout = layOut(boardOf([gyratorAt(1000)]));
    const { ruling, response } = layout.frame;
    expect([response.left, response.right]).toEqual([ruling.left, ruling.right]);
    expect(layout.bands[0].trueX).toBe(pixelOf(ruling, layout.bands[0].frequency!));
  });

  test.each([["one rail", boardOf], ["two rails", twoStages]])("31 third-octave bands on %s stand apart at any width and zoom", (_, make) => {
    const project = make(THIRD_OCTAVES.map((f) => gyratorAt(f, `b${f}`.replace(".", "_"))));
    for (const width of [700, 1090, 1900]) {
      expectApart(layOut(project, { width }));
      expectApart(layOut(project, { width, span: { from: 300, to: 3000 } }));
    }
  });

  test("names and values at the ends of the ruling stand inside it", () => {
    for (const count of [31, 20, 12]) {
      for (const width of [716, 1090]) {
        const bands = THIRD_OCTAVES.slice(-count).map((f) => gyratorAt(f, `b${f}`.replace(".", "_")));
        const layout = layOut(boardOf(bands), { width });
        const { left, right } = layout.frame.ruling;
        for (const [index, band] of layout.bands.entries()) {
          // Slim names share two lines: each may be nearly two slots wide.
          const half = band.detail === "slim" ? 0.9 * band.slot : band.slot / 2;
          expect(band.x - half, band.id).toBeGreaterThanOrEqual(left);
          expect(band.x + half, band.id).toBeLessThanOrEqual(right);
          if (showsValues(band, true)) for (const value of bandValues(band, bands[index])) expect(value.box.right, `${band.id} ${value.role}`).toBeLessThanOrEqual(right + 4);
        }
      }
    }
  });

  test.each([
    ["octaves in a small window", OCTAVES, 716, 608],
    ["ten octaves in a small window", [31.5, ...OCTAVES, 16000], 716, 608],
    ["twelve bands on a usual screen", [31.5, 50, 80, 125, 200, 400, 800, 1600, 3150, 5000, 8000, 12500], 1112, 778],
  ])("all values, peak, centre and Q are written: %s", (_, frequencies, width, height) => {
    const two = (value: number): { value: number } => ({ value: Number(value.toPrecision(2)) });
    const bands = frequencies.map((f) => ({ ...gyratorAt(f, `b${f}`.replace(".", "_")), parts: { seriesC: two(220e-6 / f), seriesR: { value: 470 }, gyratorC: two(3.9e-6 / f), gyratorR: { value: 62e3 } } }));
    const layout = layoutSheet({ project: boardOf(bands), figures: null, width, height, range: RANGE, span: null, scroll: 0 });
    const values = layout.bands.flatMap((place, n) => bandValues(place, bands[n]));
    expect(layout.bands.filter((band) => !band.hasValues || !["full", "medium"].includes(band.detail) || band.figureRoom < 45)).toEqual([]);
    expect(layout.mostScroll).toBe(0);
    expect(values).toHaveLength(5 * bands.length);
    expect(values.filter((value) => value.fontSize < 10)).toEqual([]);
    for (const [i, a] of values.entries()) {
      for (const b of values.slice(i + 1)) expect(overlaps(letters(a), letters(b)), `${a.id} ${a.text} and ${b.id} ${b.text}`).toBe(false);
    }
  });

  test("whole ohms that stand close lose their letter, and a value that would run into the next band is left out", () => {
    const wide = { ...gyratorAt(1000), parts: { seriesC: { value: 220e-9 }, seriesR: { value: 470 }, gyratorC: { value: 3.92e-9 }, gyratorR: { value: 62e3 } } };
    const place = layOut(boardOf([31.5, ...OCTAVES, 16000].map((f) => (f === 1000 ? wide : gyratorAt(f, `b${f}`.replace(".", "_"))))), { width: 716, height: 608 }).bands.find((band) => band.id === wide.id)!;
    const texts = (at: typeof place): string[] => bandValues(at, wide).map((value) => value.text);
    expect(texts(place)).toEqual(["220n", "470", "3n92", "62k", "50k"]);
    expect(texts({ ...place, box: { ...place.box, right: place.box.right - 12 } })).toEqual(["470", "50k"]);
  });

  test("figures of very close bands are thinned out until neighbours stand apart", () => {
    const project = boardOf(THIRD_OCTAVES.map((f) => gyratorAt(f, `b${f}`.replace(".", "_"))));
    for (const width of [716, 1090, 1900]) {
      const written = layOut(project, { width }).bands.filter((band) => band.figureRoom > 0).toSorted((a, b) => a.x - b.x);
      expect(written.length).toBeGreaterThan(10);
      // As wide as `+11.1` at the smallest size.
      for (const band of written) expect(band.figureRoom).toBeGreaterThanOrEqual(27);
      for (const [n, band] of written.slice(1).entries()) expect(band.x - written[n].x).toBeGreaterThanOrEqual(band.figureRoom - 1);
    }
  });

  test("31 bands gain their values when zoomed in", () => {
    const project = boardOf(THIRD_OCTAVES.map((f) => gyratorAt(f, `b${f}`.replace(".", "_"))));
    expect(layOut(project).bands.every((b) => !b.hasValues)).toBe(true);
    expect(layOut(project, { span: { from: 500, to: 2000 } }).bands.every((b) => b.hasValues)).toBe(true);
  });

  test("62 bands at random stand apart, also at a fit", () => {
    fc.assert(
      fc.property(fc.array(fc.double({ min: 1.3, max: 4.3, noNaN: true }), { minLength: 62, maxLength: 62 }), (logs) => {
        expectApart(layOut(boardOf(logs.map((log, i) => gyratorAt(10 ** log, `b${i}`))), { width: 1400 }));
      }),
      runs(20),
    );
  });

  test("fits two rails on a usual screen, and scrolls no further than the board reaches", () => {
    const project = twoStages(THIRD_OCTAVES.slice(0, 20).map((f) => gyratorAt(f, `b${f}`.replace(".", "_"))));
    const layout = layOut(project);
    expect(layout.rails).toHaveLength(2);
    expect(layout.mostScroll).toBeLessThan(20);
    const low = layOut(project, { height: 480, scroll: 1e6 });
    expect(low.scroll).toBe(low.mostScroll);
    expect(low.rails[1].bottom).toBeLessThanOrEqual(low.frame.board.bottom + 15);
  });

  test("octaves on two rails keep their values on a usual screen", () => {
    const layout = layOut(twoStages(OCTAVES.map((f) => gyratorAt(f))), { height: 806 });
    expect(layout.mostScroll).toBe(0);
    expect(layout.bands.filter((band) => !band.hasValues)).toEqual([]);
  });

  test("what lies over the top takes room from the response, and from the board only where that has not enough", () => {
    const project = boardOf(OCTAVES.map((f) => gyratorAt(f)));
    const plain = layOut(project);
    const pixels = plain.frame.response.bottom - plain.frame.response.top;
    const some = layOut(project, { topInset: 50 });
    expect(some.frame.response).toEqual({ ...plain.frame.response, top: plain.frame.response.top + 50 });
    expect(some.bands).toEqual(plain.bands);
    const much = layOut(project, { topInset: pixels });
    expect(much.frame.response.bottom - much.frame.response.top).toBe(60);
    expect(much.frame.board.top).toBe(plain.frame.board.top + 60);
    // Without a response to show there is none to keep.
    const faulty = layOut(project, { topInset: pixels, hasResponse: false });
    expect(faulty.frame.board.top).toBeLessThan(plain.frame.board.top + 10);
  });

  test.each([[1440], [1090], [712]])("the chain stays inside the sheet, its values apart, at a width of %d", (width) => {
    const project = boardOf(OCTAVES.map((f) => gyratorAt(f)));
    const blocks = project.blocks.map((block) =>
      block.kind === "boost-cut-stage" ? { ...block, parts: { ...block.parts, feedbackC: { value: 47e-12 } } }
      : block.kind === "input" ? { ...block, parts: { ...block.parts, couplingC: { value: 100e-9 }, loadR: { value: 1e6 } } }
      : block);
    const { chain, frame } = layOut({ ...project, blocks }, { width, height: 608 });
    expect(Math.min(...chain.map((place) => place.x + place.drawing.left * place.grid))).toBeGreaterThan(0);
    const values = chain.flatMap((place) => chainValues(place));
    expect(values.map(({ text }) => text)).toEqual(expect.arrayContaining(["47p", "100n", "1M"]));
    for (const [i, a] of values.entries()) {
      expect(a.box.right, a.text).toBeLessThanOrEqual(frame.width);
      for (const b of values.slice(i + 1)) expect(overlaps(a.box, b.box), `${a.text} and ${b.text}`).toBe(false);
    }
  });

  test("draws what is wired wrongly: a band on no bus has a row of its own, a board without a stage its ends", () => {
    const project = boardOf([gyratorAt(1000)]);
    const unhung = layOut({ ...project, wires: project.wires.filter((w) => !w.from.endsWith(".bus")) });
    expect(unhung.rails.map((r) => r.rail.isLoose)).toEqual([false, true]);
    expect(unhung.bands[0].isLoose).toBe(true);
    const bare = layOut({ ...project, blocks: project.blocks.filter((b) => b.id !== "eq") });
    expect(bare.chain.map((c) => c.id).sort()).toEqual(["in", "out"]);
    expect(layOut({ ...project, blocks: [], wires: [] }).bands).toEqual([]);
  });

  test("a level, which has no frequency, stands at the right end", () => {
    const level: Block = { id: "lvl", kind: "level-section", slider: { track: { value: 10e3 }, position: 0.5 }, parts: { seriesR: { value: 680 } } };
    const layout = layOut(boardOf([level, gyratorAt(100)]));
    expect(bandFrequency(level, undefined)).toBeNull();
    expect(layout.bands.find((b) => b.id === "lvl")!.x).toBeGreaterThan(layout.frame.ruling.right - 100);
  });
});

describe("places by hand", () => {
  const [band] = [gyratorAt(1000)];

  test("a place that no hand gave says nothing", () => {
    const plain = layOut(boardOf([band]));
    const placed = layOut(boardOf([{ ...band, at: { x: 480, y: 160 } }]));
    expect(placed.bands).toEqual(plain.bands);
  });

  test("a moved band stays where it was put, in units of the ruling, at any zoom", () => {
    const layout = layOut(boardOf([band]));
    const at = movedPlace(layout, band.id, 100, 40)!;
    expect(at.byHand).toBe(true);
    const project = boardOf([{ ...band, at }]);
    const moved = layOut(project).bands[0];
    expect(Math.abs(moved.x - layout.bands[0].x - 100)).toBeLessThanOrEqual(1);
    expect(moved.trackTop - layout.bands[0].trackTop).toBeCloseTo(40, 0);
    expect(moved.trueX).toBe(layout.bands[0].trueX);
    const zoomed = layOut(project, { span: { from: 500, to: 5000 } });
    expect(Math.abs(zoomed.bands[0].x - pixelOf(zoomed.frame.ruling, 10 * 10 ** (at.x / 300)))).toBeLessThanOrEqual(1);
  });

  test("a move along one axis leaves the other as it was", () => {
    const start = { x: 651.3, y: 37.7, byHand: true };
    const layout = layOut(boardOf([{ ...band, at: start }]));
    expect(movedPlace(layout, band.id, 12, 0)!.y).toBe(37.7);
    expect(movedPlace(layout, band.id, 0, 12)!.x).toBe(651.3);
  });

  test("arranging gives back what was moved, and nothing else", () => {
    const project = boardOf([{ ...band, at: { x: 900, y: 30, byHand: true } }, gyratorAt(100)]);
    const places = arrangedPlaces(project, null, RANGE);
    expect(places.map((p) => p.id)).toEqual([band.id]);
    expect(places[0].at.byHand).toBeUndefined();
    const back = { ...project, blocks: project.blocks.map((b) => (b.id === band.id ? { ...b, at: places[0].at } : b)) };
    expect(layOut(back).bands.map((b) => b.x)).toEqual(layOut(boardOf([band, gyratorAt(100)])).bands.map((b) => b.x));
    expect(arrangedPlaces(back, null, RANGE)).toEqual([]);
  });

  test("the ends of the chain have their fixed places", () => {
    const layout = layOut(boardOf([band]));
    expect(movedPlace(layout, "in", 50, 50)).toBeNull();
    expect(movedPlace(layout, "eq", 0, 50)!.y).toBeGreaterThan(0);
  });
});

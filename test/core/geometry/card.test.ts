import { readFileSync } from "node:fs";
import * as fc from "fast-check";
import { describe, expect, test } from "vitest";
import { bandFigures } from "../../../core/analysis/bands.ts";
import { placeCard, type CardSize } from "../../../core/geometry/card.ts";
import { layoutSheet, type SheetLayout } from "../../../core/geometry/layout.ts";
import { overlaps, type Box } from "../../../core/geometry/units.ts";
import type { Project } from "../../../core/model/project.ts";
import { restoreProject } from "../../../core/model/restore.ts";
import { resolveBoard } from "../../../core/net/board.ts";
import { runs } from "../../fixtures/runs.ts";
import { CHECKOUT } from "../../helpers/app.ts";
import { boardOf, gyratorAt, THIRD_OCTAVES, twoStages } from "../../helpers/sheet-boards.ts";

/** As large as the forms of the card come out. */
const SIZES: readonly CardSize[] = [{ width: 122, height: 57 }, { width: 196, height: 31 }, { width: 338, height: 18 }];
const RANGE = { from: 20, to: 20e3 };

function demo(name: string): Project {
  return restoreProject(readFileSync(`${CHECKOUT}assets/demo/${name}.bandwright`, "utf8")).project;
}

function layOut(project: Project, width: number, height: number): SheetLayout {
  const figures = new Map(bandFigures(resolveBoard(project)).map((f) => [f.id, f]));
  return layoutSheet({ project, figures, width, height, range: RANGE, span: null, scroll: 0 });
}

/** What must stay in sight, from the layout alone: whole bands with their knobs and figures, the chain, the rails. */
function inSight(layout: SheetLayout): Box[] {
  const { left, right } = layout.frame.ruling;
  return [
    ...layout.bands.map((b) => b.box), ...layout.chain.map((c) => c.box),
    ...layout.rails.filter((r) => r.rail.stage).map((r) => ({ left, right, top: r.y, bottom: r.y + r.gap })),
  ];
}

const BOARDS: readonly (readonly [string, Project])[] = [
  ["saltmarsh-voice-channel", demo("saltmarsh-voice-channel")],
  ["curlew-pedal", demo("curlew-pedal")],
  ["ferry-room-third-octaves", demo("ferry-room-third-octaves")],
  ["31 bands on one bus", boardOf(THIRD_OCTAVES.map((f) => gyratorAt(f, `b${f}`.replace(".", "_"))))],
];

describe("the card of the selected band", () => {
  test.each(BOARDS.flatMap(([name, project]) => [[1092, 806], [716, 606]].map(([width, height]) => [name, width, height, project] as const)))("%s at %d × %d: every band has room for it, over no figure and no knob", (_name, width, height, project) => {
    const layout = layOut(project, width, height);
    const { ruling, board } = layout.frame;
    const shown = layout.bands.filter((b) => b.box.top < board.bottom);
    expect(shown.length).toBeGreaterThan(6);
    for (const band of shown) {
      const card = placeCard(layout, band, SIZES);
      expect(card, band.id).not.toBeNull();
      const { box, form } = card!;
      expect([box.right - box.left, box.bottom - box.top]).toEqual([SIZES[form].width, SIZES[form].height]);
      expect(inSight(layout).filter((other) => overlaps(other, box)), band.id).toEqual([]);
      expect(box.left).toBeGreaterThanOrEqual(ruling.left);
      expect(box.right).toBeLessThanOrEqual(width);
      expect(box.top).toBeGreaterThanOrEqual(board.top);
      expect(box.bottom).toBeLessThanOrEqual(board.bottom);
    }
  });

  test("stands close to its band: right below it where there is room, else right above its rails", () => {
    const crowded = layOut(BOARDS[3][1], 1092, 806);
    for (const band of crowded.bands) expect(placeCard(crowded, band, SIZES)!.box.top - band.box.bottom).toBeLessThan(8);
    const low = layOut(BOARDS[0][1], 716, 606);
    for (const band of low.bands.slice(0, 6)) {
      const { box } = placeCard(low, band, SIZES)!;
      expect(band.boostRailY - box.bottom, band.id).toBeGreaterThan(0);
      expect(band.boostRailY - box.bottom, band.id).toBeLessThan(12);
    }
  });

  test("finds room wherever there is some", () => {
    const size = SIZES[0];
    fc.assert(
      fc.property(fc.array(fc.double({ min: 1.4, max: 4.2, noNaN: true }), { minLength: 6, maxLength: 24 }), fc.boolean(), fc.integer({ min: 640, max: 1300 }), fc.integer({ min: 420, max: 800 }), (logs, isTwo, width, height) => {
        const bands = logs.map((log, i) => gyratorAt(10 ** log, `b${i}`));
        const project = isTwo ? twoStages(bands) : boardOf(bands);
        const layout = layoutSheet({ project, figures: null, width, height, range: RANGE, span: null, scroll: 0 });
        const { ruling, board } = layout.frame;
        const wires = layout.wires.flatMap((path) => path.slice(2).flatMap((_, i) => (i % 2 === 1 ? [] : [{ left: Math.min(path[i], path[i + 2]), right: Math.max(path[i], path[i + 2]), top: Math.min(path[i + 1], path[i + 3]), bottom: Math.max(path[i + 1], path[i + 3]) }])));
        // With the space that labels and the card itself keep.
        const clear = [...inSight(layout), ...wires].map((b) => ({ left: b.left - 22, right: b.right + 22, top: b.top - 8, bottom: b.bottom + 8 }));
        let isRoom = false;
        for (let left = ruling.left + 4; !isRoom && left + size.width <= width - 12; left += 3) {
          for (let top = board.top + 4; !isRoom && top + size.height <= board.bottom - 6; top += 3) {
            isRoom = !clear.some((other) => overlaps(other, { left, top, right: left + size.width, bottom: top + size.height }));
          }
        }
        const band = layout.bands.find((b) => b.box.top < board.bottom - 20)!;
        if (isRoom) expect(placeCard(layout, band, [size])).not.toBeNull();
      }),
      runs(60),
    );
  });

  test("keeps clear of what else is written for the band, and folds where only a line has room", () => {
    const layout = layOut(BOARDS[0][1], 716, 606);
    const band = layout.bands[4];
    const free = placeCard(layout, band, SIZES)!;
    expect(free.form).toBeGreaterThan(0);
    const moved = placeCard(layout, band, SIZES, [free.box]);
    expect(moved === null || !overlaps(moved.box, free.box)).toBe(true);
  });

  test("is not shown for a band that is out of sight", () => {
    const project = boardOf(THIRD_OCTAVES.map((f) => gyratorAt(f, `b${f}`.replace(".", "_"))));
    const layout = layoutSheet({ project, figures: null, width: 1092, height: 806, range: RANGE, span: { from: 1000, to: 4000 }, scroll: 0 });
    expect(placeCard(layout, layout.bands[0], SIZES)).toBeNull();
  });
});

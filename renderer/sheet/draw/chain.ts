import { referenceDrawing } from "../../../core/geometry/reference-drawing.ts";
import type { SheetLayout } from "../../../core/geometry/layout.ts";
import type { ChainPlace } from "../../../core/geometry/chain.ts";
import type { RailPlace } from "../../../core/geometry/rails.ts";
import { chainValues, drawingValues, referenceCode } from "../../../core/geometry/values.ts";
import { BLOCKS } from "../../../core/blocks/index.ts";
import { partsOf, type Project } from "../../../core/model/project.ts";
import { figureLine } from "./figure-line.ts";
import { drawDrawing, drawValues } from "./symbols.ts";
import type { Pen } from "./pen.ts";

/** The buses: two rails each, and what the lines of figures below them are. */
export function drawRails(pen: Pen, layout: SheetLayout, hasFigures: boolean): void {
  const { ruling } = layout.frame;
  for (const rail of layout.rails) {
    if (rail.rail.stage) {
      // From where the stage's own wires reach them.
      pen.line([ruling.left - 29.5 * layout.chainGrid, rail.y, ruling.right, rail.y], pen.inks.ink, 1.8);
      pen.line([ruling.left - 32 * layout.chainGrid, rail.y + rail.gap, ruling.right, rail.y + rail.gap], pen.inks.ink, 1.8);
      if (rail.rail.bands.length === 0) pen.text("no band on this bus yet", ruling.left + 24, rail.y + rail.gap + 24, { color: pen.inks.inkSoft, size: 12 });
    }
    if (rail.rail.isLoose) pen.text("On no bus: these take no part", ruling.left + 8, rail.top + 16, { color: pen.inks.warning, isBold: true, size: 12 });
    drawCaptions(pen, layout, rail, hasFigures);
  }
}

function drawCaptions(pen: Pen, layout: SheetLayout, rail: RailPlace, hasFigures: boolean): void {
  const first = layout.bands.find((band) => band.rail === rail.index && band.hand === null);
  if (!first || !hasFigures || rail.rail.isLoose) return;
  const x = layout.frame.ruling.left - 12;
  const write = (text: string, line: Parameters<typeof figureLine>[1]): void => pen.text(text, x, figureLine(first, line), { align: "right", color: pen.inks.inkSoft });
  if (first.detail === "full") {
    write("boost in circuit", "peak");
    write("cut in circuit", "cut");
    write("centre", "centre");
    write("width", "quality");
    write("as it stands", "now");
  } else {
    write("peak, dB", "peak");
    if (first.detail === "medium") {
      write("centre", "centre");
      write("width", "quality");
    }
    write("now, dB", "now");
  }
}

/** Wires between the blocks of the chain. */
export function drawWires(pen: Pen, layout: SheetLayout): void {
  for (const path of layout.wires) {
    if (path.length < 4) continue;
    pen.line(path, pen.inks.ink, 1.25);
  }
}

/** A block of the chain with its values, its name and its op amp. */
export function drawChainBlock(pen: Pen, place: ChainPlace, isSelected: boolean): void {
  const { inks } = pen;
  const { block, box } = place;
  if (isSelected) {
    pen.box((box.left + box.right) / 2, (box.top + box.bottom) / 2, box.right - box.left, box.bottom - box.top, { fill: inks.accentWash, stroke: inks.accent, lineWidth: 1.4, radius: 8 });
  }
  const parts = partsOf(block);
  drawDrawing(pen, place.drawing, place, (role) => parts[role] !== undefined);
  drawValues(pen, chainValues(place));
  const { grid, x, y } = place;
  const name = block.label ?? BLOCKS[block.kind].label;
  if (block.kind === "boost-cut-stage") {
    pen.text(name, x - 46 * grid, y - 20.5 * grid, { isBold: true, size: 12 });
    if (block.opAmp) pen.text(block.opAmp, x - 14 * grid, y - 17 * grid, { color: inks.inkSoft, size: 10.5 });
  } else if (block.kind === "input") pen.text(block.label ?? "in", x + 4 * grid, y + 21 * grid, { isBold: true, size: 12 });
  else if (block.kind === "output") pen.text(block.label ?? "out", x + 13.6 * grid, y + 16.5 * grid, { isBold: true, size: 12 });
  else if (block.opAmp) {
    // Beside a buffer that stands up, above one that lies.
    const isUp = box.bottom - box.top > box.right - box.left;
    if (isUp) pen.text(block.opAmp, box.right + 2, (box.top + box.bottom) / 2, { color: inks.inkSoft, size: 10.5 });
    else pen.text(block.opAmp, x + 6 * grid, y - 4 * grid, { color: inks.inkSoft, size: 10.5, align: "center" });
  }
}

/** The divider that a single supply makes its reference from. */
export function drawReference(pen: Pen, layout: SheetLayout, supply: Project["supply"]): void {
  if (supply.kind !== "single" || !layout.reference) return;
  const place = { ...layout.reference, grid: layout.chainGrid };
  const drawing = referenceDrawing(supply.reference.opAmp !== undefined);
  drawDrawing(pen, drawing, place, () => true);
  drawValues(pen, drawingValues("", drawing, place, (role) => referenceCode(supply.reference, role)));
  pen.text(`+${supply.voltage} V`, place.x + 7 * place.grid, place.y - 0.2 * place.grid, { size: 10.5 });
  pen.text("reference", place.x + 7 * place.grid, place.y - 4.2 * place.grid, { size: 11, color: pen.inks.inkSoft });
}

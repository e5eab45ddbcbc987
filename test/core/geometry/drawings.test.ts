import { describe, expect, test } from "vitest";
import { SYMBOL_LENGTH, type Drawing } from "../../../core/blocks/drawing.ts";
import { BLOCKS } from "../../../core/blocks/index.ts";
import { BLOCK_KINDS } from "../../../core/blocks/kinds.ts";
import { referenceDrawing } from "../../../core/geometry/reference-drawing.ts";

const key = (x: number, y: number): string => `${x.toFixed(3)},${y.toFixed(3)}`;

/** Where two-terminal symbols, amplifiers and marks want a wire. */
function terminals(drawing: Drawing): [number, number, string][] {
  return drawing.symbols.flatMap((s): [number, number, string][] => {
    if ("role" in s) {
      const half = SYMBOL_LENGTH[s.symbol] / 2;
      return s.isFlat ? [[s.x - half, s.y, s.role], [s.x + half, s.y, s.role]] : [[s.x, s.y - half, s.role], [s.x, s.y + half, s.role]];
    }
    if (s.symbol !== "amplifier") {
      if (s.symbol === "source") return [[s.x, s.y - 2, "source"], [s.x, s.y + 2, "source"]];
      return s.symbol === "terminal" ? [] : [[s.x, s.y, s.symbol]];
    }
    if (s.points === "up") return [[s.x, s.y, "tip"], [s.x - 2, s.y + s.length, "in"], [s.x + 2, s.y + s.length, "in"]];
    const base = s.points === "left" ? s.x + s.length : s.x - s.length;
    return [[s.x, s.y, "tip"], [base, s.y - 2, "in"], [base, s.y + 2, "in"]];
  });
}

const isBetween = (v: number, a: number, b: number): boolean => v >= Math.min(a, b) - 1e-9 && v <= Math.max(a, b) + 1e-9;

/** Whether a point lies on a wire. */
function isOnWire(drawing: Drawing, x: number, y: number): boolean {
  return drawing.wires.some(({ points }) => {
    for (let i = 0; i + 3 < points.length; i += 2) {
      const [ax, ay, bx, by] = points.slice(i, i + 4);
      const isOnLine = Math.abs((bx - ax) * (y - ay) - (by - ay) * (x - ax)) < 1e-9;
      if (isOnLine && isBetween(x, ax, bx) && isBetween(y, ay, by)) return true;
    }
    return false;
  });
}

describe.each([...BLOCK_KINDS.map((kind) => [kind, BLOCKS[kind].drawing] as const), ["reference", referenceDrawing(false)] as const, ["buffered reference", referenceDrawing(true)] as const])("drawing of %s", (_, drawing) => {
  test("every terminal meets a wire, another symbol or the wiper", () => {
    const all = terminals(drawing);
    const counts = new Map<string, number>();
    for (const [x, y] of all) counts.set(key(x, y), (counts.get(key(x, y)) ?? 0) + 1);
    for (const [x, y, name] of all) {
      const isPin = x === 0 && y === 0;
      expect(isPin || counts.get(key(x, y))! > 1 || isOnWire(drawing, x, y), `${name} at ${x}, ${y}`).toBe(true);
    }
  });

  test("joints lie on wires, and everything inside the area that it states", () => {
    for (const { x, y } of drawing.joints) expect(isOnWire(drawing, x, y), `joint at ${x}, ${y}`).toBe(true);
    for (const [x, y] of terminals(drawing)) {
      expect(x).toBeGreaterThanOrEqual(drawing.left);
      expect(x).toBeLessThanOrEqual(drawing.right);
      expect(y).toBeGreaterThanOrEqual(drawing.top);
      expect(y).toBeLessThanOrEqual(drawing.bottom);
    }
  });
});

test.each(BLOCK_KINDS)("%s draws each of its roles once", (kind) => {
  const drawn = BLOCKS[kind].drawing.symbols.flatMap((s) => ("role" in s ? [s.role] : []));
  expect(drawn.sort()).toEqual(BLOCKS[kind].roles.map((r) => r.role).sort());
});

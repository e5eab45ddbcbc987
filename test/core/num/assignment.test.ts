import * as fc from "fast-check";
import { describe, expect, it } from "vitest";
import { assign } from "../../../core/num/assignment.ts";

/** Total cost of an assignment; rows that go without cost nothing. */
function assignmentCost(cost: Float64Array, columns: number, assignment: Int32Array): number {
  let sum = 0;
  for (const [i, j] of assignment.entries()) if (j >= 0) sum += cost[i * columns + j];
  return sum;
}

/** Tries every way: the least cost with as many rows served as can be. */
function bruteForce(cost: readonly (readonly number[])[], columns: number): { readonly served: number; readonly cost: number } {
  let best = { served: -1, cost: Infinity };
  const visit = (row: number, used: number, served: number, sum: number): void => {
    if (row === cost.length) {
      if (served > best.served || (served === best.served && sum < best.cost)) best = { served, cost: sum };
      return;
    }
    visit(row + 1, used, served, sum);
    for (let j = 0; j < columns; j++) if (!(used & (1 << j)) && cost[row][j] !== Infinity) visit(row + 1, used | (1 << j), served + 1, sum + cost[row][j]);
  };
  visit(0, 0, 0, 0);
  return best;
}

const flat = (rows: readonly (readonly number[])[]): Float64Array => Float64Array.from(rows.flat());

describe("the assignment problem", () => {
  it("is solved as trying every permutation solves it", () => {
    const entry = fc.oneof(fc.integer({ min: -50, max: 50 }), fc.double({ min: 0, max: 1e-3, noNaN: true }), fc.constant(0));
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 8 }).chain((n) => fc.array(fc.array(entry, { minLength: n, maxLength: n }), { minLength: n, maxLength: n })), (rows) => {
        const found = assign(flat(rows), rows.length, rows.length);
        expect([...found].toSorted((a, b) => a - b)).toEqual(rows.map((_, i) => i));
        expect(assignmentCost(flat(rows), rows.length, found)).toBeCloseTo(bruteForce(rows, rows.length).cost, 9);
      }),
      { numRuns: 120 },
    );
  });

  it("serves as many as it can at the least cost, whatever the shape and whatever is barred", () => {
    const entry = fc.oneof({ weight: 4, arbitrary: fc.integer({ min: 0, max: 30 }) }, { weight: 1, arbitrary: fc.constant(Infinity) });
    fc.assert(
      fc.property(
        fc.tuple(fc.integer({ min: 1, max: 6 }), fc.integer({ min: 1, max: 6 })).chain(([r, c]) => fc.array(fc.array(entry, { minLength: c, maxLength: c }), { minLength: r, maxLength: r })),
        (rows) => {
          const columns = rows[0].length;
          const found = assign(flat(rows), rows.length, columns);
          const taken = [...found].filter((j) => j >= 0);
          const wanted = bruteForce(rows, columns);
          expect(new Set(taken).size).toBe(taken.length);
          expect(taken.length).toBe(wanted.served);
          expect(assignmentCost(flat(rows), columns, found)).toBeCloseTo(wanted.cost, 9);
        },
      ),
      { numRuns: 300 },
    );
  });

  // Worked by hand: rows take 2, 4, 1 of columns 1, 0, 2.
  it("gives the known answer of a small table", () => {
    expect([...assign(flat([[5, 2, 9], [4, 7, 8], [6, 5, 1]]), 3, 3)]).toEqual([1, 0, 2]);
  });

  it("gives nothing where there is nothing to give", () => {
    expect([...assign(new Float64Array(0), 0, 3)]).toEqual([]);
    expect([...assign(new Float64Array(0), 2, 0)]).toEqual([-1, -1]);
    expect([...assign(flat([[Infinity, Infinity]]), 1, 2)]).toEqual([-1]);
    expect([...assign(flat([[7], [3], [5]]), 3, 1)]).toEqual([-1, 0, -1]);
  });

  it("keeps apart costs that differ by little beside large ones", () => {
    expect([...assign(flat([[1e6, 1e6 + 1e-6], [1e6 + 1e-6, 1e6]]), 2, 2)]).toEqual([0, 1]);
  });

  it("deals two hundred to two hundred and fifty in good time, no worse than any exchange", () => {
    const [rows, columns] = [200, 250];
    const cost = Float64Array.from({ length: rows * columns }, (_, i) => ((i * 7919) % 10_007) / 10_007);
    const found = assign(cost, rows, columns);
    expect(new Set(found).size).toBe(rows);
    for (let a = 0; a < rows; a++) {
      for (let b = 0; b < a; b++) {
        const now = cost[a * columns + found[a]] + cost[b * columns + found[b]];
        expect(cost[a * columns + found[b]] + cost[b * columns + found[a]]).toBeGreaterThanOrEqual(now - 1e-12);
      }
    }
  });
});

/** Times choosing parts: what a person waits for when asking the drawer. Medians, ms. */
import { fillBoard } from "../../core/drawer/fill.ts";
import { bestPairs } from "../../core/drawer/pairs.ts";
import { findRole } from "../../core/drawer/roles.ts";
import { rankSwaps } from "../../core/drawer/swap.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { assign } from "../../core/num/assignment.ts";
import { randomFrom } from "../../core/num/random.ts";
import { fullDrawer, lineOf } from "../helpers/drawer-lines.ts";
import { tenBandBoard } from "../helpers/boards.ts";

export interface ChooseBench {
  readonly what: string;
  readonly ms: number;
}

/** @param median times a call: runs, warm-up, call */
export function benchChoose(median: (runs: number, warmUp: number, call: () => void) => number): ChooseBench[] {
  const board = resolveBoard(tenBandBoard("TL072"));
  const role = findRole(board, "b1000.seriesC")!;
  const shared = findRole(board, "eq.feedbackR")!;
  const around = (kind: "capacitor" | "resistor", value: number) => Array.from({ length: 50 }, (_, i) => lineOf(`L${i}`, kind, value * (0.81 + i * 0.0076)));
  const random = randomFrom(1);
  const values = Array.from({ length: 20_000 }, () => ({ value: 10 ** (1 + 5 * random()), available: 10 }));
  const cost = Float64Array.from({ length: 200 * 200 }, random);
  return [
    { what: "ranking 50 candidates for one band of ten, voltages checked", ms: median(9, 3, () => void rankSwaps(board, role, around("capacitor", role.value!))) },
    { what: "ranking 50 candidates for a part that ten bands share", ms: median(5, 2, () => void rankSwaps(board, shared, around("resistor", shared.value!))) },
    { what: "filling a ten-band board from 280 lines", ms: median(5, 1, () => void fillBoard(board, fullDrawer())) },
    { what: "the 50 nearest pairs of 20 000 lines", ms: median(5, 1, () => void bestPairs(1234.5, values, true, 50)) },
    { what: "dealing 200 pieces to 200 roles", ms: median(5, 1, () => void assign(cost, 200, 200)) },
  ];
}

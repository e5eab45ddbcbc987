import type { Run } from "../figure-texts.ts";
import type { Pen, TextOpts } from "./pen.ts";

/** Pixels between two runs of a line. */
const SPACE = 4;

export interface RunOpts extends Omit<TextOpts, "align" | "isStruck"> {
  readonly size: number;
}

export function widthOfRuns(pen: Pen, runs: readonly Run[], size: number, isBold = false): number {
  return runs.reduce((sum, run) => sum + pen.widthOf(run.text, size, isBold), 0) + SPACE * Math.max(0, runs.length - 1);
}

/** Runs side by side, the line as a whole centred on a place; what is void is struck and paler. */
export function drawRuns(pen: Pen, runs: readonly Run[], x: number, y: number, opts: RunOpts): void {
  const write = ({ text, isVoid }: Run, at: number, align: "left" | "center"): void =>
    pen.text(text, at, y, { ...opts, align, isStruck: isVoid, ...(isVoid ? { color: pen.inks.inkSoft } : {}) });
  if (runs.length === 1) {
    write(runs[0], x, "center");
    return;
  }
  let left = x - widthOfRuns(pen, runs, opts.size, opts.isBold) / 2;
  for (const run of runs) {
    write(run, left, "left");
    left += pen.widthOf(run.text, opts.size, opts.isBold) + SPACE;
  }
}

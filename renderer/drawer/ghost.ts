import { logFrequencies, ResponseSweep } from "../../core/analysis/response.ts";
import { FaultError } from "../../core/errors.ts";
import type { Project } from "../../core/model/project.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { compileBoard } from "../../core/net/star.ts";
import type { Range } from "../editor/results.ts";
import type { GhostSource } from "../editor/ui.ts";
import type { Curve, Ghost } from "../sheet/sheet-props.ts";

/** As many as the sheet's own curves have, so that the two can be held against each other point by point. */
const POINTS = 481;

/** What the sheet draws of a board with other parts: the whole response, and the selected band's alone. Null where there is none. */
export function ghostOf(project: Project, source: GhostSource, selection: readonly string[], range: Range): Ghost | null {
  try {
    const other = source.change(project);
    const compiled = compileBoard(resolveBoard(other));
    const sweep = new ResponseSweep(compiled, logFrequencies(range.from, range.to, POINTS));
    const curve = (positions: Float64Array): Curve => {
      const { gain, phase } = sweep.run(positions);
      return { frequency: sweep.frequency, gain: gain.slice(), phase: phase.slice() };
    };
    const chosen = selection.length === 1 ? compiled.bands.findIndex((band) => band.id === selection[0]) : -1;
    const only = new Float64Array(compiled.positions.length).fill(0.5);
    if (chosen >= 0) only[chosen] = compiled.positions[chosen] < 0.5 ? 0 : 1;
    return { label: source.label, total: curve(compiled.positions), alone: chosen >= 0 ? curve(only) : null };
  } catch (error) {
    if (error instanceof FaultError) return null;
    throw error;
  }
}

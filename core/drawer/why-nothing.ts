import type { Project } from "../model/project.ts";
import { candidatesFor, type CandidateOpts } from "./candidates.ts";
import type { BoardRole } from "./roles.ts";
import type { Money, StockedLine } from "./stock.ts";

const NAMES = { resistor: "resistor", capacitor: "capacitor", inductor: "inductor", potentiometer: "potentiometer or slider", "op-amp": "op amp" } as const;

/** Why nothing of the drawer goes into a role, from the nearest thing that there is. */
export function whyNothing(project: Project, role: BoardRole, lines: readonly StockedLine[], opts: Pick<CandidateOpts, "window" | "units" | "elsewhere" | "stress"> & { readonly ceiling?: Money }): string {
  const { ceiling, window = 0.2 } = opts;
  const ofKind = lines.filter((l) => l.kind === role.kind);
  if (ofKind.length === 0) return `the drawer has no ${NAMES[role.kind]}`;
  const [first] = candidatesFor(project, role, lines, { ...opts, pairs: false, withShort: true });
  if (first === undefined) {
    const off = (line: StockedLine): number => Math.abs(Math.log(line.value! / role.value!));
    const nearest = ofKind.reduce((best, line) => (off(line) < off(best) ? line : best));
    const ratio = nearest.value! / role.value! - 1;
    return `no value within ${percent(window)} (the nearest is ${nearest.id}, ${percent(Math.abs(ratio))} ${ratio > 0 ? "above" : "below"})`;
  }
  const fault = first.problems.find((p) => p.level === "fault");
  if (fault) return fault.about === "stock" ? fault.message : `${first.lines[0].id}: ${fault.message}`;
  return ceiling ? `no price in ${ceiling.currency} for what fits` : `every piece of ${first.lines[0].id} is taken`;
}

function percent(fraction: number): string {
  return `${Number((fraction * 100).toPrecision(3))} %`;
}

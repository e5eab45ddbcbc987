import table from "../../assets/op-amps.json" with { type: "json" };
import type { OpAmpModel, Project } from "./project.ts";

/** The name that means an ideal amplifier (a nullor) wherever an op amp is named. */
export const IDEAL = "ideal";

/** Built-in models: typical values from memory of data sheets, to be checked against the maker's current sheet. */
export const BUILT_IN_OP_AMPS: Readonly<Record<string, OpAmpModel & { readonly about: string; /** In one package. */ readonly amplifiers: number }>> = table.models;

/** Names that a block of this project may use: its own models first, then `ideal`, then the built-in table. */
export function opAmpNames(project: Pick<Project, "opAmps">): string[] {
  return [...new Set([...Object.keys(project.opAmps ?? {}), IDEAL, ...Object.keys(BUILT_IN_OP_AMPS)])];
}

/** The model behind a name: the project's own `opAmps` first, then `ideal`, then the built-in table; undefined where unknown. */
export function findOpAmp(project: Pick<Project, "opAmps">, name: string): OpAmpModel | typeof IDEAL | undefined {
  if (project.opAmps && Object.hasOwn(project.opAmps, name)) return project.opAmps[name];
  if (name === IDEAL) return IDEAL;
  return Object.hasOwn(BUILT_IN_OP_AMPS, name) ? BUILT_IN_OP_AMPS[name] : undefined;
}

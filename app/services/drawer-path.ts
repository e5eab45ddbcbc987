import { join, resolve } from "node:path";
import envPaths from "env-paths";

/** The user's own drawer: in the folder where programs keep a user's data, or where BANDWRIGHT_DRAWER says. */
export function ownDrawerPath(env: NodeJS.ProcessEnv = process.env): string {
  const told = env["BANDWRIGHT_DRAWER"];
  return told === undefined || told === "" ? join(envPaths("bandwright", { suffix: "" }).data, "drawer.sqlite") : resolve(told);
}

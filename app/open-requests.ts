import { resolve } from "node:path";

/**
 * The file among a program's arguments, absolute, or null. `skip` is how many arguments are the program itself:
 * one when installed, two from a checkout. Switches are the window system's business.
 */
export function fileArgument(argv: readonly string[], skip: number, folder: string): string | null {
  const file = argv.slice(skip).find((argument) => argument !== "" && !argument.startsWith("-"));
  return file === undefined ? null : resolve(folder, file);
}

/** What a second start hands to the first. */
export interface SecondStart {
  readonly path: string | null;
}

/** The path in what a second start handed over; null where there is none, or it is not ours. */
export function secondStartPath(data: unknown): string | null {
  return typeof data === "object" && data !== null && "path" in data && typeof data.path === "string" ? data.path : null;
}

import * as v from "valibot";

interface MethodDefinition {
  readonly args: v.GenericSchema;
  readonly result: v.GenericSchema;
  /** Mutating calls run one at a time, in the order they came. */
  readonly mutates: boolean;
}

/** One row of the table of methods. */
export function method<const D extends MethodDefinition>(definition: D): D {
  return definition;
}

/** A list that nobody changes. */
export function list<T>(item: v.GenericSchema<T>): v.GenericSchema<readonly T[]> {
  return v.array(item);
}

export const NOTHING = v.strictObject({});

/** Paths are absolute and never empty; no system takes one with a NUL in it. */
export const PATH = v.pipe(
  v.string(),
  v.minLength(1),
  v.maxLength(4096),
  v.check((path) => !path.includes("\0"), "must have no NUL character"),
);

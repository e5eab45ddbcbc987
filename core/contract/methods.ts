import * as v from "valibot";
import { PROJECT_FORMAT, type Project } from "../model/project.ts";
import { DRAWER_EVENTS, DRAWER_METHODS } from "./drawer-methods.ts";
import { FAULTS_SCHEMA } from "./failures.ts";
import { list, method, NOTHING, PATH } from "./method.ts";

const FINGERPRINT = v.pipe(v.string(), v.regex(/^[0-9a-f]{64}$/, "must be 64 hexadecimal digits"));

/** Only the outline is checked here: the service restores the document in full, with a fault for each thing wrong. */
const PROJECT = v.custom<Project>(
  (value) => typeof value === "object" && value !== null && "format" in value && value.format === PROJECT_FORMAT,
  "must be a project document",
);

const DEMO = v.object({ path: v.string(), name: v.string(), about: v.string() });

const ROOT = v.object({ name: v.string(), path: v.string() });

const ENTRY = v.object({
  name: v.string(),
  kind: v.picklist(["folder", "project"]),
  path: v.string(),
  /** Milliseconds since 1970. */
  modified: v.number(),
});

/** What the screens may ask of the machine: both ends validate with this table and take their types from it. */
export const METHODS = {
  /** What this shell can do, to be asked before anything that differs between shells. */
  "host.capabilities": method({
    args: NOTHING,
    result: v.object({
      /** `native`: use the `project.choose…` methods. `inPage`: show a chooser over `files.list`. */
      fileDialogs: v.picklist(["native", "inPage"]),
      version: v.string(),
      platform: v.string(),
    }),
    mutates: false,
  }),
  /** The file to show when a page comes up: the one that was opened or saved last in this run, else the one the user named, else a demo. */
  "project.launch": method({
    args: NOTHING,
    result: v.object({ path: v.nullable(v.string()) }),
    mutates: false,
  }),
  /** The projects that come with the program. They cannot be saved over. */
  "project.demos": method({
    args: NOTHING,
    result: v.object({ demos: list(DEMO) }),
    mutates: false,
  }),
  "project.open": method({
    args: v.strictObject({ path: PATH }),
    result: v.object({
      path: v.string(),
      /** False for demos and write-protected files: saving needs a new name. */
      writable: v.boolean(),
      /** Of the bytes on disk; hand it back with `project.save`. */
      fingerprint: FINGERPRINT,
      project: PROJECT,
      warnings: FAULTS_SCHEMA,
    }),
    mutates: false,
  }),
  "project.save": method({
    args: v.strictObject({
      path: PATH,
      project: PROJECT,
      /** From the open or the last save of this file; null where the user chose a new name. */
      fingerprint: v.nullable(FINGERPRINT),
      /** The user has agreed to replace whatever file is there. */
      replace: v.boolean(),
    }),
    result: v.object({ path: v.string(), fingerprint: FINGERPRINT }),
    mutates: true,
  }),
  /** The system's own dialog; only where `fileDialogs` is `native`. Null: the user thought better of it. */
  "project.chooseOpen": method({
    args: NOTHING,
    result: v.object({ path: v.nullable(v.string()) }),
    mutates: false,
  }),
  "project.chooseSave": method({
    args: v.strictObject({ suggestedName: v.pipe(v.string(), v.maxLength(200)) }),
    result: v.object({
      path: v.nullable(v.string()),
      /** The dialog has already asked whether this very file may be replaced. */
      replace: v.boolean(),
    }),
    mutates: false,
  }),
  /** One folder's subfolders and projects, for the page's own chooser; null is the user's projects folder. */
  "files.list": method({
    args: v.strictObject({ folder: v.nullable(PATH) }),
    result: v.object({
      folder: v.string(),
      /** Null at the top of a root. */
      parent: v.nullable(v.string()),
      roots: list(ROOT),
      entries: list(ENTRY),
      /** Whether a project may be saved here. */
      writable: v.boolean(),
    }),
    mutates: false,
  }),
  ...DRAWER_METHODS,
};

/** What the machine tells the screens unasked. */
export const EVENTS = {
  /** The user opened a project from outside: a second start, or the file manager. */
  "project.openRequested": v.object({ path: v.string() }),
  ...DRAWER_EVENTS,
};

export type MethodName = keyof typeof METHODS;
export type ArgsOf<M extends MethodName> = v.InferOutput<(typeof METHODS)[M]["args"]>;
export type ResultOf<M extends MethodName> = v.InferOutput<(typeof METHODS)[M]["result"]>;

export type EventName = keyof typeof EVENTS;
export type EventData<E extends EventName> = v.InferOutput<(typeof EVENTS)[E]>;

/** Whether a name from outside is a method of the table (and not, say, `toString`). */
export function isMethodName(name: string): name is MethodName {
  return Object.hasOwn(METHODS, name);
}

/** Whether a name from outside is an event of the table. */
export function isEventName(name: string): name is EventName {
  return Object.hasOwn(EVENTS, name);
}

export type Checked<T> = { readonly ok: true; readonly value: T } | { readonly ok: false; readonly problems: readonly string[] };

/** Checks a call's arguments; the problems name the key and what was expected. */
export function checkArgs<M extends MethodName>(name: M, value: unknown): Checked<ArgsOf<M>> {
  return check<ArgsOf<M>>(METHODS[name].args, value);
}

/** Checks a call's result, on both sides: before it leaves the host, and before a screen relies on it. */
export function checkResult<M extends MethodName>(name: M, value: unknown): Checked<ResultOf<M>> {
  return check<ResultOf<M>>(METHODS[name].result, value);
}

/** Checks what an event carries. */
export function checkEvent<E extends EventName>(name: E, value: unknown): Checked<EventData<E>> {
  return check<EventData<E>>(EVENTS[name], value);
}

function check<T>(schema: v.GenericSchema, value: unknown): Checked<T> {
  const parsed = v.safeParse(schema, value);
  if (parsed.success) return { ok: true, value: parsed.output as T };
  return { ok: false, problems: parsed.issues.map((issue) => `${v.getDotPath(issue) ?? "value"}: ${issue.message}`) };
}

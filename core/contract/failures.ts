import * as v from "valibot";
import { faultText, type Fault } from "../errors.ts";
import { DRAWER_FAILURES, drawerFailureText } from "./drawer-failures.ts";

const path = v.string();

export const FAULT_SCHEMA: v.GenericSchema<Fault> = v.object({
  path: v.string(),
  message: v.string(),
  blocks: v.exactOptional(v.array(v.string())),
});

export const FAULTS_SCHEMA: v.GenericSchema<readonly Fault[]> = v.array(FAULT_SCHEMA);

const STRINGS_SCHEMA: v.GenericSchema<readonly string[]> = v.array(v.string());

/**
 * Everything that can go wrong on the machine's side of a call, with the data each case carries.
 * The codes are stable: screens decide by them, and `failureText` says them to people.
 */
export const FAILURES = {
  /** Unknown method, or arguments that do not fit its schema: a mistake in the caller. */
  "bad-call": v.object({ method: v.string(), problems: STRINGS_SCHEMA }),
  /** The answer did not fit its schema: a mistake in the host. */
  "bad-result": v.object({ method: v.string(), problems: STRINGS_SCHEMA }),
  /** The connection ended before the answer came. */
  closed: v.object({}),
  /** Something nobody foresaw; `detail` is for a bug report. */
  internal: v.object({ detail: v.string() }),
  /** This shell has no such thing; `host.capabilities` says so beforehand. */
  "not-available": v.object({ method: v.string() }),
  /** The path is outside what this session may touch. */
  "not-allowed": v.object({ path }),
  "file-not-found": v.object({ path }),
  "file-unreadable": v.object({ path, reason: v.picklist(["folder", "permission", "too-large", "not-text", "system"]), detail: v.string() }),
  "file-unwritable": v.object({ path, reason: v.picklist(["folder", "permission", "full", "system"]), detail: v.string() }),
  /** A demo, or a file its owner has locked: offer to save under another name. */
  "read-only": v.object({ path, why: v.picklist(["demo", "permission"]) }),
  /** There is a file of that name, and the caller did not say that it may be replaced. */
  "file-exists": v.object({ path }),
  /** Somebody else wrote the file (or took it away) after it was opened here. */
  "changed-on-disk": v.object({ path }),
  /** The project itself is faulty; nothing was opened or written. */
  "project-faults": v.object({ path, faults: FAULTS_SCHEMA }),
  ...DRAWER_FAILURES,
};

export type FailureCode = keyof typeof FAILURES;
export type FailureData<C extends FailureCode> = v.InferOutput<(typeof FAILURES)[C]>;
export type Failure = { [C in FailureCode]: { readonly code: C; readonly data: FailureData<C> } }[FailureCode];

/** Whether a value from outside is one of the failures above, data and all. */
export function isFailure(value: unknown): value is Failure {
  if (typeof value !== "object" || value === null || !("code" in value) || !("data" in value)) return false;
  const { code, data } = value;
  return typeof code === "string" && isFailureCode(code) && v.is(FAILURES[code], data);
}

function isFailureCode(code: string): code is FailureCode {
  return Object.hasOwn(FAILURES, code);
}

const UNREADABLE = {
  folder: "it is a folder",
  permission: "you may not read it",
  "too-large": "it is far larger than any project",
  "not-text": "it is not a text file",
  system: "the system would not read it",
};

const UNWRITABLE = {
  folder: "there is a folder of that name, or no folder to put it in",
  permission: "you may not write there",
  full: "the disk is full",
  system: "the system would not write it",
};

/** The failure in a sentence or two for the person at the screen. */
export function failureText(failure: Failure): string {
  switch (failure.code) {
    case "bad-call":
      return `Bandwright asked itself something it does not understand (${failure.data.method}: ${failure.data.problems.join("; ")}).`;
    case "bad-result":
      return `Bandwright got an answer it does not understand (${failure.data.method}: ${failure.data.problems.join("; ")}).`;
    case "closed":
      return "The connection to Bandwright has ended. Start it again to go on.";
    case "internal":
      return `Something went wrong inside Bandwright: ${failure.data.detail}`;
    case "not-available":
      return "This is not available in a browser window.";
    case "not-allowed":
      return `${failure.data.path} is outside the folders that Bandwright may use in this session.`;
    case "file-not-found":
      return `There is no file ${failure.data.path}.`;
    case "file-unreadable":
      return `${failure.data.path} could not be read: ${withDetail(UNREADABLE[failure.data.reason], failure.data.detail)}.`;
    case "file-unwritable":
      return `${failure.data.path} could not be written: ${withDetail(UNWRITABLE[failure.data.reason], failure.data.detail)}.`;
    case "read-only":
      return failure.data.why === "demo"
        ? "The demo projects are kept as they are. Save your work under another name."
        : `${failure.data.path} is write-protected. Save your work under another name.`;
    case "file-exists":
      return `There is already a file ${failure.data.path}.`;
    case "changed-on-disk":
      return `${failure.data.path} has changed on disk since it was opened here.`;
    case "project-faults":
      return `${failure.data.path} is not a sound project:\n${failure.data.faults.map(faultText).join("\n")}`;
    default:
      return drawerFailureText(failure);
  }
}

function withDetail(text: string, detail: string): string {
  return detail === "" ? text : `${text} (${detail})`;
}

/** A failed call, on either side of the connection: decide by `code`, show `message`. */
export class HostFailure<C extends FailureCode = FailureCode> extends Error {
  override readonly name = "HostFailure";
  readonly code: C;
  readonly data: FailureData<C>;

  constructor(code: C, data: FailureData<C>) {
    super(failureText({ code, data } as Failure));
    this.code = code;
    this.data = data;
  }

  /** As it travels. */
  toFailure(): Failure {
    return { code: this.code, data: this.data } as Failure;
  }
}

/** `isHostFailure(error, "file-exists")`: narrows to that code and its data. */
export function isHostFailure<C extends FailureCode>(error: unknown, code: C): error is HostFailure<C> {
  return error instanceof HostFailure && error.code === code;
}

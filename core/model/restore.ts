import { printParseErrorCode, visit } from "jsonc-parser";
import * as v from "valibot";
import { BLOCKS } from "../blocks/index.ts";
import { FaultError, type Fault } from "../errors.ts";
import { findOpAmp } from "./op-amps.ts";
import { PROJECT_FORMAT, PROJECT_VERSION, partsOf, type Project } from "./project.ts";
import { projectSchema, showValue } from "./schema.ts";

/** Faults past this number are counted, not listed: nobody mends a thousand by hand. */
const LISTED_FAULTS = 100;

/** Far past any board that can be built; checking more would only keep the user waiting. */
const MOST_ENTRIES = 10_000;

export interface RestoredProject {
  readonly project: Project;
  /** Oddities that stop nothing, such as a part under a role that its block does not have. */
  readonly warnings: readonly Fault[];
}

/** What a file of a later version asks for: there is nothing in it to be mended. */
export const NEEDS_NEWER = "open it with a newer one";

/**
 * A project from the text of its file. Everything is checked before anything is used; unknown keys are kept.
 * @throws FaultError with every fault, each with its JSON path and what was expected
 */
export function restoreProject(text: string): RestoredProject {
  const document = parseJson(text.startsWith("\uFEFF") ? text.slice(1) : text);
  const fail = (faults: readonly Fault[]): never => {
    const more = faults.length - LISTED_FAULTS;
    throw new FaultError(more > 0 ? [...faults.slice(0, LISTED_FAULTS), { path: "", message: `and ${more} more faults` }] : faults);
  };
  if (typeof document !== "object" || document === null || Array.isArray(document)) {
    return fail([{ path: "", message: `a project file holds one object, this one holds ${showValue(document)}` }]);
  }
  const record = document as Readonly<Record<string, unknown>>;
  const { format, version } = record;
  if (format !== PROJECT_FORMAT) return fail([{ path: "format", message: `must be "${PROJECT_FORMAT}", got ${showValue(format)}: this is not a project file` }]);
  if (typeof version === "number" && version > PROJECT_VERSION) {
    return fail([{ path: "version", message: `this file is of version ${version}, and this Bandwright reads version ${PROJECT_VERSION}: ${NEEDS_NEWER}` }]);
  }
  if (version !== PROJECT_VERSION) return fail([{ path: "version", message: `must be ${PROJECT_VERSION}, got ${showValue(version)}` }]);

  const tooLong = ["blocks", "wires"].filter((key) => {
    const entries = record[key];
    return Array.isArray(entries) && entries.length > MOST_ENTRIES;
  });
  if (tooLong.length > 0) return fail(tooLong.map((key) => ({ path: key, message: `must be a list of at most ${MOST_ENTRIES} entries` })));
  const parsed = v.safeParse(projectSchema, document);
  if (!parsed.success) return fail(parsed.issues.map(faultOf));
  // The document itself, not the parser's copy of it: nothing in the file may get lost.
  const project = document as unknown as Project;
  const faults = [...idFaults(project), ...opAmpFaults(project)];
  if (faults.length > 0) return fail(faults);
  return { project, warnings: roleWarnings(project) };
}

function parseJson(text: string): unknown {
  const faults: Fault[] = [];
  const objects: Set<string>[] = [];
  const stop = new Error("first syntax fault found");
  try {
    visit(
      text,
      {
        onObjectBegin: () => void objects.push(new Set()),
        onObjectEnd: () => void objects.pop(),
        onObjectProperty(property, _offset, _length, line, column) {
          const keys = objects.at(-1);
          if (keys?.has(property)) faults.push({ path: "", message: `line ${line + 1}, column ${column + 1}: the key "${property.slice(0, 40)}" stands twice in one object` });
          keys?.add(property);
        },
        onError(code, _offset, _length, line, column) {
          const what = printParseErrorCode(code).replaceAll(/([A-Z])/g, " $1").trim().toLowerCase();
          faults.push({ path: "", message: `line ${line + 1}, column ${column + 1}: this is not JSON (${what}). The file may be cut short or damaged` });
          throw stop;
        },
      },
      { disallowComments: true, allowTrailingComma: false, allowEmptyContent: false },
    );
    if (faults.length === 0) return JSON.parse(text) as unknown;
  } catch (error) {
    if (error instanceof RangeError) faults.push({ path: "", message: "the file is nested too deeply to be a project" });
    else if (error !== stop) faults.push({ path: "", message: `this is not JSON: ${error instanceof Error ? error.message : String(error)}` });
  }
  throw new FaultError(faults);
}

/** `blocks[3].parts.seriesC.value`; keys that are no plain words are quoted. */
function pathText(keys: readonly unknown[]): string {
  return keys
    .map((key, index) => (typeof key === "number" ? `[${key}]` : /^[\p{L}_$][\p{L}\d_$]*$/u.test(String(key)) ? `${index > 0 ? "." : ""}${String(key)}` : `[${JSON.stringify(key)}]`))
    .join("");
}

function faultOf(issue: v.BaseIssue<unknown>): Fault {
  return { path: pathText((issue.path ?? []).map((item) => item.key)), message: issue.message };
}

function idFaults(project: Project): Fault[] {
  const first = new Map<string, number>();
  return project.blocks.flatMap(({ id }, index): Fault[] => {
    const other = first.get(id);
    if (other === undefined) {
      first.set(id, index);
      return [];
    }
    return [{ path: `blocks[${index}].id`, message: `“${id}” is already the id of blocks[${other}]: ids must differ`, blocks: [id] }];
  });
}

function opAmpFaults(project: Project): Fault[] {
  const faults: Fault[] = [];
  const check = (name: string | undefined, path: string, blocks: readonly string[]): void => {
    if (name === undefined || findOpAmp(project, name) !== undefined) return;
    faults.push({ path, message: `there is no op amp “${name}” in this file's opAmps or in the built-in table`, blocks });
  };
  project.blocks.forEach((block, index) => {
    if (BLOCKS[block.kind].hasOpAmp) check(block.opAmp, `blocks[${index}].opAmp`, [block.id]);
  });
  if (project.supply.kind === "single") check(project.supply.reference.opAmp, "supply.reference.opAmp", []);
  return faults;
}

function roleWarnings(project: Project): Fault[] {
  return project.blocks.flatMap((block, index) => {
    const { roles, label } = BLOCKS[block.kind];
    const known = new Set(roles.map((r) => r.role));
    return Object.keys(partsOf(block))
      .filter((role) => !known.has(role))
      .map((role) => ({
        path: pathText(["blocks", index, "parts", role]),
        message: `a ${label.toLowerCase()} has no such role and leaves it out${known.size > 0 ? `: its roles are ${[...known].join(", ")}` : ""}`,
        blocks: [block.id],
      }));
  });
}

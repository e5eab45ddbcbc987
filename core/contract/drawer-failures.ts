import * as v from "valibot";
import { HOLDER_SCHEMA, ROW_FAULT_SCHEMA } from "./drawer-schemas.ts";

const COUNT = v.pipe(v.number(), v.safeInteger());

/** What can go wrong with the drawer. */
export const DRAWER_FAILURES = {
  /** The file cannot be used; it was not written to. */
  "drawer-unusable": v.object({
    path: v.string(),
    reason: v.picklist(["damaged", "not-a-drawer", "newer", "busy", "old-runtime", "permission", "full", "system"]),
    detail: v.string(),
    /** The copy that was made of a damaged file. */
    backup: v.nullable(v.string()),
    /** Schema versions of the file and of this program, where `newer`. */
    fileVersion: v.nullable(COUNT),
    programVersion: v.nullable(COUNT),
  }),
  /** What was asked for makes no sense; nothing was changed. Each problem names its line. */
  "drawer-refused": v.object({ problems: v.array(v.string()) }),
  "drawer-missing": v.object({ what: v.picklist(["line", "piece", "build", "step"]), id: v.string() }),
  /** Fewer pieces are free than were asked for; the holders are those in the way. */
  "drawer-short": v.object({ line: v.string(), wanted: COUNT, quantity: COUNT, available: COUNT, holders: v.array(HOLDER_SCHEMA) }),
  /** A step cannot be taken back, since later ones build on it. */
  "drawer-moved-on": v.object({ step: COUNT, problems: v.array(v.string()) }),
  /** Rows of a table that cannot be taken; nothing was imported. */
  "import-refused": v.object({ rows: COUNT, refused: COUNT, faults: v.array(ROW_FAULT_SCHEMA) }),
  "import-cancelled": v.object({ job: v.string() }),
};

type DrawerFailureCode = keyof typeof DRAWER_FAILURES;
export type DrawerFailure = { [C in DrawerFailureCode]: { readonly code: C; readonly data: v.InferOutput<(typeof DRAWER_FAILURES)[C]> } }[DrawerFailureCode];

const MOST_SHOWN = 20;

/** The failure in a sentence or two for the person at the screen. */
export function drawerFailureText(failure: DrawerFailure): string {
  switch (failure.code) {
    case "drawer-unusable":
      return unusableText(failure.data);
    case "drawer-refused":
      return shown(failure.data.problems);
    case "drawer-missing":
      return failure.data.what === "build" ? `Nothing is recorded for “${failure.data.id}”.` : `There is no ${failure.data.what} “${failure.data.id}” in the drawer.`;
    case "drawer-short": {
      const { line, wanted, quantity, available, holders } = failure.data;
      const held = holders.map((holder) => `${holder.reference} (${holder.count})`).join(", ");
      const who = held === "" ? "" : `; held by ${held}`;
      return `${line}: ${wanted} wanted, but ${available === 0 ? "none" : `only ${available}`} of ${quantity} ${available === 1 ? "is" : "are"} free${who}.`;
    }
    case "drawer-moved-on":
      return `This cannot be undone any more: ${shown(failure.data.problems)}`;
    case "import-refused": {
      const { rows, refused, faults } = failure.data;
      return `${refused} of ${rows} ${rows === 1 ? "row" : "rows"} cannot be taken, so nothing was imported:\n${shown(faults.map((fault) => `row ${fault.row}: ${fault.message}`), refused)}`;
    }
    case "import-cancelled":
      return "The import was stopped; nothing of it was kept.";
  }
}

function shown(lines: readonly string[], total = lines.length): string {
  const some = lines.slice(0, MOST_SHOWN);
  const rest = total - some.length;
  return [...some, ...(rest > 0 ? [`… and ${rest} more`] : [])].join("\n");
}

function unusableText(data: v.InferOutput<(typeof DRAWER_FAILURES)["drawer-unusable"]>): string {
  const { path, reason, detail, backup, fileVersion, programVersion } = data;
  const kept = backup === null ? "" : ` It was left as it is, and a copy was made at ${backup}.`;
  switch (reason) {
    case "damaged":
      return `The drawer ${path} is damaged (${detail}).${kept}`;
    case "not-a-drawer":
      return `${path} is not a drawer (${detail}). It was left as it is.`;
    case "newer":
      return `The drawer ${path} has version ${fileVersion}, this program knows versions up to ${programVersion}: a newer Bandwright has written it, and is needed to open it.`;
    case "busy":
      return `Another program is writing to the drawer ${path} and has not finished. Try again in a moment.`;
    case "old-runtime":
      return `The drawer needs Node 22.14 or newer; ${detail}.`;
    case "permission":
      return `You may not read or write the drawer ${path}.`;
    case "full":
      return `The disk with the drawer ${path} is full.`;
    case "system":
      return `The drawer ${path} cannot be used: ${detail}.`;
  }
}

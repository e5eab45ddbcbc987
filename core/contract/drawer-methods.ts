import * as v from "valibot";
import {
  BILL_SCHEMA, BUILD_SCHEMA, CANDIDATES_SCHEMA, COUNT, COUNT_FROM_ONE, DRAWER_LINE_SCHEMA, FACETS_SCHEMA, FILTER_SCHEMA, HOLDER_SCHEMA, IMPORT_REPORT_SCHEMA, LEDGER_ENTRY_SCHEMA,
  LINE_FIELDS_SCHEMA, LINE_ID, MAPPING_SCHEMA, MOVE_SCHEMA, OWNED_VALUE_SCHEMA, PIECE_SCHEMA, PUT_PIECE_SCHEMA, READING_SCHEMA, REFERENCE, SORT_SCHEMA, STEP_SCHEMA, STOCK_LINE_SCHEMA,
} from "./drawer-schemas.ts";
import { list, method, NOTHING, PATH } from "./method.ts";

const MANY = 100_000;
const IDS = v.pipe(v.array(LINE_ID), v.minLength(1), v.maxLength(MANY));
const JOB = v.pipe(v.string(), v.minLength(1), v.maxLength(100));

/** A file that the session may read, or text that the page has read itself. */
const SOURCE = v.union([v.strictObject({ path: PATH }), v.strictObject({ text: v.string() })]);
export type TableSource = v.InferOutput<typeof SOURCE>;

const INFO = v.object({
  path: v.string(),
  /** Lines in use; with `retired` 0 too, the drawer is empty and the starter worth offering. */
  lines: COUNT,
  retired: COUNT,
  pieces: COUNT,
  /** Version of the file's schema. */
  version: COUNT,
});

/** What a change gives back: the step for `drawer.undo`, null where nothing had to be changed. */
const CHANGED = v.object({ step: v.nullable(COUNT), changed: COUNT });

/** The drawer's part of the table of methods. Every change is one step, that `drawer.undo` takes back. */
export const DRAWER_METHODS = {
  /** Changes over to another drawer file, made where there is none; null is the user's own. */
  "drawer.open": method({ args: v.strictObject({ path: v.nullable(PATH) }), result: INFO, mutates: true }),
  "drawer.info": method({ args: NOTHING, result: INFO, mutates: false }),
  /** A window on the lines that fit a filter. */
  "drawer.lines": method({
    args: v.strictObject({ filter: FILTER_SCHEMA, sort: SORT_SCHEMA, offset: COUNT, limit: v.pipe(COUNT_FROM_ONE, v.maxValue(1000)) }),
    result: v.object({ total: COUNT, lines: list(DRAWER_LINE_SCHEMA) }),
    mutates: false,
  }),
  /** Counts a column's values among the lines that fit the filter; each column leaves its own choices aside. */
  "drawer.facets": method({ args: v.strictObject({ filter: FILTER_SCHEMA }), result: FACETS_SCHEMA, mutates: false }),
  /** The values among the lines that fit the filter, ascending; of one kind, or they do not compare. */
  "drawer.values": method({ args: v.strictObject({ filter: FILTER_SCHEMA }), result: v.object({ values: list(OWNED_VALUE_SCHEMA) }), mutates: false }),
  /** Lines in use of about a value, the nearest first. */
  "drawer.candidates": method({ args: CANDIDATES_SCHEMA, result: v.object({ lines: list(DRAWER_LINE_SCHEMA) }), mutates: false }),
  /** One line, who holds pieces of it, its single pieces, and every change of its fields, the newest first. */
  "drawer.line": method({
    args: v.strictObject({ id: LINE_ID }),
    result: v.object({
      line: DRAWER_LINE_SCHEMA,
      holders: list(HOLDER_SCHEMA),
      pieces: list(PIECE_SCHEMA),
      history: list(
        v.object({
          step: COUNT,
          at: v.string(),
          label: v.string(),
          /** Null where the line was made. */
          before: v.nullable(v.record(v.string(), v.unknown())),
          after: v.record(v.string(), v.unknown()),
        }),
      ),
    }),
    mutates: false,
  }),
  /** A new line with what there is of it. */
  "drawer.addLine": method({ args: v.strictObject({ line: STOCK_LINE_SCHEMA, quantity: COUNT }), result: v.object({ step: COUNT, line: DRAWER_LINE_SCHEMA }), mutates: true }),
  /** Sets fields on one line or many, all or none. */
  "drawer.editLines": method({ args: v.strictObject({ ids: IDS, fields: LINE_FIELDS_SCHEMA }), result: CHANGED, mutates: true }),
  /** Takes lines out of use, or back into it; their history stays. */
  "drawer.retireLines": method({ args: v.strictObject({ ids: IDS, retired: v.boolean() }), result: CHANGED, mutates: true }),
  /** Books movements, all or none. */
  "drawer.move": method({
    args: v.strictObject({ moves: v.pipe(v.array(MOVE_SCHEMA), v.minLength(1), v.maxLength(10_000)) }),
    result: v.object({ step: COUNT, lines: list(DRAWER_LINE_SCHEMA) }),
    mutates: true,
  }),
  /** Movements of a line or a reference (null: of all), the newest first, older than `before` where given. */
  "drawer.ledger": method({
    args: v.strictObject({ line: v.nullable(LINE_ID), reference: v.nullable(REFERENCE), before: v.nullable(COUNT), limit: v.pipe(COUNT_FROM_ONE, v.maxValue(1000)) }),
    result: v.object({ movements: list(LEDGER_ENTRY_SCHEMA), hasMore: v.boolean() }),
    mutates: false,
  }),
  "drawer.pieces": method({ args: v.strictObject({ line: LINE_ID }), result: v.object({ pieces: list(PIECE_SCHEMA) }), mutates: false }),
  "drawer.putPieces": method({
    args: v.strictObject({ pieces: v.pipe(v.array(PUT_PIECE_SCHEMA), v.minLength(1), v.maxLength(10_000)) }),
    result: v.object({ step: v.nullable(COUNT), pieces: list(PIECE_SCHEMA) }),
    mutates: true,
  }),
  "drawer.removePieces": method({ args: v.strictObject({ ids: v.pipe(v.array(COUNT), v.minLength(1), v.maxLength(10_000)) }), result: CHANGED, mutates: true }),
  /** How a table would be read: guesses what is not given, and shows the first rows as they would be taken. */
  "drawer.importPreview": method({
    args: v.strictObject({ source: SOURCE, reading: v.nullable(READING_SCHEMA), mapping: v.nullable(MAPPING_SCHEMA) }),
    result: v.object({
      reading: READING_SCHEMA,
      mapping: MAPPING_SCHEMA,
      headers: list(v.string()),
      rows: list(
        v.object({
          row: COUNT_FROM_ONE,
          cells: list(v.string()),
          /** Null where the row would be refused. */
          line: v.nullable(STOCK_LINE_SCHEMA),
          quantity: v.nullable(COUNT),
          problems: list(v.string()),
        }),
      ),
    }),
    mutates: false,
  }),
  /**
   * Takes a table in: new ids become lines, known ids are updated, differences of quantity are booked as counted.
   * All or nothing unless `skipBadRows`. `job` is the caller's own name for it, for progress and cancelling.
   */
  "drawer.import": method({
    args: v.strictObject({ job: JOB, source: SOURCE, reading: v.nullable(READING_SCHEMA), mapping: v.nullable(MAPPING_SCHEMA), skipBadRows: v.boolean(), dryRun: v.boolean() }),
    result: IMPORT_REPORT_SCHEMA,
    mutates: true,
  }),
  /** Stops an import before it is final; nothing of it stays. False where there is none of that name. */
  "drawer.cancelImport": method({ args: v.strictObject({ job: JOB }), result: v.object({ cancelled: v.boolean() }), mutates: false }),
  /** Takes the starter drawer in: an invented small workshop, to look around with. */
  "drawer.starter": method({ args: v.strictObject({ job: JOB }), result: IMPORT_REPORT_SCHEMA, mutates: true }),
  /** All lines as CSV, as an import takes them back: into a file, or as text where no path is given. */
  "drawer.export": method({
    args: v.strictObject({ path: v.nullable(PATH), replace: v.boolean() }),
    result: v.object({ path: v.nullable(v.string()), text: v.nullable(v.string()), lines: COUNT }),
    mutates: true,
  }),
  /** Holds what a number of units takes; what the reference held before is let go in the same step. */
  "drawer.reserve": method({
    args: v.strictObject({ reference: REFERENCE, units: COUNT_FROM_ONE, bill: BILL_SCHEMA }),
    result: v.object({ step: COUNT, build: BUILD_SCHEMA }),
    mutates: true,
  }),
  /** Lets everything go that the reference holds. */
  "drawer.release": method({ args: v.strictObject({ reference: REFERENCE }), result: v.object({ step: v.nullable(COUNT) }), mutates: true }),
  /** Pieces that a project or build holds. */
  "drawer.held": method({ args: v.strictObject({ reference: REFERENCE }), result: v.object({ held: list(v.object({ line: v.string(), count: COUNT_FROM_ONE })) }), mutates: false }),
  /** Books the pieces of finished units as used, held ones first, in one step. */
  "drawer.use": method({ args: v.strictObject({ reference: REFERENCE, units: COUNT_FROM_ONE, bill: BILL_SCHEMA }), result: v.object({ step: COUNT, build: BUILD_SCHEMA }), mutates: true }),
  "drawer.builds": method({ args: NOTHING, result: v.object({ builds: list(BUILD_SCHEMA) }), mutates: false }),
  /** Takes a step back, as a new step: undoing that one is the redo. */
  "drawer.undo": method({ args: v.strictObject({ step: COUNT }), result: v.object({ step: COUNT, label: v.string() }), mutates: true }),
  /** The latest steps, the newest first. */
  "drawer.steps": method({ args: v.strictObject({ limit: v.pipe(COUNT_FROM_ONE, v.maxValue(1000)) }), result: v.object({ steps: list(STEP_SCHEMA) }), mutates: false }),
};

/** What the drawer tells unasked. */
export const DRAWER_EVENTS = {
  /** Something in the drawer has changed: what is shown of it wants asking for again. */
  "drawer.changed": v.object({ step: v.nullable(COUNT) }),
  /** `total` is null while it is not known. */
  "drawer.importProgress": v.object({ job: v.string(), phase: v.picklist(["reading", "writing"]), done: COUNT, total: v.nullable(COUNT) }),
};

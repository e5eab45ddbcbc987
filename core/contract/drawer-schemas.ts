import * as v from "valibot";
import { MOST_CHARACTERS, MOST_NOTES, MOST_PRICES } from "../drawer/check-line.ts";
import { DELIMITERS, ENCODINGS, IMPORT_FIELDS, type ImportMapping, type TableReading } from "../drawer/mapping.ts";
import { MOVEMENT_KINDS, STOCK_KINDS, type PriceBreak, type StockLine, type StockMovement, type StockPiece, type StockedLine } from "../drawer/stock.ts";
import { list } from "./method.ts";

const NUMBER = v.pipe(v.number(), v.finite());
export const COUNT = v.pipe(v.number(), v.safeInteger(), v.minValue(0));
export const COUNT_FROM_ONE = v.pipe(v.number(), v.safeInteger(), v.minValue(1));
export const SHORT_TEXT = v.pipe(v.string(), v.maxLength(MOST_CHARACTERS));
const LONG_TEXT = v.pipe(v.string(), v.maxLength(MOST_NOTES));
/** Whatever a caller may name a line by; whether there is one is another matter. */
export const LINE_ID = v.pipe(v.string(), v.minLength(1), v.maxLength(100));
/** Project or build that pieces are held for. */
export const REFERENCE = v.pipe(v.string(), v.minLength(1), v.maxLength(200));
const KIND = v.picklist(STOCK_KINDS);

const PRICES: v.GenericSchema<readonly PriceBreak[]> = v.pipe(v.array(v.strictObject({ from: COUNT_FROM_ONE, unitCost: NUMBER })), v.maxLength(MOST_PRICES));

/** Fields of a line that can be edited: all but its id. What goes with what is checked by `lineProblems`. */
const FIELDS = {
  kind: KIND,
  value: v.nullable(NUMBER),
  type: v.nullable(SHORT_TEXT),
  tolerance: v.nullable(NUMBER),
  rating: v.nullable(NUMBER),
  technology: SHORT_TEXT,
  temperatureCoefficient: v.nullable(NUMBER),
  windingR: v.nullable(NUMBER),
  package: SHORT_TEXT,
  location: SHORT_TEXT,
  prices: PRICES,
  currency: v.pipe(v.string(), v.maxLength(3)),
  supplier: SHORT_TEXT,
  orderCode: SHORT_TEXT,
  notes: LONG_TEXT,
};

export const STOCK_LINE_SCHEMA: v.GenericSchema<StockLine> = v.strictObject({ id: LINE_ID, ...FIELDS });

/** Some of a line's fields, to be set on many lines at once. */
export type LineFields = Partial<Omit<StockLine, "id">>;
const PART_OF_FIELDS = v.partial(v.strictObject(FIELDS));
export const LINE_FIELDS_SCHEMA: v.GenericSchema<LineFields> = v.pipe(
  v.custom<LineFields>((value) => typeof value === "object" && value !== null && Object.values(value).every((one) => one !== undefined) && v.is(PART_OF_FIELDS, value), "must be some of a line's fields, each with its value"),
);

/** A line as the drawer gives it. */
export interface DrawerLine extends StockedLine {
  /** Taken out of use: kept for its history, and not offered for anything. */
  readonly retired: boolean;
}

/** Fields as they stand: a drawer may hold what an older version let in. */
const KEPT_FIELDS = {
  ...FIELDS,
  type: v.nullable(v.string()),
  technology: v.string(),
  package: v.string(),
  location: v.string(),
  prices: v.array(v.object({ from: COUNT_FROM_ONE, unitCost: NUMBER })),
  currency: v.string(),
  supplier: v.string(),
  orderCode: v.string(),
  notes: v.string(),
};

export const DRAWER_LINE_SCHEMA: v.GenericSchema<DrawerLine> = v.object({ id: v.string(), ...KEPT_FIELDS, quantity: COUNT, reserved: COUNT, retired: v.boolean() });

export const PIECE_SCHEMA: v.GenericSchema<StockPiece> = v.object({ id: COUNT, line: v.string(), mark: v.string(), value: NUMBER, frequency: v.nullable(NUMBER) });

/** A piece as it is put: without an id it is a new one. */
export const PUT_PIECE_SCHEMA = v.strictObject({ id: v.nullable(COUNT), line: LINE_ID, mark: SHORT_TEXT, value: NUMBER, frequency: v.nullable(NUMBER) });
export type PutPiece = v.InferOutput<typeof PUT_PIECE_SCHEMA>;

/** A movement with the step that made it. */
export interface LedgerEntry extends StockMovement {
  readonly step: number;
  /** The movement that this one takes back: same kind, opposite sign. */
  readonly reverses: number | null;
}

export const LEDGER_ENTRY_SCHEMA: v.GenericSchema<LedgerEntry> = v.object({
  id: COUNT,
  at: v.string(),
  line: v.string(),
  kind: v.picklist(MOVEMENT_KINDS),
  change: v.pipe(v.number(), v.safeInteger()),
  reference: v.string(),
  note: v.string(),
  step: COUNT,
  reverses: v.nullable(COUNT),
});

/** Most characters of a movement's note. */
export const MOST_MOVEMENT_NOTE = 1000;

/**
 * A movement to book. `count` is the number of pieces bought, used, scrapped, reserved or released;
 * for `counted` it is the number found there.
 */
export const MOVE_SCHEMA = v.strictObject({ line: LINE_ID, kind: v.picklist(MOVEMENT_KINDS), count: COUNT, reference: SHORT_TEXT, note: v.pipe(v.string(), v.maxLength(MOST_MOVEMENT_NOTE)) });
export type Move = v.InferOutput<typeof MOVE_SCHEMA>;

/** Who holds pieces of a line, and how many. */
export const HOLDER_SCHEMA = v.object({ reference: v.string(), count: COUNT });
export type Holder = v.InferOutput<typeof HOLDER_SCHEMA>;

/** The columns that lines can be counted by. */
export const FACETS = ["kind", "technology", "package", "supplier", "tolerance", "location"] as const;
export type Facet = (typeof FACETS)[number];

const CHOICES = v.pipe(v.array(SHORT_TEXT), v.maxLength(200));

/** Which lines to show. An empty list of choices leaves that column alone. */
export const FILTER_SCHEMA = v.strictObject({
  /** Words found in any text field, and values in trade notation: `4k7 film`, `100n 63V 5%`. All have to fit. */
  text: v.pipe(v.string(), v.maxLength(500)),
  kind: v.array(KIND),
  technology: CHOICES,
  package: CHOICES,
  supplier: CHOICES,
  location: CHOICES,
  /** Fractions; null for lines without one. */
  tolerance: v.pipe(v.array(v.nullable(NUMBER)), v.maxLength(200)),
  /** SI, both ends included. */
  valueFrom: v.nullable(NUMBER),
  valueTo: v.nullable(NUMBER),
  /** Only lines with pieces that nobody has spoken for. */
  onlyAvailable: v.boolean(),
  /** Only lines of which this project or build holds pieces; null for all. */
  heldBy: v.nullable(REFERENCE),
  withRetired: v.boolean(),
});
export type LineFilter = v.InferOutput<typeof FILTER_SCHEMA>;

/** A filter that lets every line through that is not retired. */
export const EVERY_LINE: LineFilter = {
  text: "", kind: [], technology: [], package: [], supplier: [], location: [], tolerance: [], valueFrom: null, valueTo: null, onlyAvailable: false, heldBy: null, withRetired: false,
};

/** `value` sorts by kind first: ohms and farads do not compare. */
export const SORT_COLUMNS = [
  "id", "kind", "value", "type", "tolerance", "rating", "technology", "temperatureCoefficient", "package", "location", "quantity", "reserved", "available", "unitCost", "supplier", "orderCode", "notes",
] as const;
export const SORT_SCHEMA = v.strictObject({ by: v.picklist(SORT_COLUMNS), descending: v.boolean() });
export type LineSort = v.InferOutput<typeof SORT_SCHEMA>;

/** A facet's values, most frequent first. */
export const FACETS_SCHEMA = v.object({
  kind: list(v.object({ value: KIND, count: COUNT })),
  technology: list(v.object({ value: v.string(), count: COUNT })),
  package: list(v.object({ value: v.string(), count: COUNT })),
  supplier: list(v.object({ value: v.string(), count: COUNT })),
  location: list(v.object({ value: v.string(), count: COUNT })),
  tolerance: list(v.object({ value: v.nullable(NUMBER), count: COUNT })),
});
export type Facets = v.InferOutput<typeof FACETS_SCHEMA>;

/** Lines of one value taken together. */
export const OWNED_VALUE_SCHEMA = v.object({ value: NUMBER, lines: COUNT, quantity: COUNT });
export type OwnedValue = v.InferOutput<typeof OWNED_VALUE_SCHEMA>;

/** Lines that could stand in for a part. */
export const CANDIDATES_SCHEMA = v.strictObject({
  kind: KIND,
  /** SI; null for op amps, which go by type. */
  value: v.nullable(v.pipe(NUMBER, v.gtValue(0))),
  /** Fraction either way. */
  within: v.pipe(NUMBER, v.minValue(0), v.maxValue(10)),
  type: v.nullable(SHORT_TEXT),
  technology: CHOICES,
  /** Lines whose rating is unknown fail this. */
  ratingFrom: v.nullable(NUMBER),
  toleranceTo: v.nullable(NUMBER),
  /** Pieces that have to be free. */
  availableFrom: COUNT,
  limit: v.pipe(COUNT_FROM_ONE, v.maxValue(20_000)),
});
export type CandidateQuery = v.InferOutput<typeof CANDIDATES_SCHEMA>;

export const READING_SCHEMA: v.GenericSchema<TableReading> = v.strictObject({ delimiter: v.picklist(DELIMITERS), encoding: v.picklist(ENCODINGS), hasHeader: v.boolean() });

export const MAPPING_SCHEMA: v.GenericSchema<ImportMapping> = v.strictObject({
  columns: v.pipe(v.array(v.strictObject({ column: COUNT, field: v.picklist(IMPORT_FIELDS), unit: v.pipe(v.string(), v.maxLength(10)), from: COUNT_FROM_ONE })), v.maxLength(500)),
  defaults: v.strictObject({ kind: v.nullable(KIND), currency: v.pipe(v.string(), v.maxLength(3)) }),
});

/** Why a row was refused; `row` is its line in the file, counted from 1. */
export const ROW_FAULT_SCHEMA = v.object({ row: COUNT_FROM_ONE, message: v.string() });
export type RowFault = v.InferOutput<typeof ROW_FAULT_SCHEMA>;

/** What an import did, or would do. */
export const IMPORT_REPORT_SCHEMA = v.object({
  /** For undoing it; null where nothing was changed. */
  step: v.nullable(COUNT),
  rows: COUNT,
  added: COUNT,
  updated: COUNT,
  unchanged: COUNT,
  /** Lines whose quantity was booked. */
  counted: COUNT,
  refused: COUNT,
  /** The first thousand. */
  faults: list(ROW_FAULT_SCHEMA),
});
export type ImportReport = v.InferOutput<typeof IMPORT_REPORT_SCHEMA>;

export const BUILD_SCHEMA = v.object({
  reference: v.string(),
  /** Units that pieces are still held for. */
  units: COUNT,
  /** Units built so far. */
  unitsUsed: COUNT,
  state: v.picklist(["reserved", "released", "used"]),
  /** When it was last changed; ISO 8601, UTC. */
  at: v.string(),
  /** Pieces a unit takes, with what is held now. */
  bill: list(v.object({ line: v.string(), count: COUNT_FROM_ONE, held: COUNT })),
});
export type Build = v.InferOutput<typeof BUILD_SCHEMA>;

export const BILL_SCHEMA = v.pipe(v.array(v.strictObject({ line: LINE_ID, count: COUNT_FROM_ONE })), v.minLength(1), v.maxLength(5000));
export type BillEntry = v.InferOutput<typeof BILL_SCHEMA>[number];

/** A user's command as the drawer remembers it. */
export const STEP_SCHEMA = v.object({
  id: COUNT,
  at: v.string(),
  /** What was done, in words. */
  label: v.string(),
  /** The step that this one took back. */
  undoes: v.nullable(COUNT),
  /** The step that took this one back. */
  undoneBy: v.nullable(COUNT),
});
export type DrawerStep = v.InferOutput<typeof STEP_SCHEMA>;

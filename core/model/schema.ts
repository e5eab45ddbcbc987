import * as v from "valibot";
import { BLOCKS } from "../blocks/index.ts";
import { BLOCK_KINDS, type BlockKind } from "../blocks/kinds.ts";

/** How a wrong value is shown in a message: as JSON, cut short. */
export function showValue(value: unknown): string {
  if (value === undefined) return "nothing";
  if (typeof value === "number") return String(value);
  const text = JSON.stringify(value) ?? typeof value;
  return text.length > 48 ? `${text.slice(0, 45)}…` : text;
}

type Message = (issue: { readonly input: unknown; readonly received: string }) => string;
const expected = (what: string): Message => (issue) => (issue.received === "undefined" ? `is missing: must be ${what}` : `must be ${what}, got ${showValue(issue.input)}`);

function number(what: string, isFine: (value: number) => boolean): v.GenericSchema<number> {
  return v.custom<number>((value) => typeof value === "number" && Number.isFinite(value) && isFine(value), expected(what));
}

const above0 = number("a number above 0", (value) => value > 0);
const atLeast0 = number("a number of 0 or more", (value) => value >= 0);
const finite = number("a number", () => true);
const fraction = number("a fraction from 0 up to, but not including, 1 (0.05 for 5 %)", (value) => value >= 0 && value < 1);
const position = number("a number from 0 (full cut) to 1 (full boost)", (value) => value >= 0 && value <= 1);
const text = v.string(expected("text"));
const name = v.pipe(text, v.nonEmpty(() => "must not be empty"));

const isPlain = (value: unknown): boolean => typeof value === "object" && value !== null && !Array.isArray(value);
const plainObject = v.custom<Record<string, unknown>>(isPlain, expected("an object"));

/** What a required key should have held, for the fault that says it is missing; every other key is the role of a part. */
const WANTED: Readonly<Record<string, string>> = {
  id: "text",
  kind: `one of ${BLOCK_KINDS.join(", ")}`,
  name: "text",
  supply: '{ "kind": "split", "positive", "negative" } or { "kind": "single", "voltage", "reference" }',
  blocks: "a list of blocks",
  wires: "a list of { from, to }",
  from: "block.port",
  to: "block.port",
  opAmp: "the name of an op amp",
  slider: "{ track, law, position, endR }",
  parts: "an object of parts by role",
  reference: "{ upperR, lowerR, bypassC, opAmp? }",
  position: "a number from 0 (full cut) to 1 (full boost)",
  joined: "series or parallel",
  ...Object.fromEntries(["value", "firstValue", "positive", "negative", "voltage", "openLoopGain", "gainBandwidth", "inputR"].map((key) => [key, "a number above 0"])),
  outputR: "a number of 0 or more",
  x: "a number",
  y: "a number",
};

/** Unknown keys are let through: they are kept on save. */
function object<Entries extends v.ObjectEntries>(entries: Entries, wanted: Readonly<Record<string, string>> = WANTED) {
  // A plain object first: an array would pass as an object without keys.
  return v.pipe(
    plainObject,
    v.looseObject(entries, (issue) => {
      const last: unknown = issue.path?.at(-1)?.key;
      const key = typeof last === "string" ? last : "";
      return `is missing: must be ${Object.hasOwn(wanted, key) ? wanted[key] : 'a part such as { "value": 470 }'}`;
    }),
  );
}

function oneOf<const Names extends readonly string[]>(names: Names) {
  return v.picklist(names, expected(`one of ${names.join(", ")}`));
}

const secondSchema = object({ stock: v.optional(text), value: above0, joined: oneOf(["series", "parallel"]), firstValue: above0 });
const partEntries = {
  value: above0, tolerance: v.optional(fraction), stock: v.optional(text), measured: v.optional(above0),
  piece: v.optional(number("the number of a measured piece, 1 or more", (value) => Number.isInteger(value) && value > 0)), second: v.optional(secondSchema),
};
const partSchema = object(partEntries);
const coilSchema = object({ ...partEntries, windingR: v.optional(atLeast0), selfC: v.optional(atLeast0) });

const lawSchema = v.custom<unknown>(
  (value) => value === "linear" || (typeof value === "object" && value !== null && "power" in value && typeof value.power === "number" && Number.isFinite(value.power) && value.power > 0),
  expected('"linear" or { "power": a number above 0 }'),
);

const sliderSchema = object({ track: partSchema, law: v.optional(lawSchema), position, endR: v.optional(atLeast0) });

function blockSchema(kind: BlockKind): v.GenericSchema {
  const { roles, hasSlider, hasOpAmp } = BLOCKS[kind];
  const parts = object(
    Object.fromEntries(
      roles.map((r) => {
        const schema: v.GenericSchema = r.quantity === "inductance" ? coilSchema : partSchema;
        return [r.role, r.isOptional ? v.optional(schema) : schema];
      }),
    ),
  );
  return object({
    id: name,
    kind: v.literal(kind),
    label: v.optional(text),
    at: v.optional(object({ x: finite, y: finite, byHand: v.optional(v.boolean(expected("true or false"))) })),
    opAmp: hasOpAmp ? name : v.optional(v.unknown()),
    opAmpStock: v.optional(text),
    slider: hasSlider ? sliderSchema : v.optional(v.unknown()),
    parts: roles.every((r) => r.isOptional) ? v.optional(parts) : parts,
  });
}

const byKind = Object.fromEntries(BLOCK_KINDS.map((kind) => [kind, blockSchema(kind)])) as Record<BlockKind, v.GenericSchema>;
const kindSchema = object({ kind: oneOf(BLOCK_KINDS) });
const isKnownKind = (kind: unknown): kind is BlockKind => typeof kind === "string" && Object.hasOwn(byKind, kind);

/** One schema a kind, so that a fault speaks of the roles of that kind alone. */
const anyBlock = v.lazy((input: unknown) => {
  const kind = typeof input === "object" && input !== null && "kind" in input ? input.kind : undefined;
  return isKnownKind(kind) ? byKind[kind] : kindSchema;
});

const supplySchema = v.lazy((input: unknown): v.GenericSchema => {
  const kind = typeof input === "object" && input !== null && "kind" in input ? input.kind : undefined;
  if (kind === "split") return object({ kind: v.literal("split"), positive: above0, negative: above0 });
  if (kind === "single") {
    return object({ kind: v.literal("single"), voltage: above0, reference: object({ upperR: partSchema, lowerR: partSchema, bypassC: partSchema, opAmp: v.optional(name), opAmpStock: v.optional(text) }) });
  }
  return object({ kind: oneOf(["split", "single"]) }, { kind: "one of split, single" });
});

const opAmpSchema = object({
  openLoopGain: above0,
  gainBandwidth: above0,
  inputR: above0,
  outputR: atLeast0,
  ...Object.fromEntries(
    ["slewRate", "noiseVoltage", "noiseVoltageCorner", "noiseCurrent", "noiseCurrentCorner", "swingLoss", "outputCurrent", "offsetVoltage", "biasCurrent", "supplyCurrent"].map((key) => [
      key,
      v.optional(key === "offsetVoltage" || key === "biasCurrent" ? finite : atLeast0),
    ]),
  ),
});

/** Every entry of `opAmps`, whatever its name: the library's own record schema passes over names such as "__proto__". */
const opAmpsSchema = v.pipe(
  plainObject,
  v.rawCheck(({ dataset, addIssue }) => {
    if (!dataset.typed) return;
    for (const [key, value] of Object.entries(dataset.value)) {
      for (const { message, path = [] } of v.safeParse(opAmpSchema, value).issues ?? []) {
        addIssue({ message, path: [{ type: "object", origin: "value", input: dataset.value, key, value }, ...path] });
      }
    }
  }),
);

const list = (item: v.GenericSchema) => v.array(item, expected("a list"));

/** The shape of a version 1 project; what ties its places together (ids, op-amp names, wiring) is checked beside it. */
export const projectSchema = object({
  name: text,
  notes: v.optional(text),
  supply: supplySchema,
  temperature: v.optional(number("a temperature in °C above −273.15", (value) => value > -273.15)),
  blocks: list(anyBlock),
  wires: list(object({ from: text, to: text })),
  opAmps: v.optional(opAmpsSchema),
});

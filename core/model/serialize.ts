import { BLOCKS } from "../blocks/index.ts";
import type { BlockKind } from "../blocks/kinds.ts";
import type { Project } from "./project.ts";

type Json = null | boolean | number | string | readonly Json[] | { readonly [key: string]: Json };
type JsonObject = { readonly [key: string]: Json };

const PROJECT_KEYS = ["format", "version", "name", "notes", "supply", "temperature", "blocks", "wires", "opAmps"];
const SUPPLY_KEYS = ["kind", "positive", "negative", "voltage", "reference"];
const REFERENCE_KEYS = ["upperR", "lowerR", "bypassC", "opAmp", "opAmpStock"];
const BLOCK_KEYS = ["id", "kind", "label", "at", "opAmp", "opAmpStock", "slider", "parts"];
const SLIDER_KEYS = ["track", "law", "position", "endR"];
const PART_KEYS = ["value", "tolerance", "stock", "measured", "piece", "second", "windingR", "selfC"];
const SECOND_KEYS = ["stock", "value", "joined", "firstValue"];
const OP_AMP_KEYS = [
  "openLoopGain", "gainBandwidth", "inputR", "outputR", "slewRate", "noiseVoltage", "noiseVoltageCorner", "noiseCurrent",
  "noiseCurrentCorner", "swingLoss", "outputCurrent", "offsetVoltage", "biasCurrent", "supplyCurrent",
];

const isObject = (value: unknown): value is JsonObject => typeof value === "object" && value !== null && !Array.isArray(value);

/**
 * Known keys in the order given; a key that this version does not know stays behind the known key that it followed, so
 * that files of other programs and later versions come back as they were.
 */
function ordered(object: Json | undefined, keys: readonly string[], inner: Readonly<Record<string, (value: Json) => Json>> = {}): Json {
  if (!isObject(object)) return object ?? null;
  const rank = new Map(keys.map((key, index) => [key, index]));
  let last = -1;
  const entries = Object.keys(object).map((key) => {
    last = rank.get(key) ?? last;
    return { key, at: last };
  });
  // The sort is stable: unknown keys share the rank of the known key before them.
  entries.sort((a, b) => a.at - b.at);
  // fromEntries defines own properties, so that even a key "__proto__" survives.
  return Object.fromEntries(entries.map(({ key }) => [key, Object.hasOwn(inner, key) ? inner[key](object[key]) : object[key]]));
}

const part = (value: Json): Json => ordered(value, PART_KEYS, { second: (second) => ordered(second, SECOND_KEYS) });

function everyEntry(value: Json, change: (value: Json) => Json): Json {
  return isObject(value) ? Object.fromEntries(Object.entries(value).map(([key, inner]) => [key, change(inner)])) : value;
}

function block(value: Json): Json {
  if (!isObject(value)) return value;
  const roles = BLOCKS[value.kind as BlockKind]?.roles ?? [];
  const parts = (p: Json): Json => ordered(everyEntry(p, part), roles.map((r) => r.role));
  return ordered(value, BLOCK_KEYS, {
    at: (at) => ordered(at, ["x", "y", "byHand"]),
    slider: (slider) => ordered(slider, SLIDER_KEYS, { track: part }),
    parts,
  });
}

/**
 * The project as file text: UTF-8 JSON, two-space indent, a stable key order and a newline at the end. Saving what was
 * opened gives the same bytes.
 */
export function serializeProject(project: Project): string {
  const list = (change: (value: Json) => Json) => (value: Json): Json => (Array.isArray(value) ? value.map(change) : value);
  const supply = (value: Json): Json =>
    ordered(value, SUPPLY_KEYS, { reference: (r) => ordered(r, REFERENCE_KEYS, { upperR: part, lowerR: part, bypassC: part }) });
  const document = ordered(project as unknown as JsonObject, PROJECT_KEYS, {
    supply,
    blocks: list(block),
    wires: list((wire) => ordered(wire, ["from", "to"])),
    opAmps: (models) => everyEntry(models, (model) => ordered(model, OP_AMP_KEYS)),
  });
  return `${JSON.stringify(document, null, 2)}\n`;
}

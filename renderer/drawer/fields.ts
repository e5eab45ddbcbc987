import type { LineFields } from "../../core/contract/drawer-schemas.ts";
import { emptyLine, type PriceBreak, type StockKind, type StockLine } from "../../core/drawer/stock.ts";
import { MOST_CHARACTERS, MOST_NOTES, RATING_UNIT } from "../../core/drawer/check-line.ts";
import { editText } from "../../core/units.ts";
import { readPositive } from "../editor/part-text.ts";
import { COLUMNS, readRating, readToleranceField, readValue } from "./columns.ts";
import { costText } from "./line-text.ts";

export type FieldEdit = { readonly ok: true; readonly fields: LineFields } | { readonly ok: false; readonly message: string };

/** A field of a line as text: the same in the panel, in bulk and for a new line. */
export interface LineField {
  readonly key: string;
  readonly label: (kind: StockKind | null) => string;
  readonly hint?: string;
  readonly appliesTo: (kind: StockKind | null) => boolean;
  readonly text: (line: StockLine) => string;
  readonly read: (text: string, line: Pick<StockLine, "kind" | "prices" | "currency">) => FieldEdit;
  readonly isLong?: boolean;
}

function only(edit: ReturnType<typeof readValue>): FieldEdit {
  // None of these counts pieces.
  return edit.ok && "found" in edit ? { ok: false, message: "not a field" } : edit;
}

function textField(key: "technology" | "package" | "location" | "supplier" | "orderCode" | "notes", label: string, hint?: string): LineField {
  const most = key === "notes" ? MOST_NOTES : MOST_CHARACTERS;
  return {
    key, label: () => label, ...(hint === undefined ? {} : { hint }), appliesTo: () => true, text: (line) => line[key], ...(key === "notes" ? { isLong: true } : {}),
    read: (text) => (text.length > most ? { ok: false, message: `at most ${most} characters` } : { ok: true, fields: { [key]: text.trim() } }),
  };
}

function columnText(key: "value" | "tolerance" | "rating"): (line: StockLine) => string {
  const column = COLUMNS.find((c) => c.key === key)!;
  return (line) => column.edit!.text({ ...line, quantity: 0, reserved: 0, retired: false });
}

const UNIT_OF_RATING = { V: "voltage", W: "power" } as const;

/** Every field but the id and the kind. */
export const FIELDS: readonly LineField[] = [
  { key: "value", label: (kind) => (kind === "op-amp" ? "type" : "value"), appliesTo: (kind) => kind !== null, text: columnText("value"), read: (text, line) => only(readValue(text, line.kind)) },
  { key: "tolerance", label: () => "tolerance", hint: "5 %", appliesTo: () => true, text: columnText("tolerance"), read: (text) => only(readToleranceField(text)) },
  {
    key: "rating", hint: "63 V, 1/4 W",
    label: (kind) => {
      const unit = kind && RATING_UNIT[kind];
      return unit ? `rated ${UNIT_OF_RATING[unit]}` : "rating";
    },
    appliesTo: (kind) => kind !== null && RATING_UNIT[kind] !== null, text: columnText("rating"), read: (text, line) => only(readRating(text, line.kind)),
  },
  textField("technology", "technology", "film, C0G, metal film; carbon, linear"),
  textField("package", "package"),
  {
    key: "temperatureCoefficient", label: () => "temp. coefficient", hint: "50 ppm/K", appliesTo: (kind) => kind !== "op-amp",
    text: (line) => (line.temperatureCoefficient === null ? "" : `${Number((line.temperatureCoefficient * 1e6).toPrecision(6))} ppm/K`),
    read: readCoefficient,
  },
  { key: "windingR", label: () => "winding resistance", hint: "12 Ω", appliesTo: (kind) => kind === "inductor", text: (line) => (line.windingR === null ? "" : editText(line.windingR, "resistance")), read: readWinding },
  textField("location", "location"),
  { key: "prices", label: () => "prices", hint: "0.12; 100: 0.09", appliesTo: () => true, text: (line) => pricesText(line.prices), read: readPrices },
  { key: "currency", label: () => "currency", hint: "EUR", appliesTo: () => true, text: (line) => line.currency, read: (text) => (/^([A-Za-z]{3})?$/.test(text.trim()) ? { ok: true, fields: { currency: text.trim().toUpperCase() } } : { ok: false, message: "expected a code of three letters, such as EUR" }) },
  textField("supplier", "supplier"),
  textField("orderCode", "order code"),
  textField("notes", "notes"),
];

function readWinding(text: string): FieldEdit {
  if (text.trim() === "") return { ok: true, fields: { windingR: null } };
  const read = readPositive(text, "resistance");
  return read.ok ? { ok: true, fields: { windingR: read.value } } : { ok: false, message: read.message };
}

function readCoefficient(text: string): FieldEdit {
  if (text.trim() === "") return { ok: true, fields: { temperatureCoefficient: null } };
  const match = /^([-−+±]?)\s*(\d+(?:[.,]\d+)?)\s*(?:ppm(?:\s*\/\s*(?:K|°C))?)?$/i.exec(text.trim());
  if (match === null) return { ok: false, message: "expected a coefficient such as 50 ppm/K" };
  const size = Number(`${match[2].replace(",", ".")}e-6`);
  return { ok: true, fields: { temperatureCoefficient: match[1] === "-" || match[1] === "−" ? -size : size } };
}

/** `0.12; 100: 0.09` */
export function pricesText(prices: readonly PriceBreak[]): string {
  return prices.map(({ from, unitCost }, index) => (index === 0 ? costText(unitCost, "") : `${from}: ${costText(unitCost, "")}`)).join("; ");
}

/** Reads prices: the cost of one, then from larger quantities on. */
export function readPrices(text: string): FieldEdit {
  if (text.trim() === "") return { ok: true, fields: { prices: [] } };
  const prices: PriceBreak[] = [];
  for (const [index, part] of text.split(";").entries()) {
    const match = /^(?:(\d+)\s*:\s*)?(\d+(?:[.,]\d+)?)$/.exec(part.trim());
    if (match === null || (index > 0 && match[1] === undefined)) return { ok: false, message: "expected prices such as 0.12; 100: 0.09" };
    prices.push({ from: Number(match[1] ?? 1), unitCost: Number(match[2].replace(",", ".")) });
  }
  if (prices[0].from !== 1) return { ok: false, message: "the first price is that of one piece" };
  if (prices.some((p, i) => i > 0 && p.from <= prices[i - 1].from)) return { ok: false, message: "the numbers of pieces must go up" };
  return { ok: true, fields: { prices } };
}

/** A line as fields say it, or what is wrong with each. */
export function lineFrom(kind: StockKind, id: string, texts: Readonly<Record<string, string>>): { readonly line: StockLine; readonly problems: ReadonlyMap<string, string> } {
  let line = emptyLine(id.trim(), kind);
  const problems = new Map<string, string>();
  for (const field of FIELDS) {
    if (!field.appliesTo(kind)) continue;
    const text = texts[field.key] ?? "";
    if (text.trim() === "" && field.key !== "value") continue;
    const edit = field.read(text, line);
    if (edit.ok) line = { ...line, ...edit.fields };
    else problems.set(field.key, edit.message);
  }
  if (line.id === "") problems.set("id", "give the line an id, such as C-100N-FILM");
  return { line, problems };
}

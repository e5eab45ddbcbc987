/** One cell of a table, read as a person would: trade notation, signs, units, either decimal mark. */
import { parseValue } from "../units.ts";
import type { Money, PriceBreak, StockKind } from "./stock.ts";

/** What a cell holds, or why it cannot be taken. */
export type Cell<T> = { readonly ok: true; readonly value: T } | { readonly ok: false; readonly message: string };

function taken<T>(value: T): Cell<T> {
  return { ok: true, value };
}

function refused(message: string): Cell<never> {
  return { ok: false, message };
}

const BARE = /^[-+−]?(?:\d+(?:[.,]\d*)?|[.,]\d+)(?:[eE][-+]?\d+)?$/;

/** Whether a cell is a number with nothing to say what it counts. */
export function isBareNumber(text: string): boolean {
  return BARE.test(text);
}

function numberOf(text: string): number {
  return Number(text.replace(",", ".").replace("−", "-"));
}

const KIND_WORDS: readonly (readonly [StockKind, RegExp])[] = [
  ["resistor", /^(?:r|res|resistors?|widerstand|résistance)$/],
  ["capacitor", /^(?:c|cap|capacitors?|condensers?|kondensator)$/],
  ["inductor", /^(?:l|ind|inductors?|inductances?|chokes?|coils?)$/],
  ["potentiometer", /^(?:p|vr|rv|pots?|potentiometers?|sliders?|tracks?|faders?|slide pots?)$/],
  ["op-amp", /^(?:u|ic|ics|op ?amps?|opa|operational amplifiers?|amplifiers?)$/],
];

/** A kind by any of its usual words. */
export function readKind(text: string): Cell<StockKind> {
  const word = text.toLowerCase().replaceAll(/[-_.\s]+/g, " ").trim();
  const found = KIND_WORDS.find(([, words]) => words.test(word));
  return found === undefined ? refused(`“${text}” is no kind of part: resistor, capacitor, inductor, potentiometer or op amp`) : taken(found[0]);
}

/** The kind that a value's own unit or prefix tells; null where it tells nothing. */
export function kindOfValue(text: string, unit: string): StockKind | null {
  const whole = (isBareNumber(text) ? text + unit : text).replaceAll(/\s+/g, "");
  if (/(?:Ω|Ω|ohms?)$/i.test(whole)) return "resistor";
  if (whole.endsWith("F") || /farads?$/i.test(whole)) return "capacitor";
  if (whole.endsWith("H") || /henry$/i.test(whole)) return "inductor";
  if (/^\d*(?:[.,]\d*)?[kKMRr]\d*$/.test(whole)) return "resistor";
  if (/^\d*(?:[.,]\d*)?[pnuµμ]\d*$/.test(whole)) return "capacitor";
  return null;
}

/** Ways of writing that old lists and printers of capitals have, and nobody would type. */
const OLD_FORMS: Readonly<Record<"resistance" | "capacitance" | "inductance", readonly (readonly [RegExp, string])[]>> = {
  resistance: [[/(?<=\d\s*)meg(?:ohms?|Ω)?$/i, "M"]],
  capacitance: [
    [/(?<=\d\s*)(?:mmfd?|pfd)$/i, "pF"],
    [/(?<=\d\s*)[mµμu]fd$/i, "uF"],
    [/(?<=\d\s*)PF?(?=\d*$)/, "p"],
    [/(?<=\d\s*)NF?(?=\d*$)/, "n"],
    [/(?<=\d\s*)UF?(?=\d*$)/, "u"],
  ],
  inductance: [],
};

/** A component value in SI units. */
export function readValue(text: string, unit: string, quantity: "resistance" | "capacitance" | "inductance"): Cell<number> {
  const usual = OLD_FORMS[quantity].reduce((read, [form, instead]) => read.replace(form, instead), text);
  const parsed = parseValue(isBareNumber(usual) ? usual + unit : usual, quantity);
  if (!parsed.ok) return refused(parsed.message);
  return parsed.value > 0 ? taken(parsed.value) : refused(`the value must be above 0, got “${text}”`);
}

/** A coil's winding resistance, Ω. */
export function readWinding(text: string, unit: string): Cell<number> {
  const read = readValue(text, unit, "resistance");
  return read.ok ? read : refused(`winding resistance: ${read.message}`);
}

/** Letters of IEC 60062:2016 for symmetrical tolerances. */
const TOLERANCE_LETTERS: Record<string, number> = { B: 0.001, C: 0.0025, D: 0.005, F: 0.01, G: 0.02, J: 0.05, K: 0.1, M: 0.2, N: 0.3 };

/** A tolerance as a fraction: `5%`, `±5 %`, `J`, `-20/+80%` (the larger side), or a bare number by the column's unit. */
export function readTolerance(text: string, unit: string): Cell<number> {
  const letter = TOLERANCE_LETTERS[text];
  if (letter !== undefined) return taken(letter);
  const plain = text.replaceAll(/\s+/g, "").replace(/^(?:±|\+\/-|\+-)/, "");
  const sides = /^[-−+](\d+(?:[.,]\d+)?)%?(?:\/|\.\.+)?[-−+](\d+(?:[.,]\d+)?)%$/.exec(plain);
  if (sides !== null) return inRange(Math.max(percentOf(sides[1]), percentOf(sides[2])));
  const percent = /^(\d+(?:[.,]\d*)?(?:[eE][-+]?\d+)?|[.,]\d+)%$/.exec(plain);
  if (percent !== null) return inRange(percentOf(percent[1]));
  if (!isBareNumber(plain)) return refused(`“${text}” is no tolerance: expected one such as 5 %`);
  return inRange(unit === "%" ? percentOf(plain) : numberOf(plain));

  function inRange(fraction: number): Cell<number> {
    return fraction >= 0 && fraction <= 1 ? taken(fraction) : refused(`the tolerance must be from 0 to 100 %, got “${text}”`);
  }
}

/** By the exponent, not by dividing: 5 % is to be exactly 0.05. */
function percentOf(digits: string): number {
  return shifted(digits, -2);
}

function shifted(digits: string, exponent: number): number {
  const [mantissa, power = "0"] = digits.replace(",", ".").replace("−", "-").split(/[eE]/);
  return Number(`${mantissa}e${Number(power) + exponent}`);
}

const PREFIX_EXPONENT: Record<string, number> = { "": 0, m: -3, k: 3, K: 3, u: -6, µ: -6 };

/** A rating in W or V: `0.25W`, `1/4 W`, `250mW`, `63 V`, `63VDC`. */
export function readRating(text: string, unit: string): Cell<number> {
  const plain = text.replaceAll(/\s+/g, "");
  const match = /^(\d+(?:[.,]\d+)?(?:[eE][-+]?\d+)?)(?:\/(\d+))?([mkKuµ]?)(?:W|V|Watts?|Volts?|VDC|VAC|V=|V~)?$/i.exec(plain);
  if (match === null) return refused(`“${text}” is no rating: expected one such as 0.25 W or 63 V`);
  const [, digits = "", divisor, prefix = ""] = match;
  const hasOwnUnit = /[a-zµ=~]$/i.test(plain);
  const columnPrefix = hasOwnUnit ? "" : (/^([mkKuµ]?)[VW]$/.exec(unit)?.[1] ?? "");
  const value = shifted(digits, (PREFIX_EXPONENT[prefix] ?? 0) + (PREFIX_EXPONENT[columnPrefix] ?? 0)) / Number(divisor ?? 1);
  return value > 0 && Number.isFinite(value) ? taken(value) : refused(`the rating must be above 0, got “${text}”`);
}

/** A temperature coefficient relative per kelvin: `50ppm`, `±100 ppm/K`, or a bare number by the column's unit. */
export function readCoefficient(text: string, unit: string): Cell<number> {
  const plain = text.replaceAll(/\s+/g, "").replace(/^(?:±|\+\/-)/, "");
  const ppm = /^([-+−]?\d+(?:[.,]\d+)?(?:[eE][-+]?\d+)?)ppm(?:\/?(?:K|°C|C|Kelvin))?$/i.exec(plain);
  if (ppm === null && !isBareNumber(plain)) return refused(`“${text}” is no temperature coefficient: expected one such as 50 ppm/K`);
  const value = ppm !== null || unit === "ppm" ? shifted(ppm?.[1] ?? plain, -6) : numberOf(plain);
  return Math.abs(value) <= 0.1 ? taken(value) : refused(`the temperature coefficient must be from −100 000 to 100 000 ppm/K, got “${text}”`);
}

/** A whole number of pieces; a mark before three digits groups thousands: `1,000`, `2.500 pcs`. */
export function readQuantity(text: string): Cell<number> {
  const plain = text.replace(/\s*(?:pcs?|pieces?|ea|each|st|stk)\.?$/i, "").replaceAll(/[\s'’ ]/g, "");
  const grouped = /^\d{1,3}(?:[.,]\d{3})+$/.test(plain) ? plain.replaceAll(/[.,]/g, "") : plain.replace(/[.,]0*$/, "");
  const value = /^\d+$/.test(grouped) ? Number(grouped) : Number.NaN;
  return Number.isSafeInteger(value) ? taken(value) : refused(`“${text}” is no number of pieces`);
}

const CURRENCY_SIGNS: Record<string, string> = { "€": "EUR", $: "USD", "£": "GBP", "¥": "JPY", "₹": "INR" };

/** An amount of money with or without its currency: `€0.10`, `0,10 EUR`, `$1,234.50`. */
export function readMoney(text: string): Cell<Money> {
  const match = /^([€$£¥₹]|[A-Z]{3})?\s*(\d[\d.,'’\s]*(?:[eE][-+]?\d+)?|[.,]\d+)\s*([€$£¥₹]|[A-Z]{3})?$/.exec(text.trim());
  if (match === null) return refused(`“${text}” is no price: expected one such as 0.10 or €0.10`);
  const sign = match[1] ?? match[3] ?? "";
  const digits = match[2].replaceAll(/['’\s]/g, "");
  // Of two marks the last is the decimal one; a single mark is decimal unless it comes more than once.
  const last = Math.max(digits.lastIndexOf("."), digits.lastIndexOf(","));
  const mark = last === -1 ? "" : digits[last];
  const isGrouping = mark !== "" && digits.split(mark).length > 2;
  const whole = (last === -1 || isGrouping ? digits : digits.slice(0, last)).replaceAll(/[.,]/g, "");
  const amount = Number(last === -1 || isGrouping ? whole : `${whole}.${digits.slice(last + 1)}`);
  return Number.isFinite(amount) ? taken({ amount, currency: CURRENCY_SIGNS[sign] ?? sign }) : refused(`“${text}” is no price`);
}

/** Price breaks in one cell: `1:0.10;100:0.06`, or a single price. */
export function readPrices(text: string): Cell<{ readonly prices: readonly PriceBreak[]; readonly currency: string }> {
  const prices: PriceBreak[] = [];
  let currency = "";
  for (const part of text.split(/[;|]/).map((one) => one.trim()).filter((one) => one !== "")) {
    const match = /^(?:(\d+)\s*\+?\s*[:@=]\s*)?(.+)$/.exec(part);
    const money = readMoney(match?.[2] ?? part);
    if (!money.ok) return money;
    prices.push({ from: Number(match?.[1] ?? 1), unitCost: money.value.amount });
    if (money.value.currency !== "") currency = money.value.currency;
  }
  return taken({ prices, currency });
}

/** A currency by its code or sign. */
export function readCurrency(text: string): Cell<string> {
  const code = CURRENCY_SIGNS[text] ?? text.toUpperCase();
  return /^[A-Z]{3}$/.test(code) ? taken(code) : refused(`“${text}” is no currency: expected a code of three letters, such as EUR`);
}

/** A tick, or none. */
export function readTick(text: string): Cell<boolean> {
  if (/^(?:|no|n|false|0|-)$/i.test(text)) return taken(false);
  if (/^(?:yes|y|true|1|x|retired|✓)$/i.test(text)) return taken(true);
  return refused(`“${text}” is neither yes nor no`);
}

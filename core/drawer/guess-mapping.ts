import { isBareNumber, readKind } from "./cells.ts";
import type { ColumnUse, Delimiter, ImportField, ImportMapping, TableReading } from "./mapping.ts";
import { DELIMITERS } from "./mapping.ts";

/** Headers by which a column is known, without their units, signs and spaces. The first that fits wins. */
const HEADERS: readonly (readonly [ImportField, RegExp])[] = [
  ["prices", /^(?:prices|pricebreaks?|costs)$/],
  ["price", /^(?:unit|each)?(?:price|cost)s?(?:each|per(?:unit|piece|pc))?(?:from|at)?(\d*)(?:pcs|up)?$/],
  ["price", /^(?:from|at)?(\d+)(?:pcs|pieces|up|off)$/],
  ["tolerance", /^(?:tol|tolerance|accuracy)$/],
  ["temperatureCoefficient", /^(?:tc|tcr|tcc|tempco|tempcoeff?|temperaturecoefficient|ppm(?:k|c)?)$/],
  ["rating", /^(?:rating|rated(?:voltage|power)?|voltage(?:rating)?|power(?:rating)?|workingvoltage|volts?|watts?|wattage|vmax|pmax)$/],
  ["windingR", /^(?:winding(?:resistance|r)?|dcr|rdc|dcresistance|coilresistance)(?:max|typ)?$/],
  ["quantity", /^(?:(?:stock|current|total)?(?:qty|quantity|count|level)|stock|instock|onhand|amount|pieces|pcs|number|available|stocked)$/],
  ["location", /^(?:location|place|bin|box|shelf|drawer|storage|where|position)$/],
  ["package", /^(?:package|pkg|case|size|footprint|pitch|leadpitch|leadspacing|form|housing|mounting)$/],
  ["technology", /^(?:technology|tech|dielectric|material|construction|series|composition|taper|law)$/],
  ["supplier", /^(?:supplier|vendor|shop|source|distributor|seller|boughtfrom|dealer)$/],
  ["orderCode", /^(?:ordercode|orderno|ordernumber|order|supplierpart(?:no|number)?|vendorpart(?:no|number)?|sku|articleno|article|itemno|itemcode|stockno|catalogue(?:no|number)?|cat(?:no)?)$/],
  ["currency", /^(?:currency|curr|cur)$/],
  ["notes", /^(?:notes?|comments?|remarks?|description|desc|info|text)$/],
  ["retired", /^(?:retired|obsolete|discontinued|inactive)$/],
  ["kind", /^(?:kind|category|class|component|componenttype|parttype|group)$/],
  ["value", /^(?:value|val|resistance|capacitance|inductance|nominal(?:value)?|ohms?|farads?|henrys?)$/],
  ["type", /^(?:type|ictype|device|model|chip|opamp)$/],
  ["id", /^(?:id|name|part|partno|partnumber|partname|ref|line|line?id|stockid|key|code|mpn|item|internalno)$/],
];

const UNIT = /[([{/]\s*([pnuµμmkKM]?(?:Ω|Ω|ohms?|F|H|V|W)|[pnuµμkM]|%|ppm(?:\/(?:K|°C))?)\s*[)\]}]?\s*$/u;
const CURRENCY = /\b([A-Z]{3})\b|([€$£¥₹])/;
const SIGNS: Record<string, string> = { "€": "EUR", $: "USD", "£": "GBP", "¥": "JPY", "₹": "INR" };

/** How a table is probably meant, from its headers and its first rows. The user can change all of it. */
export function guessMapping(headers: readonly string[], sample: readonly (readonly string[])[]): ImportMapping {
  const columns: ColumnUse[] = [];
  const taken = new Set<ImportField>();
  let currency = "";
  headers.forEach((header, column) => {
    const cells = sample.map((row) => (row[column] ?? "").trim()).filter((cell) => cell !== "");
    const known = fieldOf(header, cells);
    if (known === null || (known.field !== "price" && taken.has(known.field))) return;
    if (known.field === "price" && columns.some((use) => use.field === "price" && use.from === known.from)) return;
    taken.add(known.field);
    columns.push({ column, field: known.field, unit: unitOf(header, known.field, cells), from: known.from });
    if (known.field === "price" || known.field === "prices") {
      const [, code, sign] = CURRENCY.exec(header) ?? [];
      currency ||= sign === undefined ? (code ?? "") : (SIGNS[sign] ?? "");
    }
  });
  return { columns, defaults: { kind: kindOfHeader(headers), currency } };
}

/** Without a name of its own a column goes by what it is called. */
function fieldOf(header: string, cells: readonly string[]): { readonly field: ImportField; readonly from: number } | null {
  const plain = plainHeader(header);
  for (const [field, pattern] of HEADERS) {
    const match = pattern.exec(plain);
    if (match === null) continue;
    if (field === "type") return { field: typeField(cells), from: 1 };
    return { field, from: field === "price" ? Math.max(1, Number(match[1] || 1)) : 1 };
  }
  return null;
}

/** `Type` is anybody's word: what is in the column tells. */
function typeField(cells: readonly string[]): ImportField {
  const kinds = cells.filter((cell) => readKind(cell).ok).length;
  if (kinds > 0 && kinds * 2 >= cells.length) return "kind";
  const devices = cells.filter((cell) => /^[A-Za-z]{1,4}\d{2,5}[A-Za-z]*$/.test(cell)).length;
  return cells.length === 0 || devices * 2 >= cells.length ? "type" : "technology";
}

function plainHeader(header: string): string {
  const spaced = header.replace(UNIT, "").replaceAll(/[€$£¥₹]|\b(?:EUR|USD|GBP|CHF|JPY)\b/g, "");
  return spaced.toLowerCase().replaceAll("@", "at").replaceAll("+", "up").replaceAll(/[^\p{L}\p{N}]+/gu, "");
}

function unitOf(header: string, field: ImportField, cells: readonly string[]): string {
  const own = UNIT.exec(header)?.[1]?.replace(/ohms?/i, "Ω").replace("Ω", "Ω") ?? "";
  const bare = cells.filter(isBareNumber).map((cell) => Math.abs(Number(cell.replace(",", ".").replace("−", "-"))));
  switch (field) {
    case "value":
    case "windingR":
    case "rating":
      return own === "%" || own.startsWith("ppm") ? "" : own;
    case "tolerance":
      // Nobody buys parts of 100 % and more: such numbers are per cent.
      return own === "%" || bare.some((number) => number >= 1) ? "%" : "";
    case "temperatureCoefficient":
      return own.startsWith("ppm") || /ppm/i.test(header) || bare.some((number) => number >= 1) ? "ppm" : "";
    default:
      return "";
  }
}

/** A table of one kind often says so in the header of its values. */
function kindOfHeader(headers: readonly string[]): ImportMapping["defaults"]["kind"] {
  for (const header of headers.map(plainHeader)) {
    if (header === "resistance" || header === "ohms" || header === "ohm") return "resistor";
    if (header === "capacitance" || header === "farads") return "capacitor";
    if (header === "inductance" || header === "henrys") return "inductor";
  }
  return null;
}

/** The mark between cells: the one that comes in every line, and equally often. */
export function guessDelimiter(text: string): Delimiter {
  const lines = firstRecords(text, 30);
  let best: Delimiter = ",";
  let bestScore = 0;
  for (const delimiter of DELIMITERS) {
    const counts = lines.map((line) => line.split(delimiter).length - 1);
    const usual = counts.toSorted((a, b) => a - b)[counts.length >> 1] ?? 0;
    const alike = counts.filter((count) => count === usual).length / Math.max(1, counts.length);
    const score = usual === 0 ? 0 : alike * alike * Math.log2(1 + usual);
    if (score > bestScore) [best, bestScore] = [delimiter, score];
  }
  return best;
}

/** The first lines, without what stands in quotes. */
function firstRecords(text: string, most: number): readonly string[] {
  return text.slice(0, 65_536).replaceAll(/"(?:[^"]|"")*"/g, "x").split(/\r\n|\r|\n/).filter((line) => line.trim() !== "").slice(0, most);
}

/** Whether the first row names the columns: where one of its cells is a name that is known, or none of them is a number. */
export function guessHeader(first: readonly string[]): TableReading["hasHeader"] {
  return first.some((cell) => fieldOf(cell, []) !== null && !isBareNumber(cell.trim())) || !first.some((cell) => isBareNumber(cell.trim()));
}

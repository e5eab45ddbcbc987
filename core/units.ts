/**
 * Component values as the trade writes them. Letter codes follow IEC 60062:2016 (RKM code: the letter stands where the
 * decimal mark would); prefixes follow the SI. Files hold plain SI numbers: this module is the only way in and out.
 */
import { parse as parseExpression, type MathNode } from "mathjs/number";

export type Quantity = "resistance" | "capacitance" | "inductance" | "frequency" | "voltage" | "temperature" | "ratio" | "plain";

const UNIT_SYMBOL: Record<Quantity, string> = {
  resistance: "Ω", capacitance: "F", inductance: "H", frequency: "Hz", voltage: "V", temperature: "°C", ratio: "%", plain: "",
};

/** Words accepted after a number for each quantity, lower case. */
const UNIT_WORDS: Record<Quantity, readonly string[]> = {
  resistance: ["ω", "ohm", "ohms"], capacitance: ["f", "farad"], inductance: ["h", "henry"], frequency: ["hz"],
  voltage: ["v", "volt", "volts"], temperature: ["°c", "c"], ratio: ["%"], plain: [],
};

/** Decimal exponents of the same prefixes: numbers are read as `4.7e-9` so that 4n7 is exactly the double 4.7e-9. */
const EXPONENT: Record<string, number> = { p: -12, n: -9, u: -6, µ: -6, μ: -6, m: -3, "": 0, k: 3, K: 3, M: 6, G: 9, T: 12 };

/** Letters that stand for the decimal mark without scaling (IEC 60062: R, F, H; V by common practice). */
const MARK_LETTER: Record<Quantity, string> = {
  resistance: "RrΩ", capacitance: "F", inductance: "H", frequency: "", voltage: "V", temperature: "", ratio: "", plain: "",
};

export type ParsedValue = { readonly ok: true; readonly value: number } | { readonly ok: false; readonly message: string };

const EXAMPLE: Record<Quantity, string> = {
  resistance: "4k7, 470, 4,7 kΩ or R47", capacitance: "2n2, 100n, 4.7u or 0.0022u", inductance: "1H8 or 120m", frequency: "1k or 1250",
  voltage: "15", temperature: "25", ratio: "5 %", plain: "0.5",
};

/** One literal, e.g. `4k7`, `R47`, `4.7 kΩ`, `2,2n`, `1e-9`. Returns undefined where the text is not one. */
function parseLiteral(source: string, quantity: Quantity): number | undefined {
  let text = source.trim().replace(/\s+/g, "");
  const lower = text.toLowerCase();
  if (quantity === "ratio") {
    const ratio = /^(\d+(?:[.,]\d*)?|[.,]\d+)(%)?$/.exec(text);
    if (!ratio) return undefined;
    return Number(`${ratio[1].replace(",", ".")}${ratio[2] ? "e-2" : ""}`);
  }
  for (const word of UNIT_WORDS[quantity]) {
    // A lone trailing F or H is a unit word only after a prefix or a digit; "4F7" keeps its letter in the middle.
    if (lower.endsWith(word) && lower.length > word.length) {
      text = text.slice(0, text.length - word.length);
      break;
    }
  }
  const marks = MARK_LETTER[quantity];
  const plain = /^(\d+(?:[.,]\d*)?|[.,]\d+)([eE][+-]?\d+)?([pnuµμmkKMGT]?)$/.exec(text);
  if (plain) {
    const [, mantissa, exponent, prefix] = plain;
    const power = (exponent ? Number(exponent.slice(1)) : 0) + EXPONENT[prefix];
    return Number(`${mantissa.replace(",", ".")}e${power}`);
  }
  const coded = new RegExp(`^(\\d*)([pnuµμmkKMGT${marks}])(\\d*)$`).exec(text);
  if (coded && (coded[1] !== "" || coded[3] !== "")) {
    const power = EXPONENT[coded[2]] ?? 0;
    return Number(`${coded[1] || "0"}.${coded[3] || "0"}e${power}`);
  }
  return undefined;
}

const LITERAL = /(?:\d+(?:[.,]\d+)?|[.,]\d+)(?:[eE][+-]?\d+(?![\p{L}\d]))?\s*[\p{L}%°]*\d*|[RrΩFHV]\d+/gu;

/**
 * Reads what a person types for a value: trade notation in any usual form, or arithmetic on such values
 * (`2*4k7`, `10k/3`, `3k3 + 330`). Returns the SI value, or a message that says what would be understood.
 */
export function parseValue(source: string, quantity: Quantity): ParsedValue {
  const text = source.trim();
  const expected = `expected a value such as ${EXAMPLE[quantity]}`;
  if (text === "") return { ok: false, message: expected };
  if (text.length > 200) return { ok: false, message: `too long: ${expected}` };
  const literal = parseLiteral(text, quantity);
  if (literal !== undefined) return finite(literal, expected);
  if (!/[-+*/^()]/.test(text)) return { ok: false, message: `“${text}” is not understood: ${expected}` };
  let isEveryLiteralRead = true;
  const numbers = text.replace(LITERAL, (token) => {
    const value = parseLiteral(token, quantity);
    if (value === undefined) {
      isEveryLiteralRead = false;
      return token;
    }
    return String(value);
  });
  if (!isEveryLiteralRead) return { ok: false, message: `“${text}” is not understood: ${expected}` };
  try {
    const tree = parseExpression(numbers);
    if (!isArithmetic(tree)) return { ok: false, message: `only + − * / ^ and brackets may join values: ${expected}` };
    return finite(Number(tree.compile().evaluate()), expected);
  } catch {
    return { ok: false, message: `“${text}” is not understood: ${expected}` };
  }
}

function finite(value: number, expected: string): ParsedValue {
  return Number.isFinite(value) ? { ok: true, value } : { ok: false, message: `out of range: ${expected}` };
}

function isArithmetic(tree: MathNode): boolean {
  let isFine = true;
  tree.traverse((node) => {
    if (node.type !== "ConstantNode" && node.type !== "OperatorNode" && node.type !== "ParenthesisNode") isFine = false;
    if (node.type === "OperatorNode" && !["+", "-", "*", "/", "^"].includes((node as MathNode & { op: string }).op)) isFine = false;
  });
  return isFine;
}

/** Digits of a number at a given precision, without trailing zeros and never in exponent form for |x| in 1e-3 … 1e6. */
function digits(value: number, significant: number): string {
  const rounded = Number(value.toPrecision(significant));
  return String(rounded);
}

const PREFIX_STEPS: readonly (readonly [string, number])[] = [["p", -12], ["n", -9], ["µ", -6], ["m", -3], ["", 0], ["k", 3], ["M", 6], ["G", 9], ["T", 12]];

/** Splits an SI value into mantissa text and prefix so that the mantissa lies in 1 … 1000 where a prefix exists. */
function scaled(value: number, significant: number, allowed: readonly (readonly [string, number])[]): readonly [string, string] {
  if (value === 0 || !Number.isFinite(value)) return [String(value), ""];
  const [mantissa, power] = value.toExponential(significant - 1).split("e");
  const exponent = Number(power);
  let best = allowed[0];
  for (const step of allowed) if (step[1] <= exponent) best = step;
  return [digits(Number(`${mantissa}e${exponent - best[1]}`), significant), best[0]];
}

const PREFIXES_OF: Record<Quantity, readonly (readonly [string, number])[]> = {
  resistance: PREFIX_STEPS.filter(([, e]) => e >= -3),
  // The trade writes 10 000 µF rather than 10 mF.
  capacitance: PREFIX_STEPS.filter(([, e]) => e <= -6),
  inductance: PREFIX_STEPS.filter(([, e]) => e <= 0),
  frequency: PREFIX_STEPS.filter(([, e]) => e >= 0),
  voltage: PREFIX_STEPS.filter(([, e]) => e <= 3),
  temperature: [["", 0]], ratio: [["", 0]], plain: [["", 0]],
};

export interface FormatOpts {
  /** Significant digits; 3 by default, as many as the value needs (up to 12) with `"exact"`. */
  readonly significant?: number | "exact";
}

/** `4.7 kΩ`, `100 nF`, `1.84 H`, `957 Hz`: value, space, prefix and unit (ISO 80000-1 spacing). */
export function formatValue(value: number, quantity: Quantity, opts: FormatOpts = {}): string {
  const significant = opts.significant === "exact" ? 12 : (opts.significant ?? 3);
  if (quantity === "ratio") return `${digits(value * 100, significant)} %`;
  const [mantissa, prefix] = scaled(value, significant, PREFIXES_OF[quantity]);
  const unit = `${prefix}${UNIT_SYMBOL[quantity]}`;
  return unit === "" ? mantissa : `${mantissa} ${unit}`;
}

/**
 * A computed figure: like `formatValue`, but with every significant digit shown, trailing zeros too (`1.00 kHz`, `59.0 Hz`),
 * so that a reader sees how far it is meant.
 */
export function formatFigure(value: number, quantity: Quantity, significant = 3): string {
  const [mantissa, prefix] = scaled(value, significant, PREFIXES_OF[quantity]);
  const unit = `${prefix}${UNIT_SYMBOL[quantity]}`;
  const size = Math.abs(Number(mantissa));
  const text = Number(mantissa).toFixed(size === 0 ? 0 : Math.min(100, Math.max(0, significant - 1 - Math.floor(Math.log10(size)))));
  return unit === "" ? text : `${text} ${unit}`;
}

/**
 * The letter code of IEC 60062:2016 for a resistance, capacitance or inductance: 4700 → `4k7`, 0.47 Ω → `R47`,
 * 2.2e-9 F → `2n2`, 1.8 H → `1H8`. Exact for values of up to `significant` digits.
 */
export function formatCode(value: number, quantity: "resistance" | "capacitance" | "inductance", significant = 4): string {
  const unitLetter = { resistance: "R", capacitance: "F", inductance: "H" }[quantity];
  // Below one unit a resistance takes R47; the code has no milli-ohm letter that meters use.
  const allowed = PREFIX_STEPS.filter(([, e]) => (quantity === "resistance" ? e >= 0 : e <= 0));
  const [mantissa, prefix] = scaled(value, significant, allowed);
  const letter = prefix === "" ? unitLetter : prefix;
  const [whole, fraction = ""] = mantissa.split(".");
  return `${whole === "0" ? "" : whole}${letter}${fraction}`;
}

/** What a value field shows while it is edited: exact, with prefix, without unit: `4.7k`, `0.0022u` typed becomes `2.2n`. */
export function editText(value: number, quantity: Quantity): string {
  if (quantity === "ratio") return `${digits(value * 100, 12)} %`;
  const [mantissa, prefix] = scaled(value, 12, PREFIXES_OF[quantity]);
  return `${mantissa}${prefix}`;
}

/** `+10.43 dB`, `−0.50 dB` with a true minus sign; the sign is always shown, except on zero. */
export function formatDb(gainDb: number, decimals = 1): string {
  const text = Math.abs(gainDb).toFixed(decimals);
  const sign = Number(text) === 0 ? "" : gainDb > 0 ? "+" : "−";
  return `${sign}${text} dB`;
}


import { parse, type MathNode } from "mathjs/number";
import { formatFigure, formatValue, type Quantity } from "../units.ts";
import { lawSymbolQuantity, type LawAccount } from "./laws.ts";
import type { ComplexValue, BranchEquation, CurrentTerm, NodeEquation } from "./node-equations.ts";
import type { IdealStage } from "./ideal-transfer.ts";
import type { BlockKind } from "../blocks/kinds.ts";

/** The two ways in which an equation is written: plain text to read and copy, and LaTeX. */
export type EquationStyle = "text" | "tex";

/** A name inside LaTeX's \text{}. */
function texName(name: string): string {
  return name.replaceAll(/[\\{}$&#%_^~]/g, (c) => (c === "\\" ? "\\textbackslash{}" : c === "^" || c === "~" ? `\\${c}{}` : `\\${c}`));
}

const LETTER: Partial<Record<Quantity, string>> = { resistance: "R", capacitance: "C", inductance: "L" };

/** A number with its unit in LaTeX, from the same text that the screen shows. */
function texValue(text: string): string {
  const [mantissa, unit] = text.split(" ");
  if (unit === undefined) return mantissa;
  const symbol = unit.replace("Ω", "\\Omega").replace("µ", "\\mu ");
  return `${mantissa}\\,\\mathrm{${symbol}}`;
}

/** A law's symbol: `seriesR` is R with the subscript “series”, `f0` is f with the subscript 0. */
export function lawSymbolText(kind: BlockKind, symbol: string, style: EquationStyle): string {
  if (style === "text") return symbol;
  const short = /^([A-Za-z])(\d|c)$/.exec(symbol);
  if (short) return `${short[1]}_{${short[2] === "c" ? "\\mathrm{c}" : short[2]}}`;
  if (symbol.length === 1) return symbol;
  const quantity = lawSymbolQuantity(kind, symbol);
  const letter = LETTER[quantity] ?? "";
  return `${letter}_{\\text{${texName(symbol.replace(/[RC]$/, ""))}}}`;
}

function printed(tree: MathNode, style: EquationStyle, symbol: (name: string) => string): string {
  const handler = (node: MathNode): string | undefined => {
    if (node.type !== "SymbolNode") return undefined;
    const { name } = node as MathNode & { name: string };
    return name === "pi" ? (style === "tex" ? "\\pi" : "π") : symbol(name);
  };
  // A fraction bar groups by itself what the text has in brackets.
  const opts = { handler, parenthesis: style === "tex" ? ("auto" as const) : ("keep" as const), implicit: "show" as const };
  return style === "tex" ? tree.toTex(opts).replaceAll("\\cdot", "\\cdot ").replaceAll(/2\\cdot +\\pi\\cdot +/g, "2\\pi\\,") : tree.toString(opts).replaceAll(" * ", "·").replaceAll("sqrt", "√");
}

/** A design law in three steps: with symbols, with this board's values put in, and the result. */
export function lawSteps(account: LawAccount, kind: BlockKind, style: EquationStyle): { readonly symbols: string; readonly values: string; readonly result: string } {
  const tree = parse(account.law.expression);
  const valueOf = new Map(account.inputs.map((input) => [input.symbol, formatValue(input.value, input.quantity, { significant: 4 })]));
  const result = formatFigure(account.value, account.law.quantity);
  const left = lawSymbolText(kind, account.law.symbol, style);
  return {
    symbols: `${left} = ${printed(tree, style, (name) => lawSymbolText(kind, name, style))}`,
    values: printed(tree, style, (name) => (style === "tex" ? texValue(valueOf.get(name)!) : (valueOf.get(name)!))),
    result: style === "tex" ? texValue(result) : result,
  };
}

/** `0.9931∠−2.41°`: magnitude and angle; with a unit, in engineering prefixes. */
export function complexText(z: ComplexValue, unit: string, style: EquationStyle): string {
  const angle = ((Math.atan2(z.im, z.re) * 180) / Math.PI).toFixed(2).replace("-", "−");
  const size = engineering(Math.hypot(z.re, z.im), unit);
  return style === "tex" ? `${texValue(size)}\\angle{${angle.replace("−", "-")}}^\\circ` : `${size} ∠ ${angle}°`;
}

const ENGINEERING = ["f", "p", "n", "µ", "m", "", "k", "M", "G"];

/** Four digits and the prefix that keeps the number in 1 … 1000. */
function engineering(value: number, unit: string): string {
  if (value === 0) return unit === "" ? "0" : `0 ${unit}`;
  const step = unit === "" ? 0 : Math.max(-5, Math.min(3, Math.floor(Math.log10(value) / 3 + 1e-12)));
  const mantissa = value / 10 ** (3 * step);
  const digits = mantissa < 1e-3 || mantissa >= 1e4 ? mantissa.toExponential(3) : mantissa.toPrecision(4);
  return unit === "" ? digits : `${digits} ${ENGINEERING[step + 5]}${unit}`;
}

const volt = (node: string, style: EquationStyle): string => (style === "tex" ? `V_{\\text{${texName(node)}}}` : `v[${node}]`);
const part = (letter: string, name: string, style: EquationStyle): string => (style === "tex" ? `${letter}_{\\text{${texName(name)}}}` : name);
const current = (name: string, style: EquationStyle): string => (style === "tex" ? `I_{\\text{${texName(name)}}}` : `I[${name}]`);

function difference(from: string, to: string, style: EquationStyle): string {
  if (to === "ground") return volt(from, style);
  if (from === "ground") return `−${volt(to, style)}`.replace("−", style === "tex" ? "-" : "−");
  const minus = style === "tex" ? "-" : "−";
  return `${volt(from, style)} ${minus} ${volt(to, style)}`;
}

function termText(term: CurrentTerm, style: EquationStyle): string {
  if (term.type === "branch") return current(term.part, style);
  const drop = difference(term.from, term.to, style);
  const isSingle = !drop.includes(" ");
  if (term.type === "resistor") {
    const r = part("R", term.part, style);
    if (style === "tex") return `\\frac{${drop}}{${r}}`;
    return isSingle ? `${drop}/${r}` : `(${drop})/${r}`;
  }
  const c = part("C", term.part, style);
  if (style === "tex") return `s\\,${c}${isSingle ? drop : `\\left(${drop}\\right)`}`;
  return isSingle ? `s·${c}·${drop}` : `s·${c}·(${drop})`;
}

/** A Kirchhoff sum: every current that leaves the node, together 0. */
export function nodeEquationText(equation: NodeEquation, style: EquationStyle): string {
  const minus = style === "tex" ? "-" : "−";
  const sum = equation.terms.map((term, index) => {
    const isNegative = term.type === "branch" && term.sign < 0;
    const text = termText(term, style);
    return index === 0 ? `${isNegative ? minus : ""}${text}` : `${isNegative ? minus : "+"} ${text}`;
  });
  return `${sum.join(" ")} = 0`;
}

/** The law of a branch. */
export function branchEquationText(equation: BranchEquation, style: EquationStyle): string {
  if (equation.type === "emf") return `${volt(equation.plus, style)} = ${equation.value}${style === "tex" ? "\\,\\mathrm{V}" : " V"}`;
  if (equation.type === "inductor") return `${difference(equation.from, equation.to, style)} = s${style === "tex" ? "\\," : "·"}${part("L", equation.part, style)}${style === "tex" ? "\\," : "·"}${current(equation.part, style)}`;
  const inputs = difference(equation.plus, equation.minus, style);
  if (equation.model === "ideal") return `${volt(equation.plus, style)} = ${volt(equation.minus, style)}`;
  if (style === "tex") return `\\frac{${volt(equation.out, style)} + R_{\\text{out}}\\,${current(equation.part, style)}}{A_{\\text{${texName(equation.part)}}}(s)} = ${inputs}`;
  return `(${volt(equation.out, style)} + outputR·${current(equation.part, style)})/A[${equation.part}](s) = ${inputs}`;
}

/** A(s) of a real op amp with its numbers; undefined for an ideal one. */
export function opAmpGainText(equation: BranchEquation, style: EquationStyle): string | undefined {
  if (equation.type !== "opAmp" || equation.model === "ideal") return undefined;
  const { openLoopGain, gainBandwidth, outputR, inputR } = equation.model;
  const gbw = formatValue(gainBandwidth, "frequency");
  const [ro, ri] = [formatValue(outputR, "resistance"), formatValue(inputR, "resistance")];
  if (style === "tex") return `A_{\\text{${texName(equation.part)}}}(s) = \\frac{1}{1/${openLoopGain} + s/(2\\pi\\cdot ${texValue(gbw)})},\\quad R_{\\text{out}} = ${texValue(ro)},\\quad R_{\\text{in}} = ${texValue(ri)}`;
  return `A[${equation.part}](s) = 1/(1/${openLoopGain} + s/(2π·${gbw})), outputR = ${ro}, inputR = ${ri}`;
}

/** The transfer function of a stage in leg admittances, ideal op amp. */
export function stageTransferText(style: EquationStyle, hasFeedbackC: boolean): readonly string[] {
  if (style === "tex") {
    return [
      `H = \\frac{1 + Z_{\\text{f}}\\sum_i Y'_i\\,R_{\\text{cut},i}/T_i}{1 + R_{\\text{input}}\\sum_i Y'_i\\,R_{\\text{boost},i}/T_i}`,
      `Y'_i = \\frac{Y_i}{1 + Y_i\\,R_{\\text{boost},i}R_{\\text{cut},i}/T_i},\\quad T_i = R_{\\text{boost},i} + R_{\\text{cut},i}`,
      hasFeedbackC ? `Z_{\\text{f}} = \\frac{R_{\\text{feedback}}}{1 + s\\,R_{\\text{feedback}}C_{\\text{feedback}}}` : `Z_{\\text{f}} = R_{\\text{feedback}}`,
    ];
  }
  return [
    "H = (1 + Zf·Σ Y′·Rcut/T) / (1 + inputR·Σ Y′·Rboost/T)",
    "Y′ = Y/(1 + Y·Rboost·Rcut/T), T = Rboost + Rcut, Y the leg's admittance",
    hasFeedbackC ? "Zf = feedbackR/(1 + s·feedbackR·feedbackC)" : "Zf = feedbackR",
  ];
}

/** The same with the numbers of one frequency put in. */
export function stageTransferNumbers(stage: IdealStage, style: EquationStyle): string {
  const zf = complexText(stage.feedbackZ, "Ω", style);
  const ri = formatValue(stage.inputR, "resistance", { significant: 4 });
  const [boost, cut, h] = [complexText(stage.boostSum, "S", style), complexText(stage.cutSum, "S", style), complexText(stage.transfer, "", style)];
  if (style === "tex") return `H = \\frac{1 + (${zf})(${boost})}{1 + ${texValue(ri)}\\,(${cut})} = ${h}`;
  return `H = (1 + (${zf})·(${boost})) / (1 + ${ri}·(${cut})) = ${h}`;
}

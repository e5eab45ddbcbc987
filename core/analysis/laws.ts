import { compile, derivative, parse, type EvalFunction, type MathNode } from "mathjs/number";
import { BLOCKS } from "../blocks/index.ts";
import type { Law } from "../blocks/definition.ts";
import type { BlockKind } from "../blocks/kinds.ts";
import type { Block, Part } from "../model/project.ts";
import { blockValues, type ValueOpts } from "../net/values.ts";
import type { Quantity } from "../units.ts";

const compiled = new Map<string, EvalFunction>();

function evaluate(expression: string, scope: Record<string, number>): number {
  let code = compiled.get(expression);
  if (!code) compiled.set(expression, (code = compile(expression)));
  return Number(code.evaluate(scope));
}

function lawScope(band: Block, stage: Block, opts: ValueOpts): Record<string, number> {
  return { ...blockValues(band, opts), feedbackR: blockValues(stage, opts).feedbackR };
}

/** The design laws of a band worked out with its values, by symbol; `stage` gives feedbackR. SI units; G is a ratio. */
export function lawResults(band: Block, stage: Block, opts: ValueOpts = {}): Readonly<Record<string, number>> {
  const scope = lawScope(band, stage, opts);
  const results: Record<string, number> = {};
  for (const law of BLOCKS[band.kind].laws) scope[law.symbol] = results[law.symbol] = evaluate(law.expression, scope);
  return results;
}

/**
 * The frequency that a kind's laws give for these parts, Hz: the resonance f0 of its leg, or the corner fc; undefined for a
 * kind without one and for values that give none.
 */
export function legFrequency(kind: BlockKind, parts: Readonly<Record<string, Part>>): number | undefined {
  const scope: Record<string, number> = { windingR: parts.inductor?.windingR ?? 0 };
  for (const { role } of BLOCKS[kind].roles) if (parts[role]) scope[role] = parts[role].value;
  for (const { symbol, quantity, expression } of BLOCKS[kind].laws) {
    if (quantity === "frequency") {
      const value = evaluate(expression, scope);
      return Number.isFinite(value) && value > 0 ? value : undefined;
    }
    // Frequencies stand on inductance alone; boost and Q want to know more than the leg.
    if (quantity === "inductance") scope[symbol] = evaluate(expression, scope);
  }
  return undefined;
}

/** Something that a law is made of. */
export interface LawInput {
  readonly symbol: string;
  readonly quantity: Quantity;
  readonly value: number;
}

export interface LawAccount {
  readonly law: Law;
  readonly value: number;
  /** The symbols in the expression, in order of appearance, π apart. */
  readonly inputs: readonly LawInput[];
  /**
   * d(ln result)/d(ln part) for every part behind the law, through earlier laws too: −0.5 means that 1 % more of the part
   * moves the result by −0.5 %. Symbolic derivatives.
   */
  readonly elasticity: readonly { readonly symbol: string; readonly value: number }[];
}

/** What a symbol of a band's laws stands for. */
export function lawSymbolQuantity(kind: Block["kind"], symbol: string): Quantity {
  const { roles, laws } = BLOCKS[kind];
  return roles.find((r) => r.role === symbol)?.quantity ?? laws.find((l) => l.symbol === symbol)?.quantity ?? (symbol === "selfC" ? "capacitance" : "resistance");
}

/** A law's symbols in order of appearance, π apart. */
export function lawSymbols(expression: string | MathNode): string[] {
  const found: string[] = [];
  const tree = typeof expression === "string" ? parse(expression) : expression;
  tree.traverse((node, path, parent) => {
    // A function's own name is a symbol node too.
    const isFunction = parent?.type === "FunctionNode" && path === "fn";
    if (node.type !== "SymbolNode" || isFunction) return;
    const { name } = node as MathNode & { name: string };
    if (name !== "pi" && !found.includes(name)) found.push(name);
  });
  return found;
}

/** A law with earlier laws put in, so that it stands on parts alone. */
function onPartsAlone(law: Law, laws: readonly Law[]): MathNode {
  return parse(law.expression).transform((node) => {
    if (node.type !== "SymbolNode") return node;
    const earlier = laws.find((l) => l.symbol === (node as MathNode & { name: string }).name);
    return earlier ? onPartsAlone(earlier, laws) : node;
  });
}

/** A band's laws with what goes in, what comes out and how each part moves it. */
export function lawAccounts(band: Block, stage: Block, opts: ValueOpts = {}): LawAccount[] {
  const { laws } = BLOCKS[band.kind];
  const results = lawResults(band, stage, opts);
  const scope = lawScope(band, stage, opts);
  return laws.map((law): LawAccount => {
    const tree = onPartsAlone(law, laws);
    const value = results[law.symbol];
    return {
      law,
      value,
      inputs: lawSymbols(law.expression).map((symbol) => ({ symbol, quantity: lawSymbolQuantity(band.kind, symbol), value: results[symbol] ?? scope[symbol] })),
      elasticity: lawSymbols(tree).map((symbol) => {
        const slope = Number(derivative(tree, symbol, { simplify: false }).evaluate({ ...scope }));
        return { symbol, value: (slope * scope[symbol]) / value };
      }),
    };
  });
}

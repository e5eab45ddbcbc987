import { compile, type EvalFunction } from "mathjs/number";
import { BLOCKS } from "../blocks/index.ts";
import type { Law } from "../blocks/definition.ts";
import type { Block } from "../model/project.ts";
import { blockValues, type ValueOpts } from "../net/values.ts";

const compiled = new Map<string, EvalFunction>();

function evaluateLaw(law: Law, scope: Record<string, number>): number {
  let code = compiled.get(law.expression);
  if (!code) compiled.set(law.expression, (code = compile(law.expression)));
  return Number(code.evaluate(scope));
}

/** The design laws of a band worked out with its values, by symbol; `stage` gives feedbackR. SI units; G is a ratio. */
export function lawResults(band: Block, stage: Block, opts: ValueOpts = {}): Readonly<Record<string, number>> {
  const scope: Record<string, number> = { ...blockValues(band, opts), feedbackR: blockValues(stage, opts).feedbackR };
  const results: Record<string, number> = {};
  for (const law of BLOCKS[band.kind].laws) scope[law.symbol] = results[law.symbol] = evaluateLaw(law, scope);
  return results;
}

import * as fc from "fast-check";
import { type MathType, evaluate, unit } from "mathjs";
import { describe, expect, test } from "vitest";
import { bandFigures } from "../../../core/analysis/bands.ts";
import { lawAccounts, lawResults, lawSymbolQuantity, lawSymbols } from "../../../core/analysis/laws.ts";
import type { Law } from "../../../core/blocks/definition.ts";
import { BAND_KINDS, BLOCKS } from "../../../core/blocks/index.ts";
import type { BlockKind } from "../../../core/blocks/kinds.ts";
import type { Block, Part } from "../../../core/model/project.ts";
import { resolveBoard } from "../../../core/net/board.ts";
import type { Quantity } from "../../../core/units.ts";
import { netlistOf, nodalGain } from "../../fixtures/figures.ts";
import { runs } from "../../fixtures/runs.ts";
import { bandOf, blockArbitrary, logUniform, oneBus } from "../../helpers/boards.ts";

const STAGE: Block = { id: "eq", kind: "boost-cut-stage", opAmp: "ideal", parts: { inputR: { value: 3300 }, feedbackR: { value: 3300 } } };

const BANDS: Readonly<Record<string, Block>> = {
  gyrator: bandOf("g", "gyrator-section", { seriesC: 220e-9, seriesR: 470, gyratorC: 3.9e-9, gyratorR: 68e3 }),
  inductor: bandOf("i", "inductor-section", { seriesC: 220e-9, seriesR: 390, inductor: { value: 0.12, windingR: 60, selfC: 100e-12 } }),
  shelf: bandOf("s", "shelf-section", { seriesC: 10e-9, seriesR: 470 }),
  lowShelf: bandOf("l", "low-shelf-section", { seriesR: 1000, gyratorC: 47e-9, gyratorR: 100e3, blockingC: 47e-6 }),
  level: bandOf("v", "level-section", { seriesR: 680, blockingC: 47e-6 }),
};

describe("design laws by hand", () => {
  // Worked out on paper from the expressions of circuits.md (shop-floor form), five digits.
  test.each([
    ["gyrator", { L: 0.124644, f0: 961.11, Q: 1.60150, G: 8.02128 }],
    ["inductor", { L: 0.12, f0: 979.53, Q: 1.64122, G: 8.33333 }],
    ["shelf", { fc: 33862.8, G: 8.02128 }],
    ["lowShelf", { L: 4.7, fc: 33.8628, G: 4.3 }],
    ["level", { G: 5.85294 }],
  ])("%s", (name, wanted) => {
    const found = lawResults(BANDS[name], STAGE);
    expect(Object.keys(found)).toEqual(Object.keys(wanted));
    for (const [symbol, value] of Object.entries(wanted)) expect(Math.abs(found[symbol] / value - 1), symbol).toBeLessThan(5e-6);
  });

  // Common practice: 1.842 H with 330 Ω resonating at 95.75 Hz has Q 3.36; 1 + 3300/330 = 11 is 20.83 dB.
  test("a lone leg of common practice", () => {
    const seriesC = 1 / ((2 * Math.PI * 95.75) ** 2 * 1.842);
    const found = lawResults(bandOf("i", "inductor-section", { seriesC, seriesR: 330, inductor: 1.842 }), STAGE);
    expect(found.f0).toBeCloseTo(95.75, 9);
    expect(found.Q).toBeCloseTo(3.36, 2);
    expect(found.G).toBeCloseTo(11, 12);
    expect(20 * Math.log10(found.G)).toBeCloseTo(20.83, 2);
  });

  test("measured values count only where they are asked for", () => {
    const band = bandOf("s", "shelf-section", { seriesC: 10e-9, seriesR: { value: 470, measured: 500 } });
    expect(lawResults(band, STAGE).G).toBeCloseTo(1 + 3300 / 470, 12);
    expect(lawResults(band, STAGE, { isMeasured: true }).G).toBeCloseTo(1 + 3300 / 500, 12);
  });
});

const UNIT: Readonly<Record<Quantity, string | undefined>> = {
  resistance: "ohm", capacitance: "farad", inductance: "henry", frequency: "hertz", voltage: "volt", temperature: "kelvin", ratio: undefined, plain: undefined,
};

/** Evaluates a kind's laws with full units on everything; says for which law the dimension is not the law's quantity. */
function wrongDimensions(kind: BlockKind, laws: readonly Law[]): string[] {
  const scope: Record<string, MathType> = {};
  const put = (symbol: string, quantity: Quantity, value: number): void => {
    const name = UNIT[quantity];
    scope[symbol] = name === undefined ? value : unit(value, name);
  };
  for (const { role, quantity } of BLOCKS[kind].roles) put(role, quantity, 2);
  for (const part of ["windingR", "feedbackR"]) put(part, "resistance", 3);
  return laws.flatMap(({ symbol, quantity, expression }) => {
    let result: MathType;
    try {
      result = evaluate(expression, scope) as MathType;
    } catch (error) {
      return [`${symbol}: ${String(error)}`];
    }
    const name = UNIT[quantity];
    const isRight = name === undefined ? typeof result === "number" : typeof result === "object" && "equalBase" in result && result.equalBase(unit(name));
    put(symbol, quantity, 5);
    return isRight ? [] : [`${symbol} is ${String(result)}`];
  });
}

describe("dimensions", () => {
  test.each(BAND_KINDS)("every law of a %s has the dimension of its quantity", (kind) => {
    expect(BLOCKS[kind].laws.length).toBeGreaterThan(0);
    expect(wrongDimensions(kind, BLOCKS[kind].laws)).toEqual([]);
  });

  test.each([
    ["a factor left out", "L", "seriesR * gyratorR"],
    ["a square root left out", "f0", "1 / (2 * pi * L * seriesC)"],
    ["a ratio upside down in a sum", "G", "1 + feedbackR"],
    ["a division left out", "Q", "sqrt(L / seriesC)"],
    ["a capacitance for a resistance", "G", "1 + feedbackR / seriesC"],
  ])("the check sees %s", (_about, symbol, expression) => {
    const laws = BLOCKS["gyrator-section"].laws.map((law) => (law.symbol === symbol ? { ...law, expression } : law));
    const wrong = wrongDimensions("gyrator-section", laws);
    expect(wrong).toHaveLength(1);
    expect(wrong[0].startsWith(symbol)).toBe(true);
  });

  test.each(BAND_KINDS)("every symbol of a %s's laws is a role, an earlier law, or comes from stage or coil", (kind) => {
    const known = new Set([...BLOCKS[kind].roles.filter((r) => !r.isOptional).map((r) => r.role), "feedbackR", ...(kind === "inductor-section" ? ["windingR"] : [])]);
    for (const law of BLOCKS[kind].laws) {
      for (const symbol of lawSymbols(law.expression)) expect(known, `${law.symbol}: ${symbol}`).toContain(symbol);
      known.add(law.symbol);
      expect(lawSymbolQuantity(kind, law.symbol)).toBe(law.quantity);
    }
  });
});

/** A board's band and stage with one part made larger by a factor. */
function scaled(band: Block, stage: Block, symbol: string, factor: number): [Block, Block] {
  const larger = (part: Part): Part => ({ ...part, value: part.value * factor });
  if (symbol === "feedbackR") return [band, { ...stage, parts: { ...stage.parts, feedbackR: larger(stage.parts!.feedbackR) } }];
  if (symbol === "windingR") return [{ ...band, parts: { ...band.parts, inductor: { ...band.parts!.inductor, windingR: band.parts!.inductor.windingR! * factor } } }, stage];
  return [{ ...band, parts: { ...band.parts, [symbol]: larger(band.parts![symbol]) } }, stage];
}

describe("elasticities", () => {
  test.each(Object.keys(BANDS))("of a %s section are those of central differences, through earlier laws too", (name) => {
    const band = BANDS[name];
    for (const { law, value, elasticity } of lawAccounts(band, STAGE)) {
      expect(elasticity.length).toBeGreaterThan(0);
      // Parts alone: no law stands on the right any more.
      for (const { symbol } of elasticity) expect(BLOCKS[band.kind].laws.map((l) => l.symbol)).not.toContain(symbol);
      expect(value).toBe(lawResults(band, STAGE)[law.symbol]);
      for (const { symbol, value: slope } of elasticity) {
        const step = 1e-5;
        const [above, below] = [1 + step, 1 - step].map((factor) => lawResults(...scaled(band, STAGE, symbol, factor))[law.symbol]);
        expect(slope, `${law.symbol} by ${symbol}`).toBeCloseTo(Math.log(above / below) / Math.log((1 + step) / (1 - step)), 8);
      }
    }
  });

  test("random values too", () => {
    fc.assert(
      fc.property(fc.constantFrom(...BAND_KINDS).chain((kind) => blockArbitrary(kind, "b")), logUniform(500, 1e5), (band, feedbackR) => {
        const stage: Block = { ...STAGE, parts: { inputR: { value: 3300 }, feedbackR: { value: feedbackR } } };
        for (const { law, elasticity } of lawAccounts(band, stage)) {
          for (const { symbol, value } of elasticity) {
            // A coil without winding resistance has nothing to make larger.
            if (symbol === "windingR" && !band.parts?.inductor.windingR) {
              expect(Math.abs(value)).toBe(0);
              continue;
            }
            const [above, below] = [1.00001, 0.99999].map((factor) => lawResults(...scaled(band, stage, symbol, factor))[law.symbol]);
            expect(value).toBeCloseTo(Math.log(above / below) / Math.log(1.00001 / 0.99999), 6);
          }
        }
      }),
      runs(100),
    );
  });

  test("by hand: 1 % more gyratorC moves f0 by −0.5 % and Q by +0.5 %, and G not at all", () => {
    const accounts = lawAccounts(BANDS.gyrator, STAGE);
    const of = (law: string, symbol: string): number | undefined => accounts.find((a) => a.law.symbol === law)!.elasticity.find((e) => e.symbol === symbol)?.value;
    expect(of("f0", "gyratorC")).toBeCloseTo(-0.5, 12);
    expect(of("f0", "seriesC")).toBeCloseTo(-0.5, 12);
    expect(of("Q", "gyratorC")).toBeCloseTo(0.5, 12);
    expect(of("Q", "seriesR")).toBeCloseTo(-0.5, 12);
    expect(of("G", "gyratorC")).toBeUndefined();
    // (G − 1)/G = 3300/3770
    expect(of("G", "feedbackR")).toBeCloseTo(3300 / 3770, 12);
    expect(of("G", "seriesR")).toBeCloseTo(-3300 / 3770, 12);
  });

  test("what goes in is listed with its value and quantity", () => {
    const [, f0] = lawAccounts(BANDS.gyrator, STAGE);
    expect(f0.inputs).toEqual([{ symbol: "L", quantity: "inductance", value: 470 * 68e3 * 3.9e-9 }, { symbol: "seriesC", quantity: "capacitance", value: 220e-9 }]);
    expect(lawAccounts(BANDS.inductor, STAGE)[3].inputs.map((i) => [i.symbol, i.quantity, i.value])).toEqual([["feedbackR", "resistance", 3300], ["seriesR", "resistance", 390], ["windingR", "resistance", 60]]);
  });
});

describe("the laws in the limit where they are exact: a lone band, ideal op amps, nothing at the ends of the chain", () => {
  const stiff = { inputR: 3300, feedbackR: 3300, sourceR: 1e-9, outputSeriesR: 1e-9, loadR: 1e12 };
  const boost = (band: Block): Block => ({ ...band, slider: { ...band.slider!, position: 1 } });

  test("an inductor section is exact: its peak is G at f0", () => {
    fc.assert(
      fc.property(logUniform(30, 15e3), logUniform(10, 2e3), fc.oneof(fc.constant(0), logUniform(1, 500)), logUniform(0.5, 10), (f0, seriesR, windingR, q) => {
        const inductor = (q * (seriesR + windingR)) / (2 * Math.PI * f0);
        const band = bandOf("i", "inductor-section", { seriesC: 1 / ((2 * Math.PI * f0) ** 2 * inductor), seriesR, inductor: { value: inductor, windingR } });
        const project = oneBus([boost(band)], stiff);
        const laws = lawResults(band, STAGE);
        const [figures] = bandFigures(resolveBoard(project));
        expect(Math.abs(figures.boost.frequency! / laws.f0 - 1)).toBeLessThan(1e-8);
        expect(Math.abs(figures.boost.peak - 20 * Math.log10(laws.G))).toBeLessThan(1e-8);
        expect(Math.abs(nodalGain(netlistOf(project), [laws.f0])[0] - 20 * Math.log10(laws.G))).toBeLessThan(1e-8);
        // And no frequency near it is higher.
        const [below, above] = nodalGain(netlistOf(project), [laws.f0 * 0.99, laws.f0 * 1.01]);
        expect(Math.max(below, above)).toBeLessThan(figures.boost.peak);
      }),
      runs(60),
    );
  });

  test("a gyrator section tends to its laws as gyratorR outgrows seriesR, in proportion", () => {
    const apart = [1e3, 1e4, 1e5].map((ratio) => {
      const [seriesR, f0, q] = [470, 1000, 1.7];
      const gyratorR = ratio * seriesR;
      const inductance = (q * seriesR) / (2 * Math.PI * f0);
      const band = bandOf("g", "gyrator-section", { seriesC: 1 / ((2 * Math.PI * f0) ** 2 * inductance), seriesR, gyratorC: inductance / (seriesR * gyratorR), gyratorR });
      const laws = lawResults(band, STAGE);
      const [figures] = bandFigures(resolveBoard(oneBus([boost(band)], stiff)));
      return { gain: Math.abs(figures.boost.peak - 20 * Math.log10(laws.G)), frequency: Math.abs(figures.boost.frequency! / laws.f0 - 1) };
    });
    expect(apart[2].gain).toBeLessThan(1e-3);
    expect(apart[2].frequency).toBeLessThan(1e-4);
    for (const key of ["gain", "frequency"] as const) {
      expect(apart[0][key] / apart[1][key]).toBeGreaterThan(8);
      expect(apart[1][key] / apart[2][key]).toBeGreaterThan(8);
    }
  });

  test.each([
    ["a high shelf far above its corner", boost(BANDS.shelf), 33862.8 * 1e5],
    ["a low shelf far below its corner, above its blocking capacitor's", boost(bandOf("l", "low-shelf-section", { seriesR: 1000, gyratorC: 47e-9, gyratorR: 1e9 })), 1e-9],
    ["a level at any frequency", boost(bandOf("v", "level-section", { seriesR: 680 })), 1000],
  ])("%s has the gain G", (_about, band, frequency) => {
    const gain = nodalGain(netlistOf(oneBus([band], stiff)), [frequency])[0];
    expect(Math.abs(gain - 20 * Math.log10(lawResults(band, STAGE).G))).toBeLessThan(1e-6);
  });

  test("a shelf's leg stands at 45 degrees at its corner", () => {
    const { fc: corner } = lawResults(BANDS.shelf, STAGE);
    expect(2 * Math.PI * corner * 10e-9 * 470).toBeCloseTo(1, 12);
    // |1 + Rf/(R·(1 − j))| of the lone leg at full boost.
    const wanted = Math.hypot(1 + 3300 / 470 / 2, 3300 / 470 / 2);
    expect(nodalGain(netlistOf(oneBus([boost(BANDS.shelf)], stiff)), [corner])[0]).toBeCloseTo(20 * Math.log10(wanted), 6);
  });
});

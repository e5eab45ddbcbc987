import * as fc from "fast-check";
import { BAND_KINDS, BLOCKS } from "../../core/blocks/index.ts";
import type { BlockKind } from "../../core/blocks/kinds.ts";
import { BUILT_IN_OP_AMPS } from "../../core/model/op-amps.ts";
import type { Block, OpAmpModel, Part, Project, SingleSupply, Slider, SplitSupply, Wire } from "../../core/model/project.ts";

export const SPLIT: SplitSupply = { kind: "split", positive: 15, negative: 15 };

/** The op amp that the ten-band figures were worked out with. */
export const TABLE_OP_AMP: OpAmpModel = { openLoopGain: 1e5, gainBandwidth: 1e7, inputR: 3e5, outputR: 50 };

/** A project about its blocks and wires. */
export function projectOf(blocks: readonly Block[], wires: readonly Wire[], more: Partial<Project> = {}): Project {
  return { format: "bandwright-project", version: 1, name: "Test board", supply: SPLIT, blocks, wires, ...more };
}

export interface BusOpts {
  readonly opAmp?: string;
  readonly opAmps?: Readonly<Record<string, OpAmpModel>>;
  readonly inputR?: number;
  readonly feedbackR?: number;
  readonly sourceR?: number;
  readonly outputSeriesR?: number;
  readonly loadR?: number;
}

/** One stage with bands between a plain input and output. Defaults: ideal op amp, 3 kΩ, 10 mΩ at either end (−9e-8 dB), a load of 1 MΩ. */
export function oneBus(bands: readonly Block[], opts: BusOpts = {}): Project {
  const { opAmp = "ideal", opAmps, inputR = 3000, feedbackR = 3000, sourceR = 0.01, outputSeriesR = 0.01, loadR = 1e6 } = opts;
  const blocks: Block[] = [
    { id: "in", kind: "input", parts: { sourceR: { value: sourceR } } },
    { id: "eq", kind: "boost-cut-stage", opAmp, parts: { inputR: { value: inputR }, feedbackR: { value: feedbackR } } },
    ...bands,
    { id: "out", kind: "output", parts: { seriesR: { value: outputSeriesR }, loadR: { value: loadR } } },
  ];
  const wires = [{ from: "in.out", to: "eq.in" }, ...bands.map((band) => ({ from: "eq.bus", to: `${band.id}.bus` })), { from: "eq.out", to: "out.in" }];
  return projectOf(blocks, wires, opAmps ? { opAmps } : {});
}

/** A band from plain values; track 10 kΩ, endR 0, centred unless said otherwise. */
export function bandOf(id: string, kind: BlockKind, values: Readonly<Record<string, number | Part>>, opts: { readonly opAmp?: string; readonly slider?: Partial<Slider> } = {}): Block {
  const parts = Object.fromEntries(Object.entries(values).map(([role, value]) => [role, typeof value === "number" ? { value } : value]));
  const slider: Slider = { track: { value: 10e3 }, position: 0.5, ...opts.slider };
  return { id, kind, slider, parts, ...(BLOCKS[kind].hasOpAmp ? { opAmp: opts.opAmp ?? "ideal" } : {}) };
}

/** Ten-band octave table, Audio/Radio Handbook, National Semiconductor, 1980, from memory: nominal Hz, gyratorC, seriesC, gyratorR, seriesR. */
export const TEN_BANDS: readonly (readonly [nominal: number, gyratorC: number, seriesC: number, gyratorR: number, seriesR: number])[] = [
  [32, 0.12e-6, 4.7e-6, 75e3, 560],
  [64, 0.056e-6, 3.3e-6, 68e3, 510],
  [125, 0.033e-6, 1.5e-6, 62e3, 510],
  [250, 0.015e-6, 0.82e-6, 68e3, 470],
  [500, 8200e-12, 0.39e-6, 62e3, 470],
  [1000, 3900e-12, 0.22e-6, 68e3, 470],
  [2000, 2000e-12, 0.1e-6, 68e3, 470],
  [4000, 1100e-12, 0.056e-6, 62e3, 470],
  [8000, 510e-12, 0.022e-6, 68e3, 510],
  [16000, 330e-12, 0.012e-6, 51e3, 510],
];

/** The ten-band board: 3 kΩ stage resistors, 10 kΩ tracks, endR 0, real op amps, all sliders centred. */
export function tenBandBoard(opAmp = "table"): Project {
  const bands = TEN_BANDS.map(([nominal, gyratorC, seriesC, gyratorR, seriesR]) => bandOf(`b${nominal}`, "gyrator-section", { seriesC, seriesR, gyratorC, gyratorR }, { opAmp }));
  return oneBus(bands, { opAmp, opAmps: { table: TABLE_OP_AMP } });
}

/** Any number of gyrator bands with real op amps, spread evenly over 20 Hz–20 kHz on one bus; narrower the more there are. */
export function gyratorBoard(count: number): Project {
  const bands = Array.from({ length: count }, (_, index) => {
    const omega = 2 * Math.PI * 20 * 1000 ** (count === 1 ? 0.5 : index / (count - 1));
    const [seriesR, gyratorR] = [470, 68e3];
    const inductance = (0.14 * count * seriesR) / omega;
    return bandOf(`b${index + 1}`, "gyrator-section", { seriesC: 1 / (omega ** 2 * inductance), seriesR, gyratorC: inductance / (seriesR * gyratorR), gyratorR }, { opAmp: "table" });
  });
  return oneBus(bands, { opAmp: "table", opAmps: { table: TABLE_OP_AMP } });
}

const sometimes = <T>(arbitrary: fc.Arbitrary<T>): fc.Arbitrary<T | undefined> => fc.option(arbitrary, { nil: undefined });

/** A value spread evenly over its decades, four digits. */
export function logUniform(least: number, most: number): fc.Arbitrary<number> {
  return fc.integer({ min: Math.ceil(Math.log10(least) * 1000), max: Math.floor(Math.log10(most) * 1000) }).map((e) => Number((10 ** (e / 1000)).toPrecision(4)));
}

/** Practical decades of every role. */
const RANGES: Readonly<Record<string, readonly [number, number]>> = {
  sourceR: [1, 10e3], loadR: [1e3, 1e6], couplingC: [100e-9, 100e-6], inputR: [500, 100e3], feedbackR: [500, 100e3], feedbackC: [1e-12, 10e-9],
  seriesC: [1e-9, 10e-6], seriesR: [47, 10e3], gyratorC: [100e-12, 1e-6], gyratorR: [4.7e3, 470e3], blockingC: [1e-6, 470e-6], inductor: [1e-3, 5],
};

function partArbitrary(role: string): fc.Arbitrary<Part> {
  const value = logUniform(...RANGES[role]);
  if (role !== "inductor") return value.map((v) => ({ value: v }));
  return fc.record({ value, windingR: fc.option(fc.oneof(fc.constant(0), logUniform(1, 1e3))), selfC: fc.option(fc.oneof(fc.constant(0), logUniform(1e-12, 1e-9))) }).map(
    ({ windingR, selfC, ...part }) => ({ ...part, ...(windingR === null ? {} : { windingR }), ...(selfC === null ? {} : { selfC }) }),
  );
}

/** Parts of a kind, optional ones sometimes absent. */
export function partsArbitrary(kind: BlockKind): fc.Arbitrary<Record<string, Part>> {
  const entries = BLOCKS[kind].roles.map(({ role, isOptional }): [string, fc.Arbitrary<Part | undefined>] => [role, isOptional ? sometimes(partArbitrary(role)) : partArbitrary(role)]);
  return fc.record(Object.fromEntries(entries)).map((parts) => Object.fromEntries(Object.entries(parts).flatMap(([role, part]) => (part ? [[role, part]] : []))));
}

/** Both ends and the middle, or a thousandth of the travel: nearer to an end than that, only the end itself is practical. */
export const positionArbitrary = fc.oneof(fc.constantFrom(0, 0.5, 1), fc.integer({ min: 0, max: 1000 }).map((n) => n / 1000));

export const sliderArbitrary: fc.Arbitrary<Slider> = fc
  .record({
    track: logUniform(1e3, 220e3).map((value) => ({ value })),
    law: fc.option(fc.oneof(fc.constant("linear" as const), fc.record({ power: fc.integer({ min: 4, max: 40 }).map((n) => n / 10) })), { nil: undefined }),
    position: positionArbitrary,
    endR: fc.option(fc.oneof(fc.constant(0), logUniform(0.1, 100)), { nil: undefined }),
  })
  .map(({ track, law, position, endR }) => ({ track, position, ...(law === undefined ? {} : { law }), ...(endR === undefined ? {} : { endR }) }));

export const modelArbitrary: fc.Arbitrary<OpAmpModel> = fc.record({
  openLoopGain: logUniform(1e3, 1e7),
  gainBandwidth: logUniform(1e5, 1e8),
  inputR: logUniform(1e4, 1e12),
  outputR: fc.oneof(fc.constant(0), logUniform(1, 500)),
});

const HOUSE = ["house-a", "house-b"];
const opAmpName = fc.constantFrom("ideal", ...HOUSE, ...Object.keys(BUILT_IN_OP_AMPS));

const singleArbitrary: fc.Arbitrary<SingleSupply> = fc
  .record({ upperR: logUniform(1e3, 1e6), lowerR: logUniform(1e3, 1e6), bypassC: logUniform(100e-9, 1e-3), opAmp: sometimes(opAmpName) })
  .map(({ upperR, lowerR, bypassC, opAmp }) => ({
    kind: "single",
    voltage: 9,
    reference: { upperR: { value: upperR }, lowerR: { value: lowerR }, bypassC: { value: bypassC }, ...(opAmp === undefined ? {} : { opAmp }) },
  }));

/** A block of a kind with everything random that it has. */
export function blockArbitrary(kind: BlockKind, id: string): fc.Arbitrary<Block> {
  return fc.record({ parts: partsArbitrary(kind), slider: sliderArbitrary, opAmp: opAmpName }).map(({ parts, slider, opAmp }) => ({
    id, kind, parts,
    ...(BLOCKS[kind].hasSlider ? { slider } : {}),
    ...(BLOCKS[kind].hasOpAmp ? { opAmp } : {}),
  }));
}

export interface RandomBoardOpts {
  /** Bands on each bus at most. */
  readonly mostBands?: number;
  /** Stages and buffers at most. */
  readonly mostInChain?: number;
  readonly supply?: "any" | "split";
  /** Every op amp by this name. */
  readonly opAmp?: string;
  /** Leaves out what makes the chain branch. */
  readonly isStraight?: boolean;
}

/**
 * A random board: a tree of stages and buffers from the input, so that some branches lead nowhere and only load what
 * drives them, bands of all kinds on every bus, either supply, real and ideal op amps, blocks in any order.
 */
export function boardArbitrary(opts: RandomBoardOpts = {}): fc.Arbitrary<Project> {
  const { mostBands = 4, mostInChain = 5, supply = "any", opAmp, isStraight = false } = opts;
  const chainBlock = fc.record({
    isBuffer: fc.integer({ min: 0, max: 3 }).map((n) => n === 0),
    driver: fc.nat(1000),
    follows: fc.boolean(),
    stage: blockArbitrary("boost-cut-stage", "s"),
    buffer: blockArbitrary("buffer", "u"),
    bands: fc.array(fc.constantFrom(...BAND_KINDS).chain((kind) => blockArbitrary(kind, "b")), { maxLength: mostBands, size: "max" }),
  });
  return fc
    .record({
      chain: fc.array(chainBlock, { minLength: 1, maxLength: mostInChain, size: "max" }),
      input: blockArbitrary("input", "in"),
      output: blockArbitrary("output", "out"),
      end: fc.nat(1000),
      supply: supply === "split" ? fc.constant(SPLIT) : fc.oneof(fc.constant(SPLIT), singleArbitrary),
      models: fc.tuple(modelArbitrary, modelArbitrary),
      turn: fc.nat(1000),
    })
    .map(({ chain, input, output, end, supply: volts, models, turn }) => {
      const blocks: Block[] = [input];
      const wires: Wire[] = [];
      const ids = ["in"];
      chain.forEach((item, index) => {
        const id = `${item.isBuffer ? "buffer" : "stage"}${index}`;
        const driver = isStraight || item.follows ? ids.at(-1)! : ids[item.driver % ids.length];
        wires.push({ from: `${driver}.out`, to: `${id}.in` });
        ids.push(id);
        blocks.push({ ...(item.isBuffer ? item.buffer : item.stage), id });
        if (item.isBuffer) return;
        item.bands.forEach((band, place) => {
          const bandId = `${id}-b${place}`;
          blocks.push({ ...band, id: bandId });
          wires.push({ from: `${id}.bus`, to: `${bandId}.bus` });
        });
      });
      wires.push({ from: `${isStraight || end % 3 > 0 ? ids.at(-1)! : ids[end % ids.length]}.out`, to: "out.in" });
      blocks.push(output);
      const at = turn % blocks.length;
      const named = opAmp === undefined ? blocks : blocks.map((b) => (b.opAmp === undefined ? b : { ...b, opAmp }));
      return projectOf([...named.slice(at), ...named.slice(0, at)], wires, { supply: volts, opAmps: { [HOUSE[0]]: models[0], [HOUSE[1]]: models[1] } });
    });
}

/** A bus with very many bands of all kinds. */
export const crowdedBoardArbitrary: fc.Arbitrary<Project> = fc
  .array(fc.constantFrom(...BAND_KINDS).chain((kind) => blockArbitrary(kind, "b")), { minLength: 31, maxLength: 31 })
  .chain((bands) => fc.tuple(fc.constantFrom("ideal", "NE5532"), modelArbitrary, modelArbitrary).map(([opAmp, a, b]) =>
    oneBus(bands.map((band, index) => ({ ...band, id: `b${index}` })), { opAmp, opAmps: { [HOUSE[0]]: a, [HOUSE[1]]: b } })));

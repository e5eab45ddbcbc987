import { BLOCKS } from "../blocks/index.ts";
import type { Board } from "../net/board.ts";
import { blockValues, sliderPosition, sliderResistances, type ValueOpts } from "../net/values.ts";
import type { ComplexValue } from "./node-equations.ts";

/** One band in the closed form: leg admittance Y, the two parts of its track, and Y′ = Y/(1 + Y·(Ra ∥ Rb)). */
export interface IdealBand {
  readonly id: string;
  readonly label: string;
  readonly boostR: number;
  readonly cutR: number;
  readonly admittance: ComplexValue;
  readonly loaded: ComplexValue;
}

/** A stage in closed form: transfer = (1 + Zf·Σ Y′·Rb/T)/(1 + inputR·Σ Y′·Ra/T). */
export interface IdealStage {
  readonly id: string;
  readonly inputR: number;
  readonly feedbackR: number;
  /** feedbackR ∥ feedbackC at this frequency, ohms. */
  readonly feedbackZ: ComplexValue;
  readonly bands: readonly IdealBand[];
  /** Σ Y′·Rb/T and Σ Y′·Ra/T, siemens. */
  readonly boostSum: ComplexValue;
  readonly cutSum: ComplexValue;
  readonly transfer: ComplexValue;
}

/** The whole chain in closed form at one frequency: input divider, stages and output divider multiplied. */
export interface IdealTransfer {
  readonly frequency: number;
  readonly stages: readonly IdealStage[];
  readonly input: ComplexValue;
  readonly output: ComplexValue;
  readonly total: ComplexValue;
}

const complex = (re: number, im = 0): ComplexValue => ({ re, im });
const add = (a: ComplexValue, b: ComplexValue): ComplexValue => complex(a.re + b.re, a.im + b.im);
const mul = (a: ComplexValue, b: ComplexValue): ComplexValue => complex(a.re * b.re - a.im * b.im, a.re * b.im + a.im * b.re);
const scale = (a: ComplexValue, k: number): ComplexValue => complex(a.re * k, a.im * k);
const div = (a: ComplexValue, b: ComplexValue): ComplexValue => {
  const norm = b.re * b.re + b.im * b.im;
  return complex((a.re * b.re + a.im * b.im) / norm, (a.im * b.re - a.re * b.im) / norm);
};
const ONE = complex(1);

/**
 * The response in closed form with ideal op amps and a stiff signal reference (core/blocks/boost-cut-stage/README.md): what
 * the drawing says on paper, before op amps and a shared reference have their word. Values in SI units.
 */
export function idealTransfer(board: Board, frequency: number, opts: ValueOpts = {}): IdealTransfer {
  const omega = 2 * Math.PI * frequency;
  const series = (r: number, c: number | undefined): ComplexValue => complex(r, c === undefined ? 0 : -1 / (omega * c));
  /** Load that each item puts on its driver. */
  const load = board.chain.map(() => complex(0));
  const gain = board.chain.map(() => ONE);
  const stages: IdealStage[] = [];
  let input = ONE;
  let output = ONE;
  for (let i = board.chain.length - 1; i >= 0; i--) {
    const { block, driver, bands } = board.chain[i];
    const values = blockValues(block, opts);
    if (block.kind === "input") {
      const shunt = add(load[i], complex(values.loadR === undefined ? 0 : 1 / values.loadR));
      input = gain[i] = div(ONE, add(ONE, mul(series(values.sourceR, values.couplingC), shunt)));
    } else if (block.kind === "output") {
      const through = div(ONE, add(series(values.seriesR, values.couplingC), complex(values.loadR)));
      load[driver] = add(load[driver], through);
      output = gain[i] = scale(through, values.loadR);
    } else if (BLOCKS[block.kind].ports.includes("bus")) {
      const stage = idealStage(board, i, bands, omega, opts);
      stages.unshift(stage);
      gain[i] = stage.transfer;
      load[driver] = add(load[driver], div(stage.cutSum, add(ONE, scale(stage.cutSum, stage.inputR))));
    }
  }
  let total = ONE;
  for (let at = board.output; at >= 0; at = board.chain[at].driver) total = mul(total, gain[at]);
  return { frequency, stages, input, output, total };
}

function idealStage(board: Board, index: number, hung: Board["chain"][number]["bands"], omega: number, opts: ValueOpts): IdealStage {
  const { block } = board.chain[index];
  const values = blockValues(block, opts);
  const [re, im] = [new Float64Array(1), new Float64Array(1)];
  let boostSum = complex(0);
  let cutSum = complex(0);
  const bands = hung.map((band): IdealBand => {
    const { boost, cut } = sliderResistances(band.slider!, sliderPosition(band, opts), opts);
    const track = boost + cut;
    BLOCKS[band.kind].leg!(blockValues(band, opts), "ideal").admittance(new Float64Array([omega]), re, im);
    const admittance = complex(re[0], im[0]);
    const loaded = div(admittance, add(ONE, scale(admittance, (boost * cut) / track)));
    boostSum = add(boostSum, scale(loaded, cut / track));
    cutSum = add(cutSum, scale(loaded, boost / track));
    return { id: band.id, label: band.label ?? band.id, boostR: boost, cutR: cut, admittance, loaded };
  });
  const feedbackZ = div(ONE, complex(1 / values.feedbackR, omega * (values.feedbackC ?? 0)));
  const transfer = div(add(ONE, mul(feedbackZ, boostSum)), add(ONE, scale(cutSum, values.inputR)));
  return { id: block.id, inputR: values.inputR, feedbackR: values.feedbackR, feedbackZ, bands, boostSum, cutSum, transfer };
}

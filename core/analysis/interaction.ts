import { BLOCKS } from "../blocks/index.ts";
import type { Board } from "../net/board.ts";
import type { ValueOpts } from "../net/values.ts";
import { lawResults } from "./laws.ts";
import { scanOf } from "./scan.ts";

/** How the isolated boost of a band becomes its boost in circuit. All in dB; own + every share = whole. */
export interface LossAccount {
  readonly id: string;
  readonly isolatedBoost: number;
  /** The boost in circuit, other sliders centred. */
  readonly peak: number;
  /** isolatedBoost − peak. */
  readonly whole: number;
  /** What the band loses with no other band on any bus: its leg's own imperfections, the track, the stage and the ends of the chain. */
  readonly own: number;
  /** What each other band takes, largest first. */
  readonly shares: readonly { readonly id: string; readonly label: string; readonly loss: number }[];
}

/** Nodes and weights of 12-point Gauss–Legendre quadrature on 0 … 1 (Abramowitz and Stegun, table 25.4). */
const QUADRATURE: readonly (readonly [node: number, weight: number])[] = [
  [0.1252334085114689, 0.2491470458134028],
  [0.3678314989981802, 0.2334925365383548],
  [0.5873179542866175, 0.2031674267230659],
  [0.7699026741943047, 0.1600783285433462],
  [0.9041172563704749, 0.1069393259953184],
  [0.9815606342467192, 0.0471753363865118],
].flatMap(([x, w]) => [
  [(1 - x) / 2, w / 2],
  [(1 + x) / 2, w / 2],
]);

/**
 * The account of one band's loss. The rule is that of Aumann and Shapley ("Values of Non-Atomic Games", 1974): every other
 * band is brought onto the bus together, its admittance (leg and track) growing from nothing to all of it by the factor t,
 * and each is charged what its own growth takes, ∫ −∂G/∂t_i dt. No order is involved, and the charges add up to the whole
 * loss by the fundamental theorem of calculus. G is the peak over frequency, so that only the direct effect counts along
 * the way (envelope theorem); for shelves it is the gain at the plateau of the finished board.
 */
export function lossAccount(board: Board, id: string, opts: Pick<ValueOpts, "isMeasured"> = {}): LossAccount {
  const bands = board.chain.flatMap((item) => item.bands.map((band) => ({ band, laws: lawResults(band, item.block, opts) })));
  const index = bands.findIndex(({ band }) => band.id === id);
  if (index < 0) throw new RangeError(`there is no band “${id}” on a bus of this board`);
  const { band, laws } = bands[index];
  const { shape } = BLOCKS[band.kind];
  const scan = scanOf(board, bands.flatMap(({ laws: l }) => [l.f0, l.fc]), opts);
  const isolatedBoost = 20 * Math.log10(laws.G);
  const plateau = shape === "resonance" ? null : scan.shelf(index, 1, shape === "low-shelf" ? 1 : -1, isolatedBoost).plateau;
  const others = bands.map((_, i) => i).filter((i) => i !== index);
  const setOthers = (t: number): void => {
    for (const i of others) scan.weights[i] = t;
  };
  const peakAt = (): { readonly frequency: number; readonly gain: number } => {
    if (plateau !== null) return { frequency: plateau, gain: scan.gain(index, 1, plateau) };
    const { frequency, peak } = scan.resonance(index, 1, laws.f0);
    return { frequency: frequency ?? laws.f0, gain: peak };
  };
  setOthers(0);
  const alone = peakAt().gain;
  const losses = new Map(others.map((i) => [i, 0]));
  const step = 1e-3;
  for (const [t, weight] of QUADRATURE) {
    setOthers(t);
    const { frequency } = peakAt();
    for (const i of others) {
      scan.weights[i] = t + step;
      const above = scan.gain(index, 1, frequency);
      scan.weights[i] = t - step;
      const below = scan.gain(index, 1, frequency);
      scan.weights[i] = t;
      losses.set(i, losses.get(i)! - (weight * (above - below)) / (2 * step));
    }
  }
  setOthers(1);
  const peak = peakAt().gain;
  return {
    id,
    isolatedBoost,
    peak,
    whole: isolatedBoost - peak,
    own: isolatedBoost - alone,
    shares: others.map((i) => ({ id: bands[i].band.id, label: bands[i].band.label ?? bands[i].band.id, loss: losses.get(i)! })).sort((a, b) => b.loss - a.loss),
  };
}

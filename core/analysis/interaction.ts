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

/** Step of the central differences, as a fraction of t: their error is then a few 1e-8 of a share, and rounding less. */
const STEP = 2e-4;
/** Pieces whose charges miss the change of G by more than this, dB, are halved … */
const CLOSE = 2e-7;
/** … this often where G follows the peak, and where it is smooth for certain. */
const [TRACKED_HALVINGS, FIXED_HALVINGS] = [8, 40];

interface Reading {
  /** Hz. */
  readonly frequency: number;
  /** dB. */
  readonly gain: number;
}

/**
 * The account of one band's loss. The rule is that of Aumann and Shapley ("Values of Non-Atomic Games", 1974): every other
 * band is brought onto the bus together, its admittance (leg and track) growing from nothing to all of it by the factor t,
 * and each is charged what its own growth takes, ∫ −∂G/∂t_i dt. No order is involved, and the charges add up to the whole
 * loss by the fundamental theorem of calculus. G is the peak over frequency, so that only the direct effect counts along
 * the way (envelope theorem). For shelves, and for a peak that comes, goes or jumps on the way, it is the gain at one
 * frequency throughout: that of the finished board's plateau or peak.
 */
export function lossAccount(board: Board, id: string, opts: Pick<ValueOpts, "isMeasured"> = {}): LossAccount {
  const bands = board.chain.flatMap((item) => item.bands.map((band) => ({ band, laws: lawResults(band, item.block, opts) })));
  const index = bands.findIndex(({ band }) => band.id === id);
  if (index < 0) throw new RangeError(`there is no band “${id}” on a bus of this board`);
  const { band, laws } = bands[index];
  const { shape } = BLOCKS[band.kind];
  const scan = scanOf(board, bands.map(({ laws: l }) => l), opts);
  const isolatedBoost = 20 * Math.log10(laws.G);
  const others = bands.map((_, i) => i).filter((i) => i !== index);
  const setOthers = (t: number): void => {
    for (const i of others) scan.weights[i] = t;
  };
  const peak = (): Reading => {
    const { frequency, peak: gain } = scan.resonance(index, 1, laws.f0);
    return { frequency: frequency ?? laws.f0, gain };
  };
  const plateau = (): Reading => {
    const { plateau: frequency, peak: gain } = scan.shelf(index, 1, shape === "low-shelf" ? 1 : -1, laws.fc);
    return { frequency, gain };
  };
  const finished = shape === "resonance" ? peak() : plateau();
  const fixed = (): Reading => ({ frequency: finished.frequency, gain: scan.gain(index, 1, finished.frequency) });

  /** Adds up the charges between two values of t; false where they do not come to the change of G. */
  const charge = (read: () => Reading, losses: number[], halvings: number, from: number, to: number, gainFrom: number, gainTo: number): boolean => {
    const piece = others.map(() => 0);
    for (const [node, weight] of QUADRATURE) {
      const t = from + node * (to - from);
      setOthers(t);
      const { frequency } = read();
      others.forEach((i, k) => {
        scan.weights[i] = t * (1 + STEP);
        const above = scan.gain(index, 1, frequency);
        scan.weights[i] = t * (1 - STEP);
        const below = scan.gain(index, 1, frequency);
        scan.weights[i] = t;
        piece[k] -= (weight * (to - from) * (above - below)) / (2 * STEP * t);
      });
    }
    const missing = gainFrom - gainTo - piece.reduce((sum, loss) => sum + loss, 0);
    if (Math.abs(missing) <= CLOSE) {
      piece.forEach((loss, k) => (losses[k] += loss));
      return true;
    }
    if (halvings === 0) return false;
    const middle = (from + to) / 2;
    setOthers(middle);
    const { gain } = read();
    return charge(read, losses, halvings - 1, from, middle, gainFrom, gain) && charge(read, losses, halvings - 1, middle, to, gain, gainTo);
  };
  const account = (read: () => Reading, halvings: number): { readonly alone: number; readonly losses: readonly number[] } | undefined => {
    setOthers(0);
    const alone = read().gain;
    const losses = others.map(() => 0);
    return charge(read, losses, halvings, 0, 1, alone, finished.gain) ? { alone, losses } : undefined;
  };
  const settled = (shape === "resonance" ? account(peak, TRACKED_HALVINGS) : undefined) ?? account(fixed, FIXED_HALVINGS);
  if (!settled) throw new RangeError(`the losses of “${id}” do not add up: some value of the board is out of any practical range`);
  const { alone, losses } = settled;
  return {
    id,
    isolatedBoost,
    peak: finished.gain,
    whole: isolatedBoost - finished.gain,
    own: isolatedBoost - alone,
    shares: others.map((i, k) => ({ id: bands[i].band.id, label: bands[i].band.label ?? bands[i].band.id, loss: losses[k] })).sort((a, b) => b.loss - a.loss),
  };
}

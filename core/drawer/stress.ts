import { dcPoint, positiveEnd, type DcRange } from "../analysis/dc.ts";
import { largestSwings, type SwingOpts } from "../analysis/swing.ts";
import type { Board } from "../net/board.ts";

/** What a part has to bear on the board. */
export interface PartStress extends DcRange {
  /** `block.role`. */
  readonly name: string;
  /** Names of the nodes at its ends; `low` and `high` are the steady voltage from `a` to `b` over the slider settings, V. */
  readonly a: string;
  readonly b: string;
  /** The node that a positive lead belongs to; null where no steady voltage decides. */
  readonly positive: string | null;
  /** Whether the circuit settles the steady voltage; if not, it may be anything between the rails. */
  readonly isDefined: boolean;
  /** Largest signal voltage on top, V peak, with where it is reached. */
  readonly peak: number;
  readonly frequency: number;
  readonly setting: string;
  /** W at most, for resistors: (steady² + peak²/2)/R; a track's two parts together. 0 for capacitors. */
  readonly power: number;
}

export type BoardStress = ReadonlyMap<string, PartStress>;

/** What every capacitor, resistor and track of a board has to bear, by `block.role`; see `dcPoint` and `largestSwings` for the rules. */
export function boardStress(board: Board, opts: SwingOpts = {}): BoardStress {
  const bands = board.chain.flatMap((item) => item.bands.map((b) => b.id));
  const everyAt = (position: number) => ({ ...opts, positions: Object.fromEntries(bands.map((id) => [id, position])) });
  // Steady voltages move with the sliders where a leg passes direct current.
  const points = [dcPoint(board, everyAt(0.5)), dcPoint(board, opts), dcPoint(board, everyAt(0)), dcPoint(board, everyAt(1))];
  const found = new Map<string, PartStress>();
  for (const swing of largestSwings(board, opts)) {
    const same = points.flatMap((point) => point.parts.filter((p) => p.source === swing.source && p.detail === swing.detail));
    const [part] = same;
    const low = Math.min(...same.map((p) => p.low));
    const high = Math.max(...same.map((p) => p.high));
    const steady = Math.max(Math.abs(low), Math.abs(high));
    const power = part.type === "resistor" ? (steady ** 2 + swing.peak ** 2 / 2) / part.value : 0;
    const other = found.get(swing.source);
    found.set(swing.source, {
      name: swing.source, a: part.a, b: part.b, low, high, positive: positiveEnd({ a: part.a, b: part.b, low, high }), isDefined: same.every((p) => p.low === p.high),
      peak: swing.peak, frequency: swing.frequency, setting: swing.setting, power: power + (other?.power ?? 0),
    });
  }
  return found;
}

/**
 * How far the voltage of a polarised capacitor may turn round, whichever is less of the volts and the part of its rating:
 * `always` is let pass, `onPeaks` is what the loudest signal may do with a caution. A steady voltage beyond `always`, and
 * peaks beyond `onPeaks`, bar it.
 */
export const MOST_REVERSE = { always: 0.5, onPeaks: 2, ofRating: 0.1 } as const;

/** Below this much spare voltage or power, as part of the rating, a part is held to be close to its limit. */
const LEAST_SPARE = 0.2;

/** What stands beside every result of the checks of voltage, polarity and heat. */
export const RATING_CAUTION = "Worked out for the board as drawn, at rest and just short of clipping. Switching on, faults and the maker's own rules can ask for more: good practice and the maker's sheet decide.";

export interface Problem {
  /** A fault bars the part from this place; a caution is for a person to weigh; a note says what is not known and weighs nothing. */
  readonly level: "fault" | "caution" | "note";
  readonly about: "rating" | "polarity" | "power" | "stock" | "model" | "kind" | "value" | "taper" | "winding";
  readonly message: string;
}

const volts = (v: number): string => `${Number(Math.abs(v).toPrecision(3))} V`;

/** Whether the caution belongs beside these. */
export function needsRatingCaution(problems: readonly Problem[]): boolean {
  return problems.some(({ about }) => about === "rating" || about === "polarity" || about === "power");
}

/** Voltage against rating. */
export function ratingProblems(rating: number | null, stress: PartStress): Problem[] {
  const steady = Math.max(Math.abs(stress.low), Math.abs(stress.high));
  const needed = steady + stress.peak;
  const sum = `it bears ${stress.isDefined ? volts(steady) : `up to ${volts(steady)}, since no resistor settles it,`} steady and ${volts(stress.peak)} of signal`;
  if (rating === null) return needed < 1 ? [] : [{ level: "caution", about: "rating", message: `its voltage rating is not known: ${sum}` }];
  if (needed > rating) return [{ level: "fault", about: "rating", message: `rated ${volts(rating)}, but ${sum}` }];
  if (needed > rating * (1 - LEAST_SPARE)) return [{ level: "caution", about: "rating", message: `rated ${volts(rating)}, and ${sum}: little is left` }];
  return [];
}

/** Which way round a polarised capacitor goes, and whether it stays so. */
export function polarityProblems(rating: number | null, stress: PartStress): Problem[] {
  const ofRating = rating === null ? Infinity : MOST_REVERSE.ofRating * rating;
  const allowed = Math.min(MOST_REVERSE.always, ofRating);
  const steadyReverse = Math.min(Math.max(0, -stress.low), Math.max(0, stress.high));
  if (steadyReverse > allowed) return [{ level: "fault", about: "polarity", message: `polarised, and its steady voltage may be ${volts(steadyReverse)} either way round` }];
  const kept = stress.positive === null ? 0 : Math.min(Math.abs(stress.low), Math.abs(stress.high));
  const reverse = stress.peak - kept;
  const way = stress.positive === null ? "no steady voltage says which way round it goes" : `+ to ${stress.positive}`;
  if (reverse > allowed) return [{ level: reverse > Math.min(MOST_REVERSE.onPeaks, ofRating) ? "fault" : "caution", about: "polarity", message: `polarised, ${way}, and the loudest signal turns its voltage round by up to ${volts(reverse)}: a bipolar one would not mind` }];
  return [];
}

/** Power against rating. */
export function powerProblems(rating: number | null, stress: PartStress): Problem[] {
  if (rating === null) return [];
  const milliwatts = (w: number): string => `${Number((w * 1e3).toPrecision(2))} mW`;
  if (stress.power > rating) return [{ level: "fault", about: "power", message: `rated ${milliwatts(rating)}, but it turns ${milliwatts(stress.power)} into heat` }];
  if (stress.power > rating * (1 - LEAST_SPARE)) return [{ level: "caution", about: "power", message: `rated ${milliwatts(rating)}, and it turns ${milliwatts(stress.power)} into heat: little is left` }];
  return [];
}

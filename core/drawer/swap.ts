import { endFigure, type BandPeak } from "../analysis/bands.ts";
import { lawResults } from "../analysis/laws.ts";
import { angular, decibels, logFrequencies } from "../analysis/response.ts";
import { Scan } from "../analysis/scan.ts";
import { instability } from "../analysis/summary.ts";
import type { Patch } from "../model/patch.ts";
import type { Block } from "../model/project.ts";
import type { Board } from "../net/board.ts";
import { Sweep, type CompiledBoard } from "../net/star.ts";
import { transferColumns } from "../net/transfer.ts";
import type { ValueOpts } from "../net/values.ts";
import { candidatesFor, compareText, type Candidate, type CandidateOpts } from "./candidates.ts";
import { hasFault } from "./place-problems.ts";
import { filledBlock, filledProject, fillingPatch, onProject, partsElsewhere, type BoardRole } from "./roles.ts";
import { boardStress, type PartStress, type Problem } from "./stress.ts";
import type { StockedLine } from "./stock.ts";
import { requireFinite, TrialBoard } from "./trial.ts";

/** What a candidate does to one band at full boost, the others centred, against the part that is there. Null where the band has no such figure. */
export interface BandChange {
  readonly band: string;
  /** Of the in-circuit peak, dB. */
  readonly peak: number;
  /** Of the centre (or a shelf's corner), as a fraction. */
  readonly centre: number | null;
  /** Of Q, as a fraction. */
  readonly q: number | null;
}

export interface RankedCandidate extends Candidate {
  /** Its band's change; for a part that all bands share, the worst of each figure, with the band whose peak changes most. */
  readonly change: BandChange;
  /** Every band's change, where the part is not one band's own. */
  readonly changes: readonly BandChange[];
  /** Largest change of the response from 20 Hz to 20 kHz, dB without sign: sliders as they stand. */
  readonly asItStands: number;
  /** The same with the band at full boost and the other sliders as they stand; for a shared part, of the worst band. */
  readonly atFullBoost: number;
  /** The larger of the two: what the list goes by. */
  readonly worst: number;
  /** Whether it is the line in the role already. */
  readonly isInPlace: boolean;
  /** Puts it into the project. */
  readonly patch: Patch;
}

export interface SwapOpts extends CandidateOpts {
  /** Slider positions for this run by band id. */
  readonly positions?: Readonly<Record<string, number>>;
  /** Take the other parts' measured values where they have one. */
  readonly isMeasured?: boolean;
}

export interface Swap {
  readonly role: BoardRole;
  /** Of each band that the role can move, with the part that is there. */
  readonly before: readonly { readonly band: string; readonly boost: BandPeak }[];
  /** What a part here has to bear; null where that was not worked out. */
  readonly stress: PartStress | null;
  /** Best first: those that nothing bars, then by what they do to the response, cost and id. */
  readonly candidates: readonly RankedCandidate[];
}

/** 20 Hz to 20 kHz, twelve points an octave. */
const POINTS = 121;

/**
 * Candidates for a role, ranked by what they do to the whole board, which is simulated with each. Ratings and polarity
 * are checked unless `stress` is given (which saves working it out again) or the role bears no voltage to speak of.
 * @throws RangeError where the board has no finite response
 */
export function rankSwaps(board: Board, role: BoardRole, lines: readonly StockedLine[], opts: SwapOpts = {}): Swap {
  const values: ValueOpts = { ...(opts.positions ? { positions: opts.positions } : {}), isMeasured: opts.isMeasured ?? false };
  const stress = opts.stress ?? (role.kind === "op-amp" || role.kind === "inductor" ? undefined : boardStress(board, values));
  const elsewhere = partsElsewhere(board, role);
  const trial = new TrialBoard(board, values);
  const compare = new Comparison(board, role, trial.compiled, values);
  const candidates = candidatesFor(board.project, role, lines, { elsewhere, ...opts, stress }).map((candidate): RankedCandidate => {
    const filling = [{ role, filling: candidate.filling }];
    const patch = fillingPatch(board.project, filling);
    const isInPlace = candidate.joined === null && role.part?.second === undefined && candidate.lines[0].id === role.stock;
    if (candidate.problems.some((p) => p.about === "model" && p.level === "fault")) {
      return { ...candidate, change: NO_CHANGE, changes: [], asItStands: 0, atFullBoost: 0, worst: 0, isInPlace, patch };
    }
    const compiled = trial.with(role, candidate.filling);
    const problems = role.kind === "op-amp" ? [...candidate.problems, ...loopProblems(board, role, candidate, values)] : candidate.problems;
    return { ...candidate, problems, ...compare.with(compiled, (block) => (block.id === role.block ? filledBlock(block, role.role, candidate.filling) : block)), isInPlace, patch };
  });
  return { role, before: compare.before, stress: stress?.get(role.name) ?? null, candidates: candidates.toSorted(byEffect) };
}

const NO_CHANGE: BandChange = { band: "", peak: 0, centre: null, q: null };

/** Effects closer than this, dB, are one to the ear and the meter: cost decides. */
const SAME_EFFECT = 1e-4;

function byEffect(a: RankedCandidate, b: RankedCandidate): number {
  const [barred, near] = [Number(hasFault(a)) - Number(hasFault(b)), Math.round(a.worst / SAME_EFFECT) - Math.round(b.worst / SAME_EFFECT)];
  return barred || near || a.problems.length - b.problems.length || (a.cost?.amount ?? Infinity) - (b.cost?.amount ?? Infinity) || compareText(a.lines.map((l) => l.id).join(), b.lines.map((l) => l.id).join());
}

function loopProblems(board: Board, role: BoardRole, candidate: Candidate, values: ValueOpts): Problem[] {
  const other = filledProject(board.project, [{ role, filling: candidate.filling }]);
  const trouble = instability(onProject(board, other), values);
  if (trouble === null) return [];
  if (trouble.is === "unstable") return [{ level: "fault", about: "model", message: "the board oscillates with it" }];
  return [{ level: "caution", about: "model", message: `whether the board oscillates with it is not known: ${trouble.text}` }];
}

/** Holds a board against versions of itself. */
class Comparison {
  readonly before: readonly { readonly band: string; readonly boost: BandPeak }[];
  readonly #values: ValueOpts;
  /** The bands that the role can move: index and block, with the stage. */
  readonly #bands: readonly { readonly index: number; readonly band: Block; readonly stage: Block; readonly scan: Scan }[];
  readonly #sweep: Sweep;
  readonly #columns = transferColumns(POINTS, false);
  readonly #settings: readonly Float64Array[];
  readonly #gains: readonly Float64Array[];

  constructor(board: Board, role: BoardRole, compiled: CompiledBoard, values: ValueOpts) {
    this.#values = values;
    const all = board.chain.flatMap((item) => item.bands.map((band) => ({ band, stage: item.block }))).map((b, index) => ({ ...b, index }));
    this.#bands = all.filter((b) => role.band === null || b.band.id === role.band).map((b) => ({ ...b, scan: scanNear(compiled, lawResults(b.band, b.stage, values)) }));
    this.#sweep = new Sweep(compiled, angular(logFrequencies(20, 20_000, POINTS)));
    this.#settings = [compiled.positions, ...this.#bands.map(({ index }) => compiled.positions.with(index, 1))];
    this.#gains = this.#settings.map((positions) => this.#gain(positions));
    for (const gains of this.#gains) requireFinite(gains);
    this.before = this.#bands.map(({ band, stage, index, scan }) => ({ band: band.id, boost: endFigure(scan, index, band, lawResults(band, stage, values), 1) }));
  }

  #gain(positions: Float64Array): Float64Array {
    this.#sweep.run(positions, this.#columns);
    const { re, im } = this.#columns;
    return re.map((r, i) => decibels(r, im[i]));
  }

  /** @param changed gives the version's block for one of the board's */
  with(compiled: CompiledBoard, changed: (block: Block) => Block): Pick<RankedCandidate, "change" | "changes" | "asItStands" | "atFullBoost" | "worst"> {
    this.#sweep.replace(compiled);
    const departures = this.#settings.map((positions, s) => {
      const gain = this.#gain(positions);
      let most = 0;
      for (const [i, g] of gain.entries()) most = Math.max(most, Math.abs(g - this.#gains[s][i]));
      return most;
    });
    const changes = this.#bands.map(({ band, stage, index, scan }, place): BandChange => {
      scan.replace(compiled);
      const [now, then] = [endFigure(scan, index, changed(band), lawResults(changed(band), changed(stage), this.#values), 1), this.before[place].boost];
      return { band: band.id, peak: now.peak - then.peak, centre: ratio(now.frequency, then.frequency), q: ratio(now.q, then.q) };
    });
    const atFullBoost = Math.max(0, ...departures.slice(1));
    const asItStands = departures[0];
    return { change: worstChange(changes), changes: changes.length > 1 ? changes : [], asItStands, atFullBoost, worst: Math.max(asItStands, atFullBoost) };
  }
}

/** A scan about one band, sparser and narrower than that of the band figures: the same figures, found faster. */
function scanNear(compiled: CompiledBoard, laws: Readonly<Record<string, number>>): Scan {
  if (laws.f0 !== undefined) return new Scan(compiled, laws.f0 / 8, laws.f0 * 8, 12);
  return laws.fc === undefined ? new Scan(compiled, 1, 131_072, 6) : new Scan(compiled, laws.fc / 64, laws.fc * 64, 8);
}

function ratio(now: number | null, then: number | null): number | null {
  return now === null || then === null ? null : now / then - 1;
}

function worstChange(changes: readonly BandChange[]): BandChange {
  if (changes.length === 0) return NO_CHANGE;
  const larger = (a: number | null, b: number | null): number | null => (a === null ? b : b === null || Math.abs(a) >= Math.abs(b) ? a : b);
  return changes.reduce((worst, next) => ({
    band: Math.abs(next.peak) > Math.abs(worst.peak) ? next.band : worst.band,
    peak: larger(worst.peak, next.peak)!, centre: larger(worst.centre, next.centre), q: larger(worst.q, next.q),
  }));
}

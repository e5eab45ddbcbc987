import { angular, decibels, logFrequencies } from "../analysis/response.ts";
import type { Block, Project } from "../model/project.ts";
import type { Board } from "../net/board.ts";
import { compileBoard, recompileBlock, recompileReference, Sweep, type CompiledBoard } from "../net/star.ts";
import { transferColumns, type TransferColumns } from "../net/transfer.ts";
import type { ValueOpts } from "../net/values.ts";
import { DIVIDER, filledBlock, filledProject, type BoardRole, type Filling } from "./roles.ts";

/**
 * A board on which parts are tried: holds its blocks as they stand in the trial and its compiled form, and recompiles
 * only the block in which something changes.
 */
export class TrialBoard {
  readonly board: Board;
  readonly #opts: ValueOpts;
  readonly #blocks: Map<string, Block>;
  #project: Project;
  #compiled: CompiledBoard;

  constructor(board: Board, opts: ValueOpts = {}) {
    this.board = board;
    this.#opts = opts;
    this.#project = board.project;
    this.#blocks = new Map(board.project.blocks.map((b) => [b.id, b]));
    this.#compiled = compileBoard(board, opts);
  }

  get compiled(): CompiledBoard {
    return this.#compiled;
  }

  /** The board with something else in one role, for a look: the trial itself stays. */
  with(role: Pick<BoardRole, "block" | "role">, filling: Filling): CompiledBoard {
    if (role.block === DIVIDER) return recompileReference(this.#compiled, filledProject(this.#project, [{ role, filling }]), this.#opts);
    return recompileBlock(this.#compiled, this.board, filledBlock(this.#blocks.get(role.block)!, role.role, filling), this.#opts);
  }

  /** Puts something into a role for good. */
  put(role: Pick<BoardRole, "block" | "role">, filling: Filling): void {
    this.#compiled = this.with(role, filling);
    if (role.block === DIVIDER) this.#project = filledProject(this.#project, [{ role, filling }]);
    else this.#blocks.set(role.block, filledBlock(this.#blocks.get(role.block)!, role.role, filling));
  }
}

/** @throws RangeError where a response is not finite: then nothing can be compared with it */
export function requireFinite(gains: Float64Array): void {
  if (!gains.every(Number.isFinite)) throw new RangeError("there is no finite response to compare with: some value of the board is out of any practical range");
}

/** 20 Hz to 20 kHz, six points an octave. */
const POINTS = 61;

/**
 * How far a board is from what it should do. Settings: the sliders as they stand, and each band alone at full boost with
 * the others centred. The error is the mean over 20 Hz–20 kHz (61 points, evenly over log frequency) of the squared
 * difference in dB: that of the board as it stands, plus the mean over the bands' full-boost responses. Its root is
 * reported in dB.
 */
export class ResponseError {
  readonly #sweep: Sweep;
  readonly #columns: TransferColumns;
  readonly settings: readonly Float64Array[];
  readonly weights: readonly number[];
  readonly target: Float64Array;
  readonly #gains: Float64Array;

  /** @param target the board that is aimed at @throws RangeError where it has no finite response */
  constructor(target: CompiledBoard) {
    this.#sweep = new Sweep(target, angular(logFrequencies(20, 20_000, POINTS)));
    this.#columns = transferColumns(POINTS, false);
    const bands = target.bands.length;
    const alone = target.bands.map((_, i) => new Float64Array(bands).fill(0.5).fill(1, i, i + 1));
    this.settings = [target.positions, ...alone];
    this.weights = this.settings.map((_, i) => (i === 0 ? 1 : 1 / bands));
    this.#gains = new Float64Array(this.settings.length * POINTS);
    this.target = this.gains(target).slice();
    requireFinite(this.target);
  }

  /** Gains at every setting, one after the other, dB; overwritten by the next call. */
  gains(compiled: CompiledBoard): Float64Array {
    this.#sweep.replace(compiled);
    const { re, im } = this.#columns;
    let at = 0;
    for (const positions of this.settings) {
      this.#sweep.run(positions, this.#columns);
      for (let k = 0; k < POINTS; k++) this.#gains[at++] = decibels(re[k], im[k]);
    }
    return this.#gains;
  }

  /** The weighted mean square, dB². */
  of(compiled: CompiledBoard): number {
    const gains = this.gains(compiled);
    let sum = 0;
    for (let s = 0, at = 0; s < this.settings.length; s++) {
      let own = 0;
      for (let k = 0; k < POINTS; k++, at++) own += (gains[at] - this.target[at]) ** 2;
      sum += (this.weights[s] * own) / POINTS;
    }
    return sum;
  }

  /** What one value does: √weight·dB for a small relative change, so that the error of many is |Σ column·δ|². */
  slope(base: Float64Array, compiled: CompiledBoard, change: number): Float64Array {
    const gains = this.gains(compiled);
    const column = new Float64Array(gains.length);
    for (let at = 0; at < gains.length; at++) column[at] = ((gains[at] - base[at]) / change) * Math.sqrt(this.weights[Math.floor(at / POINTS)] / POINTS);
    return column;
  }
}

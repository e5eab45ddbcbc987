import type { Patch } from "../model/patch.ts";
import type { Part, Project } from "../model/project.ts";
import type { Board } from "../net/board.ts";
import { compileBoard } from "../net/star.ts";
import { assign } from "../num/assignment.ts";
import { randomFrom, randomOrder } from "../num/random.ts";
import { compareText } from "./candidates.ts";
import { boardRoles, filledProject, fillingPatch, type BoardRole } from "./roles.ts";
import type { StockPiece } from "./stock.ts";
import { ResponseError, TrialBoard } from "./trial.ts";

export interface MatchOpts {
  readonly positions?: Readonly<Record<string, number>>;
  /** Deals to compare with; 200 by default. */
  readonly deals?: number;
  readonly seed?: number;
  /** A piece further than this from its role's value, as a fraction, is not dealt to it; 0.5 by default. */
  readonly window?: number;
}

export interface MatchedPiece {
  readonly role: BoardRole;
  readonly piece: StockPiece;
  /** piece/value − 1. */
  readonly deviation: number;
}

export interface MatchResult {
  readonly project: Project;
  readonly patch: Patch;
  readonly matched: readonly MatchedPiece[];
  /** Roles that go without a measured piece, and why. */
  readonly unmatched: readonly { readonly role: BoardRole; readonly reason: string }[];
  /** Error of the response with the matched pieces against the design, dB (root of the mean square, see ResponseError). */
  readonly error: number;
  /** The same with pieces picked at random from the same lines. Null where nothing was matched. */
  readonly random: { readonly deals: number; readonly median: number; readonly best: number } | null;
}

/** Roles that share a line, and the pieces measured of it. */
interface Lot {
  readonly roles: readonly BoardRole[];
  readonly pieces: readonly StockPiece[];
}

const MOST_PASSES = 20;

/**
 * Deals measured pieces to the roles that name their line, so that the response comes nearest that of the design (every
 * part at its nominal value). First each lot for itself, all other parts nominal: the best assignment, with the squared
 * effect of a piece on the board for its cost. Then on the whole board, where one part's error can make up for another's:
 * exchanges within a lot, and pieces left over, for as long as they help. Values of pieces are written as `measured`.
 */
export function matchPieces(board: Board, pieces: readonly StockPiece[], opts: MatchOpts = {}): MatchResult {
  const { deals = 200, seed = 1, window = 0.5 } = opts;
  const values = opts.positions ? { positions: opts.positions } : {};
  const { lots, unmatched } = lotsOf(boardRoles(board), pieces);
  const target = compileBoard(board, values);
  const table = new Table(board, lots, target, values, window);
  table.dealEachLot();
  table.improve();
  const dealt = table.dealt();
  for (const role of table.without()) unmatched.push({ role, reason: `too few measured pieces of ${role.stock} are near enough` });
  const error = Math.sqrt(table.error);
  const random = dealt.length === 0 || deals < 1 ? null : table.randomDeals(deals, seed);
  const fillings = dealt.map(({ role, piece }) => ({ role, filling: { part: measuredPart(role.part!, piece) } }));
  return {
    project: filledProject(board.project, fillings), patch: fillingPatch(board.project, fillings), error, random,
    matched: dealt.map((d) => ({ ...d, deviation: d.piece.value / d.role.value! - 1 })),
    unmatched: unmatched.toSorted((a, b) => compareText(a.role.name, b.role.name)),
  };
}

function measuredPart(part: Part, piece: StockPiece): Part {
  return { ...part, measured: piece.value, piece: piece.id };
}

function lotsOf(roles: readonly BoardRole[], pieces: readonly StockPiece[]): { lots: Lot[]; unmatched: { role: BoardRole; reason: string }[] } {
  const byLine = new Map<string, StockPiece[]>();
  for (const piece of pieces) byLine.set(piece.line, [...(byLine.get(piece.line) ?? []), piece]);
  const lots = new Map<string, BoardRole[]>();
  const unmatched: { role: BoardRole; reason: string }[] = [];
  for (const role of roles) {
    if (role.kind === "op-amp") continue;
    if (role.stock === null) unmatched.push({ role, reason: "no stock line is named for it" });
    else if (role.part?.second) unmatched.push({ role, reason: "two pieces make its value: measure the pair by hand" });
    else if (!byLine.has(role.stock)) unmatched.push({ role, reason: `no piece of ${role.stock} has been measured` });
    else lots.set(role.stock, [...(lots.get(role.stock) ?? []), role]);
  }
  return { lots: [...lots].map(([id, own]) => ({ roles: own, pieces: byLine.get(id)!.toSorted((a, b) => a.value - b.value || a.id - b.id) })), unmatched };
}

/** The roles on the table with the pieces in front of them. */
class Table {
  readonly #lots: readonly Lot[];
  readonly #trial: TrialBoard;
  readonly #measure: ResponseError;
  readonly #window: number;
  /** By lot, the piece of each role; −1 for none. */
  readonly #held: number[][];
  error = 0;

  constructor(board: Board, lots: readonly Lot[], target: ReturnType<typeof compileBoard>, values: { readonly positions?: Readonly<Record<string, number>> }, window: number) {
    this.#lots = lots;
    this.#trial = new TrialBoard(board, values);
    this.#measure = new ResponseError(target);
    this.#window = window;
    this.#held = lots.map((lot) => lot.roles.map(() => -1));
  }

  #isNear(role: BoardRole, piece: StockPiece): boolean {
    return Math.abs(piece.value / role.value! - 1) <= this.#window;
  }

  /** The trial works with values: a measured piece stands in as its role's value. */
  #put(lot: number, role: number): void {
    const place = this.#lots[lot].roles[role];
    const at = this.#held[lot][role];
    const part = place.part!;
    this.#trial.put(place, { part: at < 0 ? part : { ...part, value: this.#lots[lot].pieces[at].value } });
  }

  #score(): number {
    return this.#measure.of(this.#trial.compiled);
  }

  dealEachLot(): void {
    for (const [l, { roles, pieces }] of this.#lots.entries()) {
      const cost = new Float64Array(roles.length * pieces.length);
      for (const [r, role] of roles.entries()) {
        for (const [p, piece] of pieces.entries()) {
          cost[r * pieces.length + p] = this.#isNear(role, piece) ? this.#measure.of(this.#trial.with(role, { part: { ...role.part!, value: piece.value } })) : Infinity;
        }
      }
      this.#held[l] = [...assign(cost, roles.length, pieces.length)];
    }
    this.#putAll();
  }

  #putAll(): void {
    for (const [l, lot] of this.#lots.entries()) for (const r of lot.roles.keys()) this.#put(l, r);
    this.error = this.#score();
  }

  /** Exchanges and pieces left over, on the whole board, until none helps. */
  improve(): void {
    for (let pass = 0; pass < MOST_PASSES; pass++) {
      let hasImproved = false;
      for (const [l, { roles, pieces }] of this.#lots.entries()) {
        for (const r of roles.keys()) {
          for (const p of pieces.keys()) if (this.#attempt(l, r, p)) hasImproved = true;
        }
      }
      if (!hasImproved) return;
    }
  }

  /** Gives a role another piece; whoever had it takes the role's old one in return. */
  #attempt(l: number, r: number, p: number): boolean {
    const { roles, pieces } = this.#lots[l];
    const held = this.#held[l];
    const old = held[r];
    const other = held.indexOf(p);
    // A role with a piece does not lose it to one without.
    if (old === p || old < 0 || !this.#isNear(roles[r], pieces[p]) || (other >= 0 && (other < r || !this.#isNear(roles[other], pieces[old])))) return false;
    held[r] = p;
    if (other >= 0) held[other] = old;
    this.#put(l, r);
    if (other >= 0) this.#put(l, other);
    const score = this.#score();
    if (score < this.error - 1e-12) {
      this.error = score;
      return true;
    }
    held[r] = old;
    if (other >= 0) held[other] = p;
    this.#put(l, r);
    if (other >= 0) this.#put(l, other);
    return false;
  }

  dealt(): { readonly role: BoardRole; readonly piece: StockPiece }[] {
    return this.#lots.flatMap(({ roles, pieces }, l) => roles.flatMap((role, r) => (this.#held[l][r] < 0 ? [] : [{ role, piece: pieces[this.#held[l][r]] }])));
  }

  without(): BoardRole[] {
    return this.#lots.flatMap(({ roles }, l) => roles.filter((_, r) => this.#held[l][r] < 0));
  }

  /** What picking blindly from the same lots gives, seeded; leaves the table changed. */
  randomDeals(deals: number, seed: number): { readonly deals: number; readonly median: number; readonly best: number } {
    const random = randomFrom(seed);
    const errors = Float64Array.from({ length: deals }, () => {
      for (const [l, { roles, pieces }] of this.#lots.entries()) {
        const order = randomOrder(pieces.length, random);
        // The same roles get pieces as in the match, from all that are measured.
        let next = 0;
        this.#held[l] = roles.map((_, r) => (this.#held[l][r] < 0 ? -1 : order[next++]));
      }
      this.#putAll();
      return Math.sqrt(this.error);
    }).sort();
    const middle = deals >> 1;
    return { deals, median: deals % 2 === 1 ? errors[middle] : (errors[middle - 1] + errors[middle]) / 2, best: errors[0] };
  }
}

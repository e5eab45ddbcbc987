import type { CompiledBoard } from "../net/star.ts";
import type { Candidate } from "./candidates.ts";
import type { BoardRole, Filling } from "./roles.ts";
import { ResponseError, TrialBoard } from "./trial.ts";

/** A role with what may go into it. */
export interface OpenRole {
  readonly role: BoardRole;
  readonly candidates: readonly Candidate[];
}

export interface SearchOpts {
  /** Most of all roles together, in the candidates' currency. */
  readonly ceiling?: number | undefined;
  /** Roles that a unit's share of each line can serve, by line id. */
  readonly capacity: ReadonlyMap<string, number>;
}

export interface Found {
  /** Candidate of each role; −1 where the role goes without. */
  readonly choice: readonly number[];
  /** dB². */
  readonly error: number;
  /** Whether every possibility has been tried. */
  readonly isExhaustive: boolean;
}

/** Boards with no more ways to fill them than this are searched to the last; fewer where one response takes long. */
const MOST_TRIALS = 4000;
const MOST_SLOW_TRIALS = 500;

/** dB²: leaving a role empty is worse than any response. */
const EMPTY = 1e6;
/** dB² per ln(value)²: keeps parts that hardly move the response near what was asked for. 10 % off weighs as much as 0.03 dB. */
export const NEARNESS = 0.1;
/** dB²: decides between parts that do the same to the response. Below what anyone could measure. */
const WIDER_TOLERANCE = 1e-7;
const CLASS_TWO = 1e-7;
const PER_PLACE = 1e-10;

/** Combinations of a block that are worth an exact look, and how far down a role's list they go. */
const LOOKS = 8;
const DEPTH = 7;
const MOST_PASSES = 12;

/**
 * Chooses a candidate for each role so that the error of the response is least, with NEARNESS·Σ ln(value/wanted)² on top,
 * each line serving no more roles than it has pieces for. Few possibilities: all are simulated. Many: the error is taken
 * as a quadratic form in ln(value), from one simulation a role, with what a coil's winding does on top; block by block the best combination is picked until none gets better; then exact simulation
 * decides among the nearest combinations of every block, and exchanges between blocks that want the same line are tried.
 */
export class FillSearch {
  readonly #roles: readonly OpenRole[];
  readonly #error: ResponseError;
  readonly #trial: TrialBoard;
  readonly #capacity: ReadonlyMap<string, number>;
  readonly #ceiling: number;
  readonly #original: readonly Filling[];
  readonly #delta: readonly Float64Array[];
  readonly #extra: readonly Float64Array[];
  /** dB², beside the quadratic form: what else than its value a candidate does to the response. */
  readonly #aside: readonly Float64Array[];
  readonly #cost: readonly Float64Array[];
  readonly #used = new Map<string, number>();
  #choice: number[];
  #spent = 0;
  /** Cost of a unit of money, dB², while the ceiling is sought. */
  #price = 0;

  constructor(trial: TrialBoard, target: CompiledBoard, roles: readonly OpenRole[], opts: SearchOpts) {
    this.#roles = roles;
    this.#trial = trial;
    this.#error = new ResponseError(target);
    this.#capacity = opts.capacity;
    this.#ceiling = opts.ceiling ?? Infinity;
    this.#original = roles.map(({ role }) => ({ part: role.part! }));
    this.#delta = roles.map(({ candidates }) => Float64Array.from(candidates, (c) => Math.log1p(c.deviation)));
    this.#cost = roles.map(({ candidates }) => Float64Array.from(candidates, (c) => c.cost?.amount ?? 0));
    this.#extra = roles.map(({ role, candidates }) => {
      const wanted = role.part!.tolerance ?? 1;
      const order = candidates.map((_, i) => i).toSorted((a, b) => (candidates[a].cost?.amount ?? Infinity) - (candidates[b].cost?.amount ?? Infinity) || a - b);
      return Float64Array.from(candidates, (c, i) => {
        const tolerance = c.tolerance ?? 1;
        const isClassTwo = c.lines.some((l) => /\b(X[5-8][PRST]|Y5V|Z5U)\b/i.test(l.technology));
        return NEARNESS * Math.log1p(c.deviation) ** 2 + (tolerance > wanted + 1e-12 ? WIDER_TOLERANCE * tolerance : 0) + (isClassTwo ? CLASS_TWO : 0) + PER_PLACE * order.indexOf(i);
      });
    });
    this.#aside = roles.map(({ role, candidates }) => Float64Array.from(candidates, (c) => (role.kind === "inductor" ? this.#windingError(role, c) : 0)));
    this.#choice = roles.map(() => -1);
  }

  /** What a coil's winding resistance alone does, by simulation: it is not on the axis of values. */
  #windingError(role: BoardRole, { filling }: Candidate): number {
    if (!("part" in filling) || filling.part.windingR === role.part!.windingR) return 0;
    return this.#error.of(this.#trial.with(role, { part: { ...filling.part, value: role.part!.value } }));
  }

  run(): Found {
    const ways = this.#roles.reduce((n, r) => n * (r.candidates.length + 1), 1);
    const most = this.#trial.compiled.reference ? MOST_SLOW_TRIALS : MOST_TRIALS;
    const isExhaustive = ways <= most;
    if (isExhaustive) this.#tryAll();
    else {
      const hessian = this.#hessian();
      this.#settle(hessian);
      this.#improve(hessian);
    }
    return { choice: this.#choice.slice(), error: this.#error.of(this.#trial.compiled), isExhaustive };
  }

  // ——— state ———

  #canTake(role: number, candidate: number): boolean {
    if (candidate < 0) return true;
    const { lines } = this.#roles[role].candidates[candidate];
    const need = lines.length > 1 && lines[0].id === lines[1].id ? 2 : 1;
    return lines.every(({ id }) => (this.#used.get(id) ?? 0) + need <= (this.#capacity.get(id) ?? 0));
  }

  /** Books a role's choice without putting it on the board. */
  #book(role: number, candidate: number): void {
    const old = this.#choice[role];
    if (old === candidate) return;
    const count = (index: number, by: number): void => {
      for (const { id } of this.#roles[role].candidates[index].lines) this.#used.set(id, (this.#used.get(id) ?? 0) + by);
      this.#spent += by * this.#cost[role][index];
    };
    if (old >= 0) count(old, -1);
    if (candidate >= 0) count(candidate, 1);
    this.#choice[role] = candidate;
  }

  #put(role: number): void {
    const candidate = this.#choice[role];
    this.#trial.put(this.#roles[role].role, candidate < 0 ? this.#original[role] : this.#roles[role].candidates[candidate].filling);
  }

  #isAffordable(): boolean {
    return this.#spent <= this.#ceiling * (1 + 1e-12);
  }

  /** The exact score of the choices as booked and put: error, tie-breaks and empty roles. */
  #score(): number {
    let score = this.#error.of(this.#trial.compiled);
    for (const [role, candidate] of this.#choice.entries()) score += candidate < 0 ? EMPTY : this.#extra[role][candidate];
    return score;
  }

  // ——— few possibilities ———

  #tryAll(): void {
    let best: number[] | undefined;
    let least = Infinity;
    const visit = (role: number): void => {
      if (role === this.#roles.length) {
        if (!this.#isAffordable()) return;
        const score = this.#score();
        if (score < least) [least, best] = [score, this.#choice.slice()];
        return;
      }
      for (let c = 0; c < this.#roles[role].candidates.length; c++) {
        if (!this.#canTake(role, c)) continue;
        this.#book(role, c);
        this.#put(role);
        visit(role + 1);
        this.#book(role, -1);
      }
      this.#put(role);
      visit(role + 1);
    };
    visit(0);
    this.#restore(best ?? this.#roles.map(() => -1));
  }

  #restore(choice: readonly number[]): void {
    for (const role of this.#choice.keys()) this.#book(role, -1);
    for (const [role, candidate] of choice.entries()) {
      this.#book(role, candidate);
      this.#put(role);
    }
  }

  // ——— many ———

  /** H of error ≈ δᵀ·H·δ, δ = ln(value/wanted), by one simulation a role. */
  #hessian(): Float64Array {
    const n = this.#roles.length;
    const base = this.#error.gains(this.#trial.compiled).slice();
    const step = 0.01;
    const columns = this.#roles.map(({ role }) => {
      const part = role.part!;
      return this.#error.slope(base, this.#trial.with(role, { part: { ...part, value: part.value * Math.exp(step) } }), step);
    });
    const hessian = new Float64Array(n * n);
    for (let i = 0; i < n; i++) {
      for (let j = 0; j <= i; j++) {
        let sum = 0;
        for (let k = 0; k < columns[i].length; k++) sum += columns[i][k] * columns[j][k];
        hessian[i * n + j] = hessian[j * n + i] = sum;
      }
    }
    return hessian;
  }

  #deltaOf(role: number): number {
    const candidate = this.#choice[role];
    return candidate < 0 ? 0 : this.#delta[role][candidate];
  }

  /** Roles of one block, which pull at the same bump. */
  #groups(): number[][] {
    const groups = new Map<string, number[]>();
    for (const [i, { role }] of this.#roles.entries()) groups.set(role.block, [...(groups.get(role.block) ?? []), i]);
    // Five roles and more would make too many combinations: they go in halves.
    return [...groups.values()].flatMap((g) => (g.length > 5 ? [g.slice(0, 4), g.slice(4)] : [g]));
  }

  /** The best combinations for a group by the quadratic form, the others as they are; best first. */
  #combinations(hessian: Float64Array, group: readonly number[], most: number): { readonly choice: readonly number[]; readonly score: number }[] {
    const n = this.#roles.length;
    const kept = group.map((role) => this.#choice[role]);
    for (const role of group) this.#book(role, -1);
    // Slope towards the roles outside.
    const pull = group.map((role) => {
      let sum = 0;
      for (let j = 0; j < n; j++) if (!group.includes(j)) sum += hessian[role * n + j] * this.#deltaOf(j);
      return 2 * sum;
    });
    const best: { choice: readonly number[]; score: number }[] = [];
    const picked: number[] = [];
    const visit = (depth: number, score: number): void => {
      if (depth === group.length) {
        if (best.length === most && score >= best[most - 1].score) return;
        const at = best.findIndex((b) => score < b.score);
        best.splice(at < 0 ? best.length : at, 0, { choice: picked.slice(), score });
        if (best.length > most) best.pop();
        return;
      }
      const role = group[depth];
      const count = Math.min(this.#roles[role].candidates.length, DEPTH);
      let hasTaken = false;
      const take = (candidate: number, own: number): void => {
        const delta = candidate < 0 ? 0 : this.#delta[role][candidate];
        let more = own + delta * (pull[depth] + hessian[role * n + role] * delta);
        for (let d = 0; d < depth; d++) more += 2 * hessian[role * n + group[d]] * delta * (picked[d] < 0 ? 0 : this.#delta[group[d]][picked[d]]);
        picked[depth] = candidate;
        this.#book(role, candidate);
        visit(depth + 1, score + more);
        this.#book(role, -1);
      };
      for (let c = 0, seen = 0; c < this.#roles[role].candidates.length && seen < count; c++) {
        if (!this.#canTake(role, c)) continue;
        seen++;
        hasTaken = true;
        take(c, this.#extra[role][c] + this.#aside[role][c] + this.#price * this.#cost[role][c]);
      }
      if (!hasTaken || group.length > 1) take(-1, EMPTY);
    };
    visit(0, 0);
    for (const [i, role] of group.entries()) this.#book(role, kept[i]);
    return best;
  }

  /** Settles the quadratic form, cheaper and cheaper until the ceiling is kept. */
  #settle(hessian: Float64Array): void {
    const groups = this.#groups();
    const descend = (): void => {
      for (let pass = 0; pass < MOST_PASSES; pass++) {
        let hasChanged = false;
        for (const group of groups) {
          const [best] = this.#combinations(hessian, group, 1);
          for (const [i, role] of group.entries()) {
            if (this.#choice[role] !== best.choice[i]) hasChanged = true;
          }
          for (const role of group) this.#book(role, -1);
          for (const [i, role] of group.entries()) this.#book(role, best.choice[i]);
        }
        this.#makeRoom();
        if (!hasChanged) return;
      }
    };
    descend();
    if (!this.#isAffordable()) {
      // The least price on money that keeps the ceiling, by bisection over its logarithm.
      let [low, high] = [-12, 6];
      let kept: number[] | undefined;
      for (let step = 0; step < 40; step++) {
        const middle = (low + high) / 2;
        this.#price = 10 ** middle;
        descend();
        if (this.#isAffordable()) {
          high = middle;
          kept = this.#choice.slice();
        } else low = middle;
      }
      if (kept) for (const role of this.#choice.keys()) this.#book(role, -1);
      for (const [role, candidate] of (kept ?? []).entries()) this.#book(role, candidate);
    }
    this.#restore(this.#choice.slice());
  }

  /** An empty role whose lines have all gone takes one from a role that can do with another. */
  #makeRoom(): void {
    for (const [role, chosen] of this.#choice.entries()) {
      if (chosen >= 0) continue;
      for (const [c, candidate] of this.#roles[role].candidates.entries()) {
        const { id } = candidate.lines[0];
        if (this.#canTake(role, c)) {
          this.#book(role, c);
          break;
        }
        const giver = this.#choice.findIndex((g, other) => g >= 0 && this.#roles[other].candidates[g].lines[0].id === id && this.#roles[other].candidates.some((_, o) => o !== g && this.#canTake(other, o)));
        if (giver < 0) continue;
        const old = this.#choice[giver];
        this.#book(giver, this.#roles[giver].candidates.findIndex((_, o) => o !== old && this.#canTake(giver, o)));
        this.#book(role, c);
        break;
      }
    }
  }

  /** Exact simulation: other combinations in a block, and exchanges where lines are short, until none is better. */
  #improve(hessian: Float64Array): void {
    const groups = this.#groups();
    let least = this.#score();
    for (let pass = 0; pass < MOST_PASSES; pass++) {
      let hasImproved = false;
      const attempt = (changes: readonly (readonly [role: number, candidate: number])[]): void => {
        const kept = changes.map(([role]) => this.#choice[role]);
        for (const [role] of changes) this.#book(role, -1);
        const fits = changes.every(([role, candidate]) => {
          const isThere = this.#canTake(role, candidate);
          if (isThere) this.#book(role, candidate);
          return isThere;
        });
        if (fits && this.#isAffordable()) {
          for (const [role] of changes) this.#put(role);
          const score = this.#score();
          if (score < least - 1e-12) {
            least = score;
            hasImproved = true;
            return;
          }
        }
        for (const [role] of changes) this.#book(role, -1);
        for (const [i, [role]] of changes.entries()) {
          this.#book(role, kept[i]);
          this.#put(role);
        }
      };
      for (const group of groups) for (const { choice } of this.#combinations(hessian, group, LOOKS)) {
        if (choice.some((c, i) => c !== this.#choice[group[i]])) attempt(group.map((role, i) => [role, choice[i]]));
      }
      for (const changes of this.#exchanges()) attempt(changes);
      if (!hasImproved) return;
    }
  }

  /** Two roles where one takes a line of which the other holds the last piece. */
  *#exchanges(): Generator<readonly (readonly [number, number])[]> {
    for (const [role, { candidates }] of this.#roles.entries()) {
      const nearer = candidates.slice(0, this.#choice[role] < 0 ? candidates.length : this.#choice[role]);
      for (const [c, candidate] of nearer.entries()) {
        if (this.#canTake(role, c)) continue;
        const { id } = candidate.lines[0];
        for (const [other, rest] of this.#roles.entries()) {
          const held = this.#choice[other];
          if (other === role || held < 0 || rest.candidates[held].lines[0].id !== id) continue;
          for (const [o, instead] of rest.candidates.slice(0, DEPTH).entries()) if (instead.lines[0].id !== id) yield [[role, c], [other, o]];
        }
      }
    }
  }
}

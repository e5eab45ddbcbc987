import { findOpAmp } from "../model/op-amps.ts";
import type { Project } from "../model/project.ts";
import { bestPairs, isSum, lesserShare, pairTolerance, type Joined, type Pair, type PairItem } from "./pairs.ts";
import { amplifiersIn, partFromStock, type BoardRole, type Filling } from "./roles.ts";
import { hasFault, placeProblems } from "./place-problems.ts";
import type { BoardStress, Problem } from "./stress.ts";
import { availableOf, leftAfter, unitCost, type Money, type StockedLine } from "./stock.ts";

/** A part from the drawer that could go into a role: one piece, or two joined. */
export interface Candidate {
  /** Lines taken, one piece of each (of the same one, two). */
  readonly lines: readonly StockedLine[];
  readonly joined: Joined | null;
  /** SI; null for op amps. */
  readonly value: number | null;
  /** Fraction; worst case for a pair. */
  readonly tolerance: number | null;
  /** value/wanted − 1; 0 for op amps. */
  readonly deviation: number;
  /** What a unit's role costs at the quantity of the build; a share of the package for op amps. Null where unknown. */
  readonly cost: Money | null;
  /** Stock left after this build with the candidate in its role (see `leftAfter`), of two lines the lesser. */
  readonly left: number;
  readonly problems: readonly Problem[];
  readonly filling: Filling;
}

export interface CandidateOpts {
  /** Fraction either way; 0.2 by default. */
  readonly window?: number;
  /** How many at most, nearest first; 50 by default. */
  readonly most?: number;
  /** Pairs of two pieces too. */
  readonly pairs?: boolean;
  /** Units to build, 1 by default: pieces have to be there for each. */
  readonly units?: number;
  /** Pieces of each line (of op amps, amplifiers) that the board's other roles take a unit; none by default. */
  readonly elsewhere?: ReadonlyMap<string, number>;
  /** Lines with too few free pieces too, with a fault. */
  readonly withShort?: boolean;
  /** What the part has to bear; without it, ratings are not checked. */
  readonly stress?: BoardStress | undefined;
}

/** A half that makes less of the value than this is not worth soldering in. */
const LEAST_SHARE = 0.01;

/** Tolerates rounding of values such as 4.7e-9 read from text. */
const SAME_VALUE = 1e-9;

/** Parts of the drawer for a role: right kind, within the window, pieces there that nobody has spoken for; nearest first, then cheapest, and behind those what is barred. */
export function candidatesFor(project: Project, role: BoardRole, lines: readonly StockedLine[], opts: CandidateOpts = {}): Candidate[] {
  const { most = 50, pairs = false } = opts;
  const found = role.kind === "op-amp" ? opAmpCandidates(project, lines, opts) : singleCandidates(role, lines, opts);
  if (pairs && (role.kind === "resistor" || role.kind === "capacitor")) found.push(...pairCandidates(role, role.kind, lines, most, opts));
  return found.toSorted((a, b) => Number(hasFault(a)) - Number(hasFault(b)) || byNearness(a, b)).slice(0, most);
}

function byNearness(a: Candidate, b: Candidate): number {
  const near = Math.abs(a.deviation) - Math.abs(b.deviation);
  if (Math.abs(near) > SAME_VALUE) return near;
  return a.lines.length - b.lines.length || (a.cost?.amount ?? Infinity) - (b.cost?.amount ?? Infinity) || compareText(a.lines[0].id, b.lines[0].id);
}

export function compareText(a: string, b: string): number {
  return a < b ? -1 : a > b ? 1 : 0;
}

/** Pieces (of op amps, packages) of a line that a unit takes in all, where a candidate takes so many parts of it. */
function piecesOf(line: StockedLine, parts: number, { elsewhere }: CandidateOpts): number {
  const all = parts + (elsewhere?.get(line.id) ?? 0);
  return line.kind === "op-amp" && line.type !== null ? Math.ceil(all / amplifiersIn(line.type)) : all;
}

/** Null where a price is unknown, or in another currency than that of the first line. */
function costOf(taken: readonly StockedLine[], opts: CandidateOpts): Money | null {
  const { currency } = taken[0];
  let amount = 0;
  for (const line of taken) {
    const parts = taken.filter((l) => l.id === line.id).length;
    const cost = unitCost(line, piecesOf(line, parts, opts) * (opts.units ?? 1));
    if (cost === null || line.currency !== currency) return null;
    amount += cost;
  }
  return { amount, currency };
}

function singleCandidates(role: BoardRole, lines: readonly StockedLine[], opts: CandidateOpts): Candidate[] {
  const { window = 0.2, units = 1, withShort = false } = opts;
  const wanted = role.value!;
  return lines.flatMap((line): Candidate[] => {
    if (line.kind !== role.kind || line.value === null || !(line.value > 0)) return [];
    const deviation = line.value / wanted - 1;
    const left = leftAfter(line, piecesOf(line, 1, opts), units);
    if (Math.abs(deviation) > window + SAME_VALUE || (left < 0 && !withShort)) return [];
    return [{
      lines: [line], joined: null, value: line.value, tolerance: line.tolerance, deviation, left,
      cost: costOf([line], opts),
      problems: [...stockProblems(line, left, opts), ...placeProblems(role, line, opts.stress)],
      filling: { part: partFromStock(role.part!, line.value, line.tolerance, line.id, line.windingR) },
    }];
  });
}

function pairCandidates(role: BoardRole, kind: "resistor" | "capacitor", lines: readonly StockedLine[], most: number, opts: CandidateOpts): Candidate[] {
  const { window = 0.2, units = 1 } = opts;
  const wanted = role.value!;
  const items = lines.flatMap((line) => {
    // What is barred alone is barred as a half.
    if (line.kind !== kind || line.value === null || !(line.value > 0) || placeProblems(role, line, opts.stress).some((p) => p.level === "fault")) return [];
    return [{ line, value: line.value, available: leftAfter(line, opts.elsewhere?.get(line.id) ?? 0, units) }];
  });
  return (["series", "parallel"] as const).flatMap((joined) => {
    const sums = isSum(kind, joined);
    return bestPairs(wanted, items, sums, most, units, (a, b) => lesserShare(a.value, b.value, sums) >= LEAST_SHARE).flatMap((pair): Candidate[] => {
      const deviation = pair.value / wanted - 1;
      return Math.abs(deviation) > window + SAME_VALUE ? [] : [pairCandidate(role, pair, joined, sums, deviation, opts)];
    });
  });
}

function pairCandidate(role: BoardRole, pair: Pair<PairItem & { readonly line: StockedLine }>, joined: Joined, sums: boolean, deviation: number, opts: CandidateOpts): Candidate {
  const [a, b] = [pair.first.line, pair.second.line];
  const lines = [a, b];
  const tolerance = pairTolerance(pair.first.value, pair.second.value, a.tolerance, b.tolerance, sums);
  const left = Math.min(...lines.map((line) => leftAfter(line, piecesOf(line, a.id === b.id ? 2 : 1, opts), opts.units ?? 1)));
  // Each half is held to the whole's voltage and heat: leakage shares a steady voltage out as it pleases.
  const problems = lines.flatMap((line) => placeProblems(role, line, opts.stress));
  const isNew = (p: Problem, index: number): boolean => problems.findIndex((q) => q.message === p.message) === index;
  const whole = partFromStock(role.part!, pair.value, tolerance, a.id);
  return {
    lines, joined, value: pair.value, tolerance, deviation, left, cost: costOf(lines, opts), problems: problems.filter(isNew),
    filling: { part: { ...whole, second: { stock: b.id, value: pair.second.value, joined, firstValue: pair.first.value } } },
  };
}

function opAmpCandidates(project: Project, lines: readonly StockedLine[], opts: CandidateOpts): Candidate[] {
  const { units = 1, withShort = false } = opts;
  return lines.flatMap((line): Candidate[] => {
    if (line.kind !== "op-amp" || line.type === null) return [];
    const left = leftAfter(line, piecesOf(line, 1, opts), units);
    if (left < 0 && !withShort) return [];
    const name = modelName(project, line.type);
    const cost = costOf([line], opts);
    const problems = stockProblems(line, left, opts);
    if (name === undefined) problems.push({ level: "fault", about: "model", message: `no figures are known for a ${line.type}: give the project a model of that name first` });
    return [{
      lines: [line], joined: null, value: null, tolerance: null, deviation: 0, left, problems,
      cost: cost && { ...cost, amount: cost.amount / amplifiersIn(line.type) },
      filling: { opAmp: name ?? line.type, stock: line.id },
    }];
  });
}

/** The project's name for an op-amp type, whatever the case it is written in. */
export function modelName(project: Project, type: string): string | undefined {
  return [type, type.toUpperCase(), ...Object.keys(project.opAmps ?? {}).filter((name) => name.toLowerCase() === type.toLowerCase())].find((name) => findOpAmp(project, name) !== undefined);
}

function stockProblems(line: StockedLine, left: number, opts: CandidateOpts): Problem[] {
  if (left >= 0) return [];
  const others = opts.elsewhere?.get(line.id) ?? 0;
  return [{ level: "fault", about: "stock", message: `${-left} too few of ${line.id}: ${Math.max(0, availableOf(line))} are free${others > 0 ? `, and other places of the board take it too` : ""}` }];
}

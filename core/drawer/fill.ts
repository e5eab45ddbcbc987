import { IDEAL } from "../model/op-amps.ts";
import type { Patch } from "../model/patch.ts";
import type { Project } from "../model/project.ts";
import type { Board } from "../net/board.ts";
import { compileBoard } from "../net/star.ts";
import { countLines, sumMoney } from "./bill.ts";
import { namedLines, namedProblems } from "./board-problems.ts";
import { candidatesFor, compareText, type Candidate } from "./candidates.ts";
import { FillSearch, NEARNESS, type OpenRole } from "./fill-search.ts";
import { hasFault, isSound } from "./place-problems.ts";
import { amplifiersIn, boardRoles, filledProject, fillingPatch, onProject, type BoardRole, type Filling } from "./roles.ts";
import { boardStress, type BoardStress, type Problem } from "./stress.ts";
import { availableOf, leftAfter, unitCost, type Money, type StockedLine } from "./stock.ts";
import { ResponseError, TrialBoard } from "./trial.ts";
import { whyNothing } from "./why-nothing.ts";

export interface FillOpts {
  /** Units to build; 1 by default. */
  readonly units?: number;
  /** Fraction either way of a role's value; 0.2 by default. */
  readonly window?: number;
  /** Most that the parts of a unit may cost. Parts without a price in this currency are then left out. */
  readonly ceiling?: Money;
  /** Roles that name a line of the drawer with enough pieces keep it, unless it is of another kind or value, or something bars it there. */
  readonly keep?: boolean;
  /** False: never two pieces for one value. By default, where no single piece does. */
  readonly pairs?: boolean;
  /** Only these roles, by name. */
  readonly only?: readonly string[];
  readonly positions?: Readonly<Record<string, number>>;
  readonly stress?: BoardStress;
}

export interface PlacedRole {
  readonly role: BoardRole;
  /** Null for op amps, which go by the package, and for roles that keep what they have. */
  readonly candidate: Candidate | null;
  readonly line: StockedLine;
  readonly problems: readonly Problem[];
  /** Stock left after this build; of two lines the lesser. */
  readonly left: number;
}

/** Before it is known what the other roles take. */
type Placing = Omit<PlacedRole, "left">;

export interface UnplacedRole {
  readonly role: BoardRole;
  readonly reason: string;
}

export interface FillResult {
  readonly project: Project;
  readonly patch: Patch;
  readonly placed: readonly PlacedRole[];
  readonly unplaced: readonly UnplacedRole[];
  /** Root of the mean square of ResponseError, dB, against the board as it was. */
  readonly error: number;
  /** Largest departure at any of its points and settings, dB. */
  readonly worst: number;
  /** Whether every way to fill the board has been tried. */
  readonly isExhaustive: boolean;
  /** Parts of one unit; one amount a currency. Prices at the quantity of the build. */
  readonly cost: readonly Money[];
  /** False where even the cheapest parts cost more than the ceiling. */
  readonly isWithinCeiling: boolean;
}

/**
 * Fills a board from the drawer: a line for every role, tracks and op amps too, so that the response departs least from
 * that of the board as it stands. Pieces have to be free for every unit; parts that ratings, polarity or a track's taper
 * bar are not taken; two pieces make a value where no single one does; parts with a caution come last. A coil comes with
 * the winding resistance that its line states. Roles without a line keep their value and are named with the reason. Same
 * input, same result. `lines` are as the build sees them: `freeForBuild`.
 */
export function fillBoard(board: Board, lines: readonly StockedLine[], opts: FillOpts = {}): FillResult {
  const { units = 1, ceiling } = opts;
  const values = opts.positions ? { positions: opts.positions } : {};
  const stress = opts.stress ?? boardStress(board, values);
  const roles = boardRoles(board).filter((r) => opts.only === undefined || opts.only.includes(r.name));
  const free = new Map(lines.map((l) => [l.id, Math.floor(Math.max(0, availableOf(l)) / units)]));
  const byId = new Map(lines.map((l) => [l.id, l]));
  const placed: Placing[] = [];
  const unplaced: UnplacedRole[] = [];
  const isPriced = (line: StockedLine): boolean => ceiling === undefined || (line.currency === ceiling.currency && unitCost(line, units) !== null);

  let open = roles.filter((r) => r.kind !== "op-amp");
  if (opts.keep) open = open.filter((role) => !isKept(role, byId, free, placed, stress));
  const ampsCost = placeOpAmps(roles.filter((r) => r.kind === "op-amp"), lines, { units, isPriced, placed, unplaced });
  const kept = placed.filter((p) => p.role.kind !== "op-amp").flatMap((p) => ownLines(p.role, byId) ?? []);
  const keptCost = kept.reduce((sum, line) => sum + (line.currency === ceiling?.currency ? (unitCost(line, units) ?? 0) : 0), 0);

  const trial = new TrialBoard(board, values);
  const target = compileBoard(board, values);
  const measure = new ResponseError(target);
  /** A coil is its winding too: of two that are as near in value, one may do and the other not. */
  const byResponse = (role: BoardRole, candidates: readonly Candidate[]): Candidate[] =>
    candidates
      .slice(0, MOST_COILS)
      .map((candidate) => ({ candidate, error: measure.of(trial.with(role, candidate.filling)) + NEARNESS * Math.log1p(candidate.deviation) ** 2 }))
      .toSorted((a, b) => a.error - b.error)
      .map(({ candidate }) => candidate);
  const offers = open.map((role): OpenRole => {
    const soundOf = (pairs: boolean): Candidate[] =>
      candidatesFor(board.project, role, lines, { window: opts.window ?? 0.2, units, stress, pairs, most: pairs ? MOST_PAIRS : Infinity }).filter((c) => !hasFault(c) && c.lines.every((l) => isPriced(l) && (free.get(l.id) ?? 0) > 0));
    const single = role.kind === "inductor" ? byResponse(role, soundOf(false)) : soundOf(false);
    const quiet = single.filter(isSound);
    const isNear = quiet.some((c) => Math.abs(c.deviation) <= SINGLE_ENOUGH);
    if (quiet.length > 0 && (isNear || opts.pairs === false)) return { role, candidates: quiet.slice(0, MOST_CANDIDATES) };
    // Two pieces beside single ones that are far off; a caution where neither is sound.
    const pairs = opts.pairs === false ? [] : soundOf(true).filter((c) => c.joined !== null && isSound(c));
    // Some of each: pairs are many, and all of them may want the same few pieces.
    const sound = [...pairs.slice(0, MOST_CANDIDATES - Math.min(quiet.length, MOST_CANDIDATES / 2)), ...quiet.slice(0, MOST_CANDIDATES)].slice(0, MOST_CANDIDATES);
    sound.sort((x, y) => Math.abs(x.deviation) - Math.abs(y.deviation));
    return { role, candidates: sound.length > 0 ? sound : single.slice(0, MOST_CANDIDATES) };
  });
  const searched = offers.filter((o) => o.candidates.length > 0);
  const search = new FillSearch(trial, target, searched, { capacity: free, ceiling: ceiling && ceiling.amount - ampsCost - keptCost });
  const found = search.run();

  const fillings: { role: BoardRole; filling: Filling }[] = placed.filter((p) => p.role.kind === "op-amp").map((p) => ({ role: p.role, filling: { opAmp: p.role.type!, stock: p.line.id } }));
  for (const offer of offers) if (offer.candidates.length === 0) unplaced.push({ role: offer.role, reason: whyNothing(board.project, offer.role, lines, { ...opts, stress }) });
  for (const [i, { role, candidates }] of searched.entries()) {
    const at = found.choice[i];
    if (at < 0) {
      const ids = candidates.map((c) => c.lines[0].id).join(", ");
      unplaced.push({ role, reason: ceiling ? `what fits (${ids}) is taken by other roles or would break the ceiling` : `every piece that fits (${ids}) is taken by other roles` });
    } else {
      const candidate = candidates[at];
      placed.push({ role, candidate, line: candidate.lines[0], problems: candidate.problems });
      fillings.push({ role, filling: candidate.filling });
    }
  }
  const order = new Map(roles.map((r, i) => [r.name, i]));
  const inOrder = <T extends { readonly role: BoardRole }>(rows: T[]): T[] => rows.toSorted((a, b) => order.get(a.role.name)! - order.get(b.role.name)!);
  const project = filledProject(board.project, fillings);
  const cost = costOfUnit(board, project, placed, lines, units);
  const gains = measure.gains(trial.compiled);
  const { counted } = countLines(boardRoles(onProject(board, project)), lines);
  const leftOf = ({ candidate, line }: Placing): number => Math.min(...(candidate?.lines ?? [line]).map((one) => leftAfter(one, counted.get(one)?.perUnit ?? 0, units)));
  const spent = cost.find((m) => m.currency === ceiling?.currency)?.amount ?? 0;
  return {
    project, patch: fillingPatch(board.project, fillings),
    placed: inOrder(placed).map((p) => ({ ...p, left: leftOf(p) })), unplaced: inOrder(unplaced),
    error: Math.sqrt(found.error), worst: gains.reduce((most, g, i) => Math.max(most, Math.abs(g - measure.target[i])), 0),
    isExhaustive: found.isExhaustive, cost, isWithinCeiling: ceiling === undefined || spent <= ceiling.amount * (1 + 1e-9),
  };
}

/** Nearest first; further ones would hardly be taken. */
const MOST_CANDIDATES = 16;
const MOST_PAIRS = 64;
const MOST_COILS = 64;
/** A single part this near to the wanted value, as a fraction, needs no second one beside it. */
const SINGLE_ENOUGH = 0.05;

/** The lines that a role names, two for a pair; null where the drawer does not have all of them. */
function ownLines(role: BoardRole, byId: ReadonlyMap<string, StockedLine>): readonly StockedLine[] | null {
  const named = namedLines(role);
  const lines = named.flatMap(([id]) => (id === null ? [] : (byId.get(id) ?? [])));
  return lines.length === named.length ? lines : null;
}

/** Keeps a role's own lines where they are what the board says, have pieces left and nothing bars them, and takes those pieces out of what is free. */
function isKept(role: BoardRole, byId: ReadonlyMap<string, StockedLine>, free: Map<string, number>, placed: Placing[], stress: BoardStress): boolean {
  const own = ownLines(role, byId);
  if (own === null) return false;
  const problems = namedLines(role).flatMap(([, wanted], i) => namedProblems(role, own[i], wanted, stress));
  if (hasFault({ problems }) || own.some((line) => free.get(line.id)! < own.filter((other) => other === line).length)) return false;
  for (const line of own) free.set(line.id, free.get(line.id)! - 1);
  placed.push({ role, candidate: null, line: own[0], problems });
  return true;
}

/** Op amps by type, by the package: eight amplifiers of a dual type take four. @returns cost of a unit's packages */
function placeOpAmps(
  roles: readonly BoardRole[],
  lines: readonly StockedLine[],
  { units, isPriced, placed, unplaced }: { readonly units: number; readonly isPriced: (line: StockedLine) => boolean; readonly placed: Placing[]; readonly unplaced: UnplacedRole[] },
): number {
  let cost = 0;
  for (const type of new Set(roles.map((r) => r.type!))) {
    if (type === IDEAL) continue;
    const own = roles.filter((r) => r.type === type);
    const packages = packagesFor(own.length, type);
    const known = lines.filter((l) => l.kind === "op-amp" && l.type?.toLowerCase() === type.toLowerCase());
    const enough = known.filter((l) => availableOf(l) >= packages * units && isPriced(l));
    const [line] = enough.toSorted((a, b) => (unitCost(a, packages * units) ?? Infinity) - (unitCost(b, packages * units) ?? Infinity) || compareText(a.id, b.id));
    if (line) {
      cost += packages * (unitCost(line, packages * units) ?? 0);
      for (const role of own) placed.push({ role, candidate: null, line, problems: [] });
      continue;
    }
    const there = Math.max(0, ...known.map(availableOf));
    const reason = known.length === 0 ? `the drawer has no ${type}` : there >= packages * units ? `no ${type} has a price that can be counted` : `${packages * units} ${type} packages are needed (${own.length} amplifiers a unit), ${there} are free in one line`;
    for (const role of own) unplaced.push({ role, reason });
  }
  return cost;
}

/** Packages of a type that hold a number of amplifiers. */
export function packagesFor(amplifiers: number, type: string): number {
  return Math.ceil(amplifiers / amplifiersIn(type));
}

function costOfUnit(board: Board, project: Project, placed: readonly Placing[], lines: readonly StockedLine[], units: number): Money[] {
  const names = new Set(placed.map((p) => p.role.name));
  const roles = boardRoles(onProject(board, project)).filter((r) => names.has(r.name));
  return sumMoney([...countLines(roles, lines).counted].map(([line, { perUnit }]) => {
    const each = unitCost(line, perUnit * units);
    return each === null ? null : { amount: each * perUnit, currency: line.currency };
  }));
}

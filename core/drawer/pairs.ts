/** How two pieces are joined. */
export type Joined = "series" | "parallel";

/** Something that can be one half of a pair. */
export interface PairItem {
  /** SI, above 0. */
  readonly value: number;
  /** How many there are; a pair of two of the same takes two. */
  readonly available: number;
}

export interface Pair<T extends PairItem> {
  readonly first: T;
  readonly second: T;
  readonly value: number;
}

/** Which way values add up: ohms and henries in series, farads in parallel; the other way, their reciprocals do. */
export function isSum(kind: "resistor" | "capacitor" | "inductor", joined: Joined): boolean {
  return (joined === "series") === (kind !== "capacitor");
}

/** What two values make together. */
export function pairValue(a: number, b: number, sums: boolean): number {
  return sums ? a + b : 1 / (1 / a + 1 / b);
}

/** A run through the partners of one item, away from the target; its errors only grow. */
interface Run {
  readonly item: number;
  readonly step: 1 | -1;
  at: number;
  error: number;
}

/**
 * The `count` pairs nearest to a target, nearest first: exactly those that trying every pair would find.
 *
 * With the items sorted by what adds up (values, or their reciprocals), the best partner of an item moves down as the item
 * moves up, so one sweep with two fingers finds every item's best partner; on either side of it the errors grow. A heap
 * merges these runs: O(n log n) for the sort and O((n + count)·log n) for the rest, where trying all takes n².
 * @param need pieces of each half: as many as there are units to build
 * @param isFit which pairs count at all
 */
export function bestPairs<T extends PairItem>(target: number, items: readonly T[], sums: boolean, count: number, need = 1, isFit: (a: T, b: T) => boolean = () => true): Pair<T>[] {
  const order = items.filter((i) => i.available >= need && i.value > 0).toSorted((a, b) => (sums ? a.value - b.value : b.value - a.value));
  const n = order.length;
  const add = order.map((i) => (sums ? i.value : 1 / i.value));
  const goal = sums ? target : 1 / target;
  const errorOf = (i: number, j: number): number => Math.abs(pairValue(order[i].value, order[j].value, sums) - target);
  const heap: Run[] = [];
  const enter = (item: number, at: number, step: 1 | -1): void => {
    // Each pair once: the partner stands at the item or behind it.
    if (at >= item && at < n) push(heap, { item, step, at, error: errorOf(item, at) });
  };
  let finger = n - 1;
  for (let i = 0; i < n; i++) {
    while (finger >= 0 && add[i] + add[finger] > goal) finger--;
    enter(i, Math.max(finger, i - 1) + 1, 1);
    enter(i, finger, -1);
  }
  const found: Pair<T>[] = [];
  while (found.length < count && heap.length > 0) {
    const run = heap[0];
    const { item, at } = run;
    if ((item !== at || order[item].available >= 2 * need) && isFit(order[item], order[at])) found.push({ first: order[item], second: order[at], value: pairValue(order[item].value, order[at].value, sums) });
    run.at += run.step;
    if (run.at >= item && run.at < n) {
      run.error = errorOf(item, run.at);
      sink(heap);
    } else {
      const last = heap.pop()!;
      if (heap.length > 0) {
        heap[0] = last;
        sink(heap);
      }
    }
  }
  return found;
}

/** Nearest first; the order of the items where errors are equal, so that results repeat. */
function isBefore(a: Run, b: Run): boolean {
  if (a.error !== b.error) return a.error < b.error;
  return a.item !== b.item ? a.item < b.item : a.at < b.at;
}

function push(heap: Run[], run: Run): void {
  let i = heap.push(run) - 1;
  while (i > 0) {
    const parent = (i - 1) >> 1;
    if (!isBefore(heap[i], heap[parent])) return;
    [heap[i], heap[parent]] = [heap[parent], heap[i]];
    i = parent;
  }
}

function sink(heap: Run[]): void {
  let i = 0;
  for (;;) {
    let least = i;
    for (const child of [2 * i + 1, 2 * i + 2]) if (child < heap.length && isBefore(heap[child], heap[least])) least = child;
    if (least === i) return;
    [heap[i], heap[least]] = [heap[least], heap[i]];
    i = least;
  }
}

/** How much of a pair's value its lesser half makes: 0.5 for two of the same, next to nothing where one alone would do. */
export function lesserShare(a: number, b: number, sums: boolean): number {
  return (sums ? Math.min(a, b) : 1 / Math.max(a, b)) / (sums ? a + b : 1 / a + 1 / b);
}

/** Worst-case tolerance of a pair: each half counts for as much as it moves the whole. */
export function pairTolerance(a: number, b: number, toleranceA: number | null, toleranceB: number | null, sums: boolean): number | null {
  if (toleranceA === null || toleranceB === null) return null;
  const shareA = sums ? a / (a + b) : b / (a + b);
  return shareA * toleranceA + (1 - shareA) * toleranceB;
}

/** What a square real system has for solutions. */
export interface RankSolution {
  /** One solution; its free unknowns are 0. */
  readonly x: Float64Array;
  /** Whether there is a solution at all. */
  readonly isConsistent: boolean;
  /** By unknown: 1 where the equations leave its value open. */
  readonly isOpen: Uint8Array;
}

/** Pivots below this, after the rows have been scaled to 1, count as 0. */
const RANK_TOLERANCE = 1e-11;

/**
 * Solves A·x = b where A may be singular: Gaussian elimination with complete pivoting on scaled rows (Golub and Van Loan,
 * "Matrix Computations", 4th ed., 3.4.8), which shows the rank, and from it which unknowns the equations settle.
 * @param a n×n, row-major; kept as it is
 */
export function solveWithRank(a: Float64Array, b: Float64Array): RankSolution {
  const n = b.length;
  const m = Float64Array.from(a);
  const right = Float64Array.from(b);
  const columns = Int32Array.from({ length: n }, (_, i) => i);
  for (let i = 0; i < n; i++) {
    let largest = 0;
    for (let j = 0; j < n; j++) largest = Math.max(largest, Math.abs(m[i * n + j]));
    if (largest === 0) continue;
    for (let j = 0; j < n; j++) m[i * n + j] /= largest;
    right[i] /= largest;
  }
  let rank = 0;
  for (; rank < n; rank++) {
    let [row, column, size] = [rank, rank, 0];
    for (let i = rank; i < n; i++) {
      for (let j = rank; j < n; j++) {
        const here = Math.abs(m[i * n + j]);
        if (here > size) [row, column, size] = [i, j, here];
      }
    }
    if (size < RANK_TOLERANCE) break;
    if (row !== rank) {
      for (let j = 0; j < n; j++) [m[rank * n + j], m[row * n + j]] = [m[row * n + j], m[rank * n + j]];
      [right[rank], right[row]] = [right[row], right[rank]];
    }
    if (column !== rank) {
      for (let i = 0; i < n; i++) [m[i * n + rank], m[i * n + column]] = [m[i * n + column], m[i * n + rank]];
      [columns[rank], columns[column]] = [columns[column], columns[rank]];
    }
    for (let i = rank + 1; i < n; i++) {
      const factor = m[i * n + rank] / m[rank * n + rank];
      if (factor === 0) continue;
      for (let j = rank; j < n; j++) m[i * n + j] -= factor * m[rank * n + j];
      right[i] -= factor * right[rank];
    }
  }
  let largestRight = 0;
  for (let i = 0; i < n; i++) largestRight = Math.max(largestRight, Math.abs(right[i]));
  let isConsistent = true;
  for (let i = rank; i < n; i++) if (Math.abs(right[i]) > RANK_TOLERANCE * Math.max(1, largestRight)) isConsistent = false;

  const solution = new Float64Array(n);
  back(m, right, solution, n, rank);
  const x = new Float64Array(n);
  for (let j = 0; j < rank; j++) x[columns[j]] = solution[j];
  const isOpen = new Uint8Array(n);
  const direction = new Float64Array(n);
  const minusColumn = new Float64Array(n);
  for (let free = rank; free < n; free++) {
    // A·d = 0 with this free unknown at 1 and the others at 0.
    for (let i = 0; i < rank; i++) minusColumn[i] = -m[i * n + free];
    back(m, minusColumn, direction, n, rank);
    isOpen[columns[free]] = 1;
    for (let j = 0; j < rank; j++) if (Math.abs(direction[j]) > 1e-9) isOpen[columns[j]] = 1;
  }
  return { x, isConsistent, isOpen };
}

/** Back substitution on the leading rank×rank triangle. */
function back(m: Float64Array, right: Float64Array, out: Float64Array, n: number, rank: number): void {
  for (let i = rank - 1; i >= 0; i--) {
    let sum = right[i];
    for (let j = i + 1; j < rank; j++) sum -= m[i * n + j] * out[j];
    out[i] = sum / m[i * n + i];
  }
}

/**
 * The assignment problem: rows to columns, each column once, at the least total cost. Shortest augmenting paths with
 * potentials (Jonker and Volgenant, "A shortest augmenting path algorithm for dense and sparse linear assignment
 * problems", Computing 38, 1987; the potentials make reduced costs as in the Hungarian method), O(rows²·columns).
 *
 * With more rows than columns some rows go without. A cost of Infinity bars a pair.
 * @param cost rows×columns, row-major, no NaN and no −Infinity
 * @returns the column of each row, −1 where it goes without; as many rows as can be are served, and those at the least cost
 */
export function assign(cost: Float64Array, rows: number, columns: number): Int32Array {
  const result = new Int32Array(rows).fill(-1);
  if (rows === 0 || columns === 0) return result;
  // Made square with rows and columns that cost nothing; a barred pair costs more than all others could save.
  let spread = 0;
  for (const c of cost) if (Number.isFinite(c)) spread = Math.max(spread, Math.abs(c));
  const n = Math.max(rows, columns);
  const dear = (spread > 0 ? spread : 1) * (2 * n + 1);
  const at = (i: number, j: number): number => {
    if (i >= rows || j >= columns) return 0;
    const c = cost[i * columns + j];
    return c === Infinity ? dear : c;
  };
  const u = new Float64Array(n + 1);
  const v = new Float64Array(n + 1);
  /** Row of each column, from 1; 0 where free. */
  const owner = new Int32Array(n + 1);
  const way = new Int32Array(n + 1);
  const least = new Float64Array(n + 1);
  const isUsed = new Uint8Array(n + 1);
  for (let i = 1; i <= n; i++) {
    owner[0] = i;
    let column = 0;
    least.fill(Infinity);
    isUsed.fill(0);
    do {
      isUsed[column] = 1;
      const row = owner[column];
      let delta = Infinity;
      let next = 0;
      for (let j = 1; j <= n; j++) {
        if (isUsed[j]) continue;
        const reduced = at(row - 1, j - 1) - u[row] - v[j];
        if (reduced < least[j]) {
          least[j] = reduced;
          way[j] = column;
        }
        if (least[j] < delta) {
          delta = least[j];
          next = j;
        }
      }
      for (let j = 0; j <= n; j++) {
        if (isUsed[j]) {
          u[owner[j]] += delta;
          v[j] -= delta;
        } else least[j] -= delta;
      }
      column = next;
    } while (owner[column] !== 0);
    // Turn the path over.
    do {
      const before = way[column];
      owner[column] = owner[before];
      column = before;
    } while (column !== 0);
  }
  for (let j = 1; j <= columns; j++) {
    const i = owner[j] - 1;
    if (i < rows && cost[i * columns + j - 1] !== Infinity) result[i] = j - 1;
  }
  return result;
}

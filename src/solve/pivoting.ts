import type { F, Pattern } from './system.ts';

/** A diagonal entry is kept as pivot unless another in its column is this many times larger. */
const DIAGONAL_PREFERENCE = 10;

/**
 * LU factors of W = shift·I − A with partial pivoting: the way out where elimination in a fixed order loses
 * digits. Left-looking, column by column, as in J. R. Gilbert and T. Peierls, SIAM J. Sci. Stat. Comput. 9, 862
 * (1988); the pivots that reach a column are taken from a sorted list instead of a depth-first search.
 */
export class PivotedElimination {
  readonly #size: number;
  readonly #columns: { row: number; from: number }[][];
  #lower: { rows: number[]; values: number[] }[] = [];
  #upper: { pivots: number[]; values: number[]; pivot: number }[] = [];
  #pivotRow: number[] = [];

  constructor(pattern: Pattern) {
    const n = pattern.rowStart.length - 1;
    this.#size = n;
    this.#columns = Array.from({ length: n }, () => []);
    for (let i = 0; i < n; i++)
      for (let k = pattern.rowStart[i]; k < pattern.rowStart[i + 1]; k++)
        this.#columns[pattern.column[k]].push({ row: i, from: k });
  }

  /** Returns false where a column is left without any pivot: W is singular to the last digit. */
  factor(values: F, shift: number): boolean {
    const n = this.#size;
    const x = new Float64Array(n);
    const at = new Int32Array(n).fill(-1);
    this.#lower = [];
    this.#upper = [];
    this.#pivotRow = [];
    for (let k = 0; k < n; k++) {
      const touched = new Set<number>([k]);
      const pending: number[] = [];
      const touch = (row: number): void => {
        if (touched.has(row)) return;
        touched.add(row);
        if (at[row] >= 0) insertSorted(pending, at[row]);
      };
      if (at[k] >= 0) insertSorted(pending, at[k]);
      for (const e of this.#columns[k]) {
        touch(e.row);
        x[e.row] -= values[e.from];
      }
      x[k] += shift;
      const upper = { pivots: [] as number[], values: [] as number[], pivot: 0 };
      while (pending.length > 0) {
        const j = pending.shift() as number;
        const value = x[this.#pivotRow[j]];
        upper.pivots.push(j);
        upper.values.push(value);
        const l = this.#lower[j];
        l.rows.forEach((row, q) => {
          touch(row);
          x[row] -= l.values[q] * value;
        });
      }
      let best = -1;
      for (const row of touched)
        if (at[row] < 0 && (best < 0 || Math.abs(x[row]) > Math.abs(x[best]))) best = row;
      if (best < 0 || !(Math.abs(x[best]) > 0) || !Number.isFinite(x[best])) return false;
      if (at[k] < 0 && Math.abs(x[k]) * DIAGONAL_PREFERENCE >= Math.abs(x[best])) best = k;
      const pivot = x[best];
      at[best] = k;
      this.#pivotRow.push(best);
      upper.pivot = pivot;
      this.#upper.push(upper);
      const lower = { rows: [] as number[], values: [] as number[] };
      for (const row of touched) {
        if (at[row] < 0 && x[row] !== 0) {
          lower.rows.push(row);
          lower.values.push(x[row] / pivot);
        }
        x[row] = 0;
      }
      this.#lower.push(lower);
    }
    return true;
  }

  /** Solves W·x = b; `x` holds b on entry. */
  solve(x: F): void {
    const n = this.#size;
    const y = new Float64Array(n);
    for (let k = 0; k < n; k++) {
      const value = x[this.#pivotRow[k]];
      y[k] = value;
      const l = this.#lower[k];
      l.rows.forEach((row, q) => {
        x[row] -= l.values[q] * value;
      });
    }
    for (let k = n - 1; k >= 0; k--) {
      const u = this.#upper[k];
      y[k] /= u.pivot;
      u.pivots.forEach((j, q) => {
        y[j] -= u.values[q] * y[k];
      });
    }
    x.set(y);
  }
}

function insertSorted(list: number[], value: number): void {
  let at = list.length;
  while (at > 0 && list[at - 1] > value) at -= 1;
  list.splice(at, 0, value);
}

import { ordering } from './ordering.ts';
import type { F, Pattern } from './system.ts';

/**
 * LU factors of W = shift·I − A without pivoting, on a pattern that never changes.
 *
 * Order, fill and the list of all multiplications are worked out once. A solve is then two flat lists of
 * x[i] −= value·x[j] with a scaling between, in place and without permuting: L carries 1/pivot of its column, U that
 * of its row. Blocks below the diagonal blocks are kept as they are and only enter the solves.
 */
export class Elimination {
  readonly size: number;
  /** Multiply-adds of one factorisation. */
  readonly work: number;
  /** Values of the forward list, then of the backward list. */
  readonly #values: F;
  /** Reciprocal pivots by place. */
  readonly #reciprocal: F;
  readonly #row: Int32Array;
  readonly #column: Int32Array;
  /** For each block: end of its forward list, first and last position, end of its backward list. */
  readonly #blocks: Int32Array;
  readonly #order: Int32Array;
  readonly #backward: number;
  /** (slot, entry of A) pairs; slots past the lists are pivots. */
  readonly #load: Int32Array;
  readonly #program: Int32Array;

  constructor(pattern: Pattern) {
    const n = pattern.rowStart.length - 1;
    const { order, blockStart } = ordering(pattern);
    const position = new Int32Array(n);
    order.forEach((row, k) => {
      position[row] = k;
    });
    const blockOf = new Int32Array(n);
    for (let b = 0; b + 1 < blockStart.length; b++)
      blockOf.fill(blockStart[b], blockStart[b], blockStart[b + 1]);

    const entries: { column: number; from: number }[][] = [];
    for (let i = 0; i < n; i++) {
      entries.push([]);
      for (let k = pattern.rowStart[order[i]]; k < pattern.rowStart[order[i] + 1]; k++)
        entries[i].push({ column: position[pattern.column[k]], from: k });
    }
    const below = entries.map((r, i) => r.filter((e) => e.column < blockOf[i]).map((e) => e.column));
    const filled = fill(
      entries.map((r, i) => new Set([i, ...r.filter((e) => e.column >= blockOf[i]).map((e) => e.column)])),
      blockOf,
    );

    const row: number[] = [];
    const column: number[] = [];
    const slot: Map<number, number>[] = Array.from({ length: n }, () => new Map());
    const list = (i: number, c: number): void => {
      slot[i].set(c, row.length);
      row.push(order[i]);
      column.push(order[c]);
    };
    const blocks: number[] = [];
    for (let b = 0; b + 1 < blockStart.length; b++) {
      for (let i = blockStart[b]; i < blockStart[b + 1]; i++) {
        for (const c of below[i]) list(i, c);
        for (const c of filled[i]) if (c < i) list(i, c);
      }
      blocks.push(row.length, blockStart[b], blockStart[b + 1], 0);
    }
    this.#backward = row.length;
    for (let b = 0; b + 1 < blockStart.length; b++) {
      for (let i = blockStart[b + 1] - 1; i >= blockStart[b]; i--)
        for (const c of filled[i]) if (c > i) list(i, c);
      blocks[4 * b + 3] = row.length;
    }
    const pivots = row.length;
    const program: number[] = [];
    let work = 0;
    filled.forEach((columns, i) => {
      const slotOf = (c: number): number => (c === i ? pivots + order[i] : (slot[i].get(c) as number));
      for (const k of columns) {
        if (k >= i) break;
        const upper = filled[k].filter((c) => c > k);
        program.push(
          slotOf(k),
          order[k],
          upper.length,
          upper.length > 0 ? (slot[k].get(upper[0]) as number) : 0,
        );
        for (const c of upper) program.push(slotOf(c));
        work += upper.length + 1;
      }
      const upper = columns.filter((c) => c > i);
      program.push(-1, order[i], upper.length, upper.length > 0 ? slotOf(upper[0]) : 0);
      work += upper.length;
    });
    this.#load = Int32Array.from(
      entries.flatMap((r, i) =>
        r.flatMap((e) => [e.column === i ? pivots + order[i] : (slot[i].get(e.column) as number), e.from]),
      ),
    );
    this.size = n;
    this.work = work;
    this.#order = order;
    this.#row = Int32Array.from(row);
    this.#column = Int32Array.from(column);
    this.#blocks = Int32Array.from(blocks);
    this.#program = Int32Array.from(program);
    this.#values = new Float64Array(pivots + n);
    this.#reciprocal = new Float64Array(n);
  }

  /** Factors shift·I − A, A given by its values on the pattern. A vanishing pivot leaves non-finite factors. */
  factor(values: F, shift: number): void {
    const v = this.#values;
    const d = this.#reciprocal;
    const load = this.#load;
    const p = this.#program;
    const pivots = v.length - this.size;
    v.fill(0, 0, pivots);
    v.fill(shift, pivots);
    for (let k = 0; k < load.length; k += 2) v[load[k]] -= values[load[k + 1]];
    for (let at = 0; at < p.length; ) {
      const entry = p[at];
      const pivot = p[at + 1];
      const count = p[at + 2];
      const upper = p[at + 3];
      at += 4;
      if (entry < 0) {
        const r = 1 / v[pivots + pivot];
        d[pivot] = r;
        for (let q = 0; q < count; q++) v[upper + q] *= r;
        continue;
      }
      const a = v[entry];
      v[entry] = a * d[pivot];
      for (let q = 0; q < count; q++, at++) v[p[at]] -= a * v[upper + q];
    }
  }

  /** Solves W·x = b; `x` holds b on entry. */
  solve(x: F): void {
    const v = this.#values;
    const d = this.#reciprocal;
    const row = this.#row;
    const column = this.#column;
    const order = this.#order;
    const blocks = this.#blocks;
    let f = 0;
    let b = this.#backward;
    for (let q = 0; q < blocks.length; q += 4) {
      const forwardEnd = blocks[q];
      const backwardEnd = blocks[q + 3];
      const last = blocks[q + 2];
      for (; f < forwardEnd; f++) x[row[f]] -= v[f] * x[column[f]];
      for (let i = blocks[q + 1]; i < last; i++) {
        const k = order[i];
        x[k] *= d[k];
      }
      for (; b < backwardEnd; b++) x[row[b]] -= v[b] * x[column[b]];
    }
  }
}

/** Rows with the fill of an elimination without pivoting; columns ascending. */
function fill(rows: Set<number>[], blockOf: Int32Array): number[][] {
  const result: number[][] = [];
  rows.forEach((row, i) => {
    const queue = [...row].filter((c) => c < i).sort((a, b) => a - b);
    for (let q = 0; q < queue.length; q++)
      for (const c of result[queue[q]])
        if (c > queue[q] && !row.has(c)) {
          row.add(c);
          if (c < i) insert(queue, c, q + 1);
        }
    result.push([...row].filter((c) => c >= blockOf[i]).sort((a, b) => a - b));
  });
  return result;
}

function insert(sorted: number[], value: number, from: number): void {
  let at = from;
  while (at < sorted.length && sorted[at] < value) at += 1;
  sorted.splice(at, 0, value);
}

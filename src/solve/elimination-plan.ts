import { ordering } from './ordering.ts';
import type { Pattern } from './system.ts';

/** Everything about an elimination without pivoting that depends on the pattern alone. */
export interface EliminationPlan {
  readonly size: number;
  /** Multiply-adds of one factorisation. */
  readonly work: number;
  /** Target and source of every x[row] −= value·x[column]: the forward list, then the backward list. */
  readonly row: Int32Array;
  readonly column: Int32Array;
  /** Where the backward list begins. */
  readonly backward: number;
  /** For each block: end of its forward list, first and last position, end of its backward list. */
  readonly blocks: Int32Array;
  readonly order: Int32Array;
  /** (slot, entry of A) pairs; slots past the lists are pivots. */
  readonly load: Int32Array;
  /** Row after row: (slot of L, pivot, count, first slot of that row of U, targets …), then (−1, pivot, count, U). */
  readonly program: Int32Array;
}

const known = new WeakMap<Pattern, EliminationPlan>();
/** Plans by what their patterns hold: equal patterns are made anew for every sample of an ensemble. */
const byContent = new Map<string, EliminationPlan>();
const MOST_KNOWN = 32;

/** Order, fill and the list of all multiplications: worked out once for a pattern, shared by all runs on it. */
export function eliminationPlan(pattern: Pattern): EliminationPlan {
  const own = known.get(pattern);
  if (own !== undefined) return own;
  const content = `${pattern.rowStart.join()};${pattern.column.join()}`;
  const made = byContent.get(content) ?? makePlan(pattern);
  byContent.delete(content);
  byContent.set(content, made);
  if (byContent.size > MOST_KNOWN) byContent.delete(byContent.keys().next().value as string);
  known.set(pattern, made);
  return made;
}

function makePlan(pattern: Pattern): EliminationPlan {
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
  const backward = row.length;
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
  const load = Int32Array.from(
    entries.flatMap((r, i) =>
      r.flatMap((e) => [e.column === i ? pivots + order[i] : (slot[i].get(e.column) as number), e.from]),
    ),
  );
  return {
    size: n,
    work,
    row: Int32Array.from(row),
    column: Int32Array.from(column),
    backward,
    blocks: Int32Array.from(blocks),
    order,
    load,
    program: Int32Array.from(program),
  };
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

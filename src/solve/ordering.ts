import type { Pattern } from './system.ts';

/** A symmetric permutation into block lower triangular form, each block ordered for little fill. */
export interface Ordering {
  /** order[k] is the row (and column) that stands at position k. */
  readonly order: Int32Array;
  /** Block b covers the positions blockStart[b] … blockStart[b + 1]. */
  readonly blockStart: Int32Array;
}

/**
 * Strongly connected components first, so that what only receives (boundary totals) and what only gives
 * (volumes) is never mixed into the elimination of the rest; minimum degree inside each.
 *
 * References: R. E. Tarjan, SIAM J. Comput. 1, 146 (1972); block triangular form as in I. S. Duff and J. K. Reid,
 * ACM Trans. Math. Softw. 4, 137 (1978); minimum degree: D. J. Rose (1972), here on the exact elimination graph.
 */
export function ordering(pattern: Pattern): Ordering {
  const blocks = components(pattern);
  const n = pattern.rowStart.length - 1;
  const order = new Int32Array(n);
  const blockStart = new Int32Array(blocks.length + 1);
  let at = 0;
  blocks.forEach((block, b) => {
    for (const row of minimumDegree(pattern, block)) {
      order[at] = row;
      at += 1;
    }
    blockStart[b + 1] = at;
  });
  return { order, blockStart };
}

/** Strongly connected components of "row needs column", those needed first. Iterative: cascades are deep. */
export function components(pattern: Pattern): number[][] {
  const n = pattern.rowStart.length - 1;
  const number = new Int32Array(n).fill(-1);
  const low = new Int32Array(n);
  const open = new Uint8Array(n);
  const stack: number[] = [];
  const result: number[][] = [];
  const next = pattern.rowStart.slice(0, n);
  let count = 0;
  for (let root = 0; root < n; root++) {
    if (number[root] >= 0) continue;
    const path = [root];
    while (path.length > 0) {
      const v = path[path.length - 1];
      if (number[v] < 0) {
        number[v] = count;
        low[v] = count;
        count += 1;
        stack.push(v);
        open[v] = 1;
      }
      let descended = false;
      while (next[v] < pattern.rowStart[v + 1]) {
        const c = pattern.column[next[v]];
        if (number[c] < 0) {
          path.push(c);
          descended = true;
          break;
        }
        if (open[c]) low[v] = Math.min(low[v], number[c]);
        next[v] += 1;
      }
      if (descended) continue;
      path.pop();
      if (low[v] === number[v]) {
        const block: number[] = [];
        let u: number;
        do {
          u = stack.pop() as number;
          open[u] = 0;
          block.push(u);
        } while (u !== v);
        result.push(block);
      }
      if (path.length > 0) {
        const parent = path[path.length - 1];
        low[parent] = Math.min(low[parent], low[v]);
        next[parent] += 1;
      }
    }
  }
  return result;
}

function minimumDegree(pattern: Pattern, block: readonly number[]): number[] {
  if (block.length < 3) return [...block];
  const inside = new Map(block.map((row) => [row, new Set<number>()]));
  for (const row of block)
    for (let k = pattern.rowStart[row]; k < pattern.rowStart[row + 1]; k++) {
      const col = pattern.column[k];
      if (col === row || !inside.has(col)) continue;
      inside.get(row)?.add(col);
      inside.get(col)?.add(row);
    }
  const buckets: Set<number>[] = [];
  const file = (v: number): void => {
    const d = (inside.get(v) as Set<number>).size;
    while (buckets.length <= d) buckets.push(new Set());
    buckets[d].add(v);
  };
  block.forEach(file);
  const order: number[] = [];
  while (order.length < block.length) {
    const bucket = buckets.find((b) => b.size > 0) as Set<number>;
    const v = bucket.values().next().value as number;
    bucket.delete(v);
    order.push(v);
    const neighbours = [...(inside.get(v) as Set<number>)];
    for (const u of neighbours) {
      const own = inside.get(u) as Set<number>;
      buckets[own.size].delete(u);
      own.delete(v);
      for (const other of neighbours) if (other !== u) own.add(other);
    }
    neighbours.forEach(file);
    inside.delete(v);
  }
  return order;
}

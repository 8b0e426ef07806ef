import { describe, expect, it } from 'vitest';
import { Elimination } from '../../src/solve/elimination.ts';
import { components, ordering } from '../../src/solve/ordering.ts';
import type { Pattern } from '../../src/solve/system.ts';
import { dominant, fromRows, random, randomSparse } from './problems/sparse.ts';

/** The pattern in which row i needs the columns given for it, and itself. */
const pattern = (needs: readonly (readonly number[])[]): Pattern =>
  fromRows(needs.map((row, i) => [...new Set([i, ...row])].map((j) => [j, 1] as const))).pattern;

const line = (n: number): number[] => Array.from({ length: n }, (_, i) => i);
const needsOf = (p: Pattern, i: number): number[] => [...p.column.subarray(p.rowStart[i], p.rowStart[i + 1])];

/** Tanks one after the other, each needing the one before it. */
const chain = (n: number): Pattern => pattern(line(n).map((i) => (i > 0 ? [i - 1] : [])));
/** The same with back-mixing: each needs both neighbours. */
const mixed = (n: number): Pattern =>
  pattern(line(n).map((i) => [i - 1, i + 1].filter((j) => j >= 0 && j < n)));
/** The chain closed to a ring by a recycle. */
const ring = (n: number): Pattern => pattern(line(n).map((i) => [(i + n - 1) % n]));
/** All need the first and the first needs all. */
const star = (n: number): Pattern => pattern(line(n).map((i) => (i > 0 ? [0] : line(n))));

/** Which rows each row needs, directly or through others. */
function reach(p: Pattern): Set<number>[] {
  const n = p.rowStart.length - 1;
  return line(n).map((start) => {
    const seen = new Set([start]);
    const open = [start];
    while (open.length > 0)
      for (const j of needsOf(p, open.pop() as number))
        if (!seen.has(j)) {
          seen.add(j);
          open.push(j);
        }
    return seen;
  });
}

describe('components', () => {
  it('of a chain are its members in the order of the flow', () => {
    expect(components(chain(5))).toEqual([[0], [1], [2], [3], [4]]);
    expect(components(pattern([[1], [2], []]))).toEqual([[2], [1], [0]]);
  });

  it('of a ring are one', () => {
    expect(components(ring(6)).map((c) => c.sort())).toEqual([[0, 1, 2, 3, 4, 5]]);
  });

  it('of nothing are none', () => {
    expect(components(pattern([]))).toEqual([]);
  });

  it('put those needed first, and join exactly those that need each other', () => {
    for (let seed = 1; seed <= 40; seed++) {
      const next = random(seed);
      const n = 1 + Math.floor(25 * next());
      const p = randomSparse(n, 0.5 + 1.5 * next(), next, dominant).pattern;
      const found = components(p);
      expect(found.flat().sort((a, b) => a - b)).toEqual(line(n));
      const needed = reach(p);
      found.forEach((block, k) => {
        for (const i of block)
          for (const j of line(n)) {
            const together = needed[i].has(j) && needed[j].has(i);
            expect(block.includes(j), `${i} with ${j}, seed ${seed}`).toBe(together);
            if (needed[i].has(j)) expect(found.findIndex((b) => b.includes(j))).toBeLessThanOrEqual(k);
          }
      });
    }
  });

  it('are found in a chain of twenty thousand, against its order', () => {
    const n = 20_000;
    const backwards = pattern(line(n).map((i) => (i + 1 < n ? [i + 1] : [])));
    const found = components(backwards);
    expect(found).toHaveLength(n);
    expect(found[0]).toEqual([n - 1]);
  });
});

describe('ordering', () => {
  it('holds each row once, block by block', () => {
    for (let seed = 1; seed <= 20; seed++) {
      const next = random(seed);
      const n = 1 + Math.floor(40 * next());
      const p = randomSparse(n, 2 * next(), next, dominant).pattern;
      const { order, blockStart } = ordering(p);
      const blocks = components(p);
      expect([...order].sort((a, b) => a - b)).toEqual(line(n));
      expect([...blockStart.subarray(1)]).toEqual(blocks.map((_, b) => blocks.slice(0, b + 1).flat().length));
      blocks.forEach((block, b) => {
        const members = [...order.subarray(blockStart[b], blockStart[b + 1])];
        expect(members.sort((u, v) => u - v)).toEqual([...block].sort((u, v) => u - v));
      });
    }
  });

  /*
   * Multiply-adds of one factorisation say how much fill there is: an entry of L costs one, and one more for each
   * entry of U in the row of its pivot; scaling U costs one an entry.
   */
  const work = (p: Pattern): number => new Elimination(p).work;

  it('leaves nothing to eliminate in a chain', () => {
    for (const n of [1, 2, 3, 50]) expect(work(chain(n))).toBe(0);
  });

  it('fills nothing in a chain with back-mixing', () => {
    for (const n of [1, 2, 3, 7, 50]) expect(work(mixed(n))).toBe(3 * (n - 1));
  });

  it('fills nothing in a star, whose middle comes last', () => {
    for (const n of [2, 3, 7, 50]) expect(work(star(n))).toBe(3 * (n - 1));
    expect(ordering(star(50)).order.indexOf(0)).toBeGreaterThanOrEqual(48);
  });

  it('fills one entry a step in a ring, as a member gone joins its neighbours', () => {
    for (const n of [4, 10, 50]) expect(work(ring(n))).toBe(3 * (n - 1));
  });

  it('does not depend on how the places are numbered', () => {
    const shuffled = line(60).sort((a, b) => ((a * 37) % 61) - ((b * 37) % 61));
    const rows = line(60).map((i) => [shuffled[(shuffled.indexOf(i) + 59) % 60]]);
    expect(work(pattern(rows))).toBe(work(ring(60)));
  });
});

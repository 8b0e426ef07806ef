import { LuDecomposition, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { Elimination } from '../../src/solve/elimination.ts';
import { LinearSolver } from '../../src/solve/linear.ts';
import { PivotedElimination } from '../../src/solve/pivoting.ts';
import type { F } from '../../src/solve/system.ts';
import {
  backwardError,
  dominant,
  fromDense,
  random,
  randomSparse,
  type Sparse,
  vector,
  whole,
} from './problems/sparse.ts';

const sizes = [1, 2, 3, 7, 30, 200];
const seeds = [1, 2, 3, 4, 5];

/** Full Gaussian elimination with partial pivoting, as the package ml-matrix has it (after JAMA). */
const byPivoting = (w: Matrix, b: F): number[] =>
  new LuDecomposition(w).solve(Matrix.columnVector(b)).getColumn(0);

function expectSame(x: F, y: readonly number[], digits: number): void {
  const size = Math.max(1, ...y.map(Math.abs));
  y.forEach((v, i) => {
    expect(Math.abs(x[i] - v) / size).toBeLessThan(digits);
  });
}

function solution(e: { solve(x: F): unknown }, b: F): F {
  const x = Float64Array.from(b);
  e.solve(x);
  return x;
}

/** Rows and columns of a block lower triangular matrix, shuffled: row i may need j only from its block or before. */
function reducible(n: number, next: () => number): Sparse {
  const block = Array.from({ length: n }, () => Math.floor(next() * (1 + n / 3)));
  return randomSparse(n, 6, next, dominant, (i, j) => block[j] <= block[i]);
}

describe('elimination in a fixed order', () => {
  describe.each(sizes)('%i equations', (n) => {
    it.each(seeds)('agrees with full elimination, pattern %i', (seed) => {
      const next = random(seed);
      const shapes = [0.5, 2, 5].map((perRow) => randomSparse(n, perRow, next, dominant));
      for (const a of [...shapes, reducible(n, next)]) {
        const e = new Elimination(a.pattern);
        expect(e.size).toBe(n);
        for (const shift of [0, 0.3, 1e6]) {
          e.factor(a.values, shift);
          const b = vector(n, next);
          expectSame(solution(e, b), byPivoting(whole(a, shift), b), 1e-12);
        }
      }
    });
  });

  it('factors again on the same pattern as if for the first time, and shares nothing but the pattern', () => {
    const next = random(9);
    const a = randomSparse(30, 4, next, dominant);
    const other = a.values.map((v) => 3 * v);
    const b = vector(30, next);
    const [one, two] = [new Elimination(a.pattern), new Elimination(a.pattern)];
    one.factor(a.values, 1);
    const first = solution(one, b);
    two.factor(other, 2);
    expect(solution(one, b)).toEqual(first);
    one.factor(other, 2);
    expect(solution(one, b)).toEqual(solution(two, b));
    one.factor(a.values, 1);
    expect(solution(one, b)).toEqual(first);
  });

  it('takes entries that are zero in value and rows that are empty', () => {
    const a = fromDense([
      [-1, 1, 0],
      [0, 0, 0],
      [1, 1, -3],
    ]);
    a.values[1] = 0;
    const e = new Elimination(a.pattern);
    e.factor(a.values, 2);
    expectSame(solution(e, Float64Array.of(3, 4, 7)), [1, 2, 2], 1e-15);
  });
});

describe('elimination with pivoting', () => {
  it.each(sizes.flatMap((n) => seeds.map((seed) => [n, seed])))('%i equations, matrix %i', (n, seed) => {
    const next = random(100 * seed);
    // Half of the diagonal is missing: without pivoting there would be no way through.
    for (const a of [3, 8].map((perRow) =>
      randomSparse(n, perRow, next, () => (next() < 0.5 ? 0 : next())),
    )) {
      const shift = next() < 0.5 ? 0 : 0.7;
      const w = whole(a, shift);
      const lu = new LuDecomposition(w);
      const e = new PivotedElimination(a.pattern);
      const solvable = e.factor(a.values, shift);
      expect(solvable).toBe(!lu.isSingular());
      if (!solvable) continue;
      const b = vector(n, next);
      expect(backwardError(w, solution(e, b), b)).toBeLessThan(1e-11);
    }
  });

  it('follows a permutation', () => {
    const a = fromDense([
      [0, 0, -2, 0],
      [-4, 0, 0, 0],
      [0, 0, 0, -8],
      [0, -16, 0, 0],
    ]);
    const e = new PivotedElimination(a.pattern);
    expect(e.factor(a.values, 0)).toBe(true);
    expect([...solution(e, Float64Array.of(2, 4, 8, 16))]).toEqual([1, 1, 1, 1]);
  });
});

/** Exactly singular, whatever the order of elimination. */
const singular: [string, Sparse, number][] = [
  [
    'an empty row',
    fromDense([
      [1, 2, 3],
      [0, 0, 0],
      [3, 2, 1],
    ]),
    0,
  ],
  [
    'an empty column',
    fromDense([
      [1, 0, 3],
      [2, 0, 1],
      [3, 0, 1],
    ]),
    0,
  ],
  [
    'two equal rows',
    fromDense([
      [1, 2, 4],
      [1, 2, 4],
      [4, 2, 1],
    ]),
    0,
  ],
  [
    'a shift that meets an eigenvalue',
    fromDense([
      [2, 0],
      [1, 5],
    ]),
    2,
  ],
  ['one zero', fromDense([[0]]), 0],
];

describe('the solver that watches its residual', () => {
  it.each(sizes)('does nothing beyond elimination where that is safe, %i equations', (n) => {
    const next = random(n);
    const a = randomSparse(n, 4, next, dominant);
    const s = new LinearSolver(a.pattern);
    for (const shift of [0, 1]) {
      s.factor(a.values, shift);
      for (let k = 0; k < 8; k++) {
        const b = vector(n, next);
        expectSame(solution(s, b), byPivoting(whole(a, shift), b), 1e-12);
      }
    }
    expect(s.work).toEqual({ factorisations: 2, solves: 16, refinements: 0, pivotings: 0 });
  });

  it.each([1e-6, 1e-9, 1e-12, 1e-15, 0])('keeps its digits with pivots of %f', (pivot) => {
    const next = random(3);
    const a = fromDense([
      [Number.EPSILON, 1],
      [1, Number.EPSILON],
    ]);
    a.values.set([-pivot, -1, -1, -pivot]);
    const s = new LinearSolver(a.pattern);
    s.factor(a.values, 0);
    for (let k = 0; k < 8; k++) {
      const b = vector(2, next);
      const x = Float64Array.from(b);
      expect(s.solve(x)).toBe(true);
      expect(backwardError(whole(a, 0), x, b)).toBeLessThan(1e-12);
    }
    expect(s.work).toEqual(
      pivot === 0
        ? { factorisations: 1, solves: 8, refinements: 1, pivotings: 1 }
        : { factorisations: 1, solves: 8, refinements: 8, pivotings: 0 },
    );
  });

  it.each(sizes.slice(1))('keeps its digits on matrices without any order, %i equations', (n) => {
    const wary = { refinements: 0, pivotings: 0 };
    for (const seed of seeds) {
      const next = random(1000 + seed);
      const a = randomSparse(n, Math.min(n, 12), next, () => 1e-3 * (2 * next() - 1));
      const w = whole(a, 0);
      const s = new LinearSolver(a.pattern);
      s.factor(a.values, 0);
      for (let k = 0; k < 4; k++) {
        const b = vector(n, next);
        const x = Float64Array.from(b);
        expect(s.solve(x)).toBe(true);
        // Only the first solution is measured; what it vouches for may be somewhat worse.
        expect(backwardError(w, x, b)).toBeLessThan(k === 0 ? 1e-12 : 1e-10);
      }
      wary.pivotings += s.work.pivotings;
      wary.refinements += s.work.refinements;
    }
    if (n < 30) return;
    expect(wary.pivotings).toBeGreaterThan(0);
    expect(wary.refinements).toBeGreaterThan(0);
  });

  it.each(singular)('tells a singular matrix: %s', (_, a, shift) => {
    const s = new LinearSolver(a.pattern);
    s.factor(a.values, shift);
    expect(s.solve(new Float64Array(a.pattern.rowStart.length - 1).fill(1))).toBe(false);
    expect(new PivotedElimination(a.pattern).factor(a.values, shift)).toBe(false);
    // The next matrix on the same pattern starts afresh.
    s.factor(a.values, 100);
    const x = new Float64Array(a.pattern.rowStart.length - 1).fill(1);
    expect(s.solve(x)).toBe(true);
    expect(x.every(Number.isFinite)).toBe(true);
  });

  it('finds a vanishing pivot although a later block is in order', () => {
    // The first two equations have a zero diagonal; the third stands apart and is solved without trouble.
    const a = fromDense([
      [0, -1, 0],
      [-1, 0, 0],
      [0, 0, -1],
    ]);
    const s = new LinearSolver(a.pattern);
    s.factor(a.values, 0);
    const x = Float64Array.of(2, 3, 4);
    expect(s.solve(x)).toBe(true);
    expect([...x]).toEqual([3, 2, 4]);
    expect(s.work.pivotings).toBe(1);
  });

  it('holds nothing against its factors where the right-hand side is no number', () => {
    const a = randomSparse(7, 3, random(5), dominant);
    const s = new LinearSolver(a.pattern);
    s.factor(a.values, 1);
    expect(s.solve(new Float64Array(7).fill(Number.NaN))).toBe(true);
    expect(s.work).toEqual({ factorisations: 1, solves: 1, refinements: 0, pivotings: 0 });
  });
});

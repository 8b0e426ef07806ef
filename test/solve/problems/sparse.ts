import { Matrix } from 'ml-matrix';
import type { F, Pattern } from '../../../src/solve/system.ts';

/** A on its pattern; the matrix of the systems is W = shift·I − A. */
export interface Sparse {
  readonly pattern: Pattern;
  readonly values: F;
}

/** Random numbers in [0, 1) that are the same in every run: a multiplicative generator modulo 2³¹ − 1. */
export function random(seed: number): () => number {
  let state = (seed * 7919 + 12345) % 2147483647;
  return () => {
    state = (state * 48271) % 2147483647;
    return state / 2147483647;
  };
}

export function fromRows(rows: readonly (readonly (readonly [column: number, value: number])[])[]): Sparse {
  const sorted = rows.map((row) => [...row].sort((a, b) => a[0] - b[0]));
  const rowStart = new Int32Array(rows.length + 1);
  sorted.forEach((row, i) => {
    rowStart[i + 1] = rowStart[i] + row.length;
  });
  return {
    pattern: { rowStart, column: Int32Array.from(sorted.flat(), ([c]) => c) },
    values: Float64Array.from(sorted.flat(), ([, v]) => v),
  };
}

export const fromDense = (rows: readonly (readonly number[])[]): Sparse =>
  fromRows(rows.map((row) => row.flatMap((v, j) => (v === 0 ? [] : [[j, v] as const]))));

/** Random entries between −1 and 1, about `perRow` in each row off the diagonal, where `allowed`. */
export function randomSparse(
  n: number,
  perRow: number,
  next: () => number,
  diagonal: (row: readonly (readonly [number, number])[]) => number,
  allowed: (i: number, j: number) => boolean = () => true,
): Sparse {
  return fromRows(
    Array.from({ length: n }, (_, i) => {
      const row: [number, number][] = [];
      for (let j = 0; j < n; j++)
        if (j !== i && allowed(i, j) && next() < perRow / n) row.push([j, 2 * next() - 1]);
      const own = diagonal(row);
      return own === 0 ? row : [...row, [i, own] as [number, number]];
    }),
  );
}

/** Larger than the rest of its row together: elimination in any order is safe. */
export const dominant = (row: readonly (readonly [number, number])[]): number =>
  -row.reduce((s, [, v]) => s + Math.abs(v), 0.1);

/** W as a full matrix. */
export function whole({ pattern, values }: Sparse, shift: number): Matrix {
  const n = pattern.rowStart.length - 1;
  const w = Matrix.eye(n).mul(shift);
  for (let i = 0; i < n; i++)
    for (let k = pattern.rowStart[i]; k < pattern.rowStart[i + 1]; k++)
      w.set(i, pattern.column[k], w.get(i, pattern.column[k]) - values[k]);
  return w;
}

/** Largest |b − W·x| of a row over the sizes that meet in it: W. Oettli and W. Prager, Numer. Math. 6, 405 (1964). */
export function backwardError(w: Matrix, x: F, b: F): number {
  let worst = 0;
  for (let i = 0; i < x.length; i++) {
    const row = w.getRow(i);
    const r = row.reduce((s, v, j) => s - v * x[j], b[i]);
    const size = row.reduce((s, v, j) => s + Math.abs(v * x[j]), Math.abs(b[i]));
    worst = Math.max(worst, size === 0 ? 0 : Math.abs(r) / size);
  }
  return worst;
}

export const vector = (n: number, next: () => number): F =>
  Float64Array.from({ length: n }, () => 2 * next() - 1);

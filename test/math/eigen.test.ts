import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import { describe, expect, test } from 'vitest';
import { type Complex, hessenbergEigenvalues, hessenbergVector } from '../../src/math/eigen.ts';

/** Entries from −1 to 1 that are the same in each run. */
function entries(seed: number): () => number {
  let state = seed;
  return () => {
    state = (state * 48271) % 2147483647;
    return (2 * state) / 2147483647 - 1;
  };
}

const hessenberg = (n: number, next: () => number): Float64Array =>
  Float64Array.from({ length: n * n }, (_, k) => (Math.floor(k / n) > (k % n) + 1 ? 0 : next()));

const found = (h: Float64Array, n: number) => hessenbergEigenvalues(h, n, n) as Complex[];

const sorted = (list: readonly { re: number; im: number }[]): { re: number; im: number }[] =>
  [...list].sort((a, b) => a.re - b.re || a.im - b.im);

describe('eigenvalues of a Hessenberg matrix', () => {
  test.each([1, 2, 3, 5, 12, 40])('of order %i are those of a general-purpose library', (n) => {
    for (let seed = 1; seed <= 5; seed++) {
      const h = hessenberg(n, entries(100 * n + seed));
      const dense = new EigenvalueDecomposition(Matrix.from1DArray(n, n, Array.from(h)));
      const known = sorted(dense.realEigenvalues.map((re, i) => ({ re, im: dense.imaginaryEigenvalues[i] })));
      const own = sorted(found(h, n));
      for (const q of known) {
        const nearest = Math.min(...own.map((o) => Math.hypot(o.re - q.re, o.im - q.im)));
        expect(nearest).toBeLessThan(1e-9);
      }
      expect(own).toHaveLength(n);
    }
  });

  test('a rotation has a conjugate pair, a triangle its diagonal, nothing only zeros', () => {
    const turn = found(Float64Array.of(0, -1, 1, 0), 2);
    expect(sorted(turn).map((q) => q.im)).toEqual([expect.closeTo(-1, 14), expect.closeTo(1, 14)]);
    const triangle = found(Float64Array.of(1, 5, 7, 0, 2, 9, 0, 0, 3), 3);
    expect(sorted(triangle).map((q) => q.re)).toEqual([1, 2, 3]);
    expect(found(new Float64Array(9), 3)).toEqual(Array(3).fill({ re: 0, im: 0 }));
  });

  test('of what is no number are none', () => {
    expect(hessenbergEigenvalues(Float64Array.of(1, Number.NaN, 1, 2), 2, 2)).toBeNull();
  });

  test('vectors are such that H·v = θ·v', () => {
    const n = 15;
    const h = hessenberg(n, entries(7));
    for (const theta of found(h, n)) {
      const v = hessenbergVector(h, n, n, theta);
      for (let i = 0; i < n; i++) {
        let [re, im] = [0, 0];
        for (let j = 0; j < n; j++) {
          re += h[i * n + j] * v.re[j];
          im += h[i * n + j] * v.im[j];
        }
        expect(Math.abs(re - (theta.re * v.re[i] - theta.im * v.im[i]))).toBeLessThan(1e-10);
        expect(Math.abs(im - (theta.re * v.im[i] + theta.im * v.re[i]))).toBeLessThan(1e-10);
      }
    }
  });
});

import { Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { frequencyResponse, type LinearPlant, restGains, stepGains } from '../../src/control/linearise.ts';
import { reduced } from '../../src/control/reduce.ts';
import { over, scale, times } from '../../src/math/complex.ts';
import { exponential, identity, multiply, solve, zeros } from '../../src/math/dense.ts';
import { expm } from '../support/expm.ts';

/** n equal lags in a row, k/(1 + T·s)ⁿ; the last is measured. */
function chain(n: number, T: number, k: number): LinearPlant {
  const a = zeros(n);
  const b = zeros(n, 1);
  const c = zeros(1, n);
  for (let i = 0; i < n; i++) {
    a.a[i * n + i] = -1 / T;
    if (i > 0) a.a[i * n + i - 1] = 1 / T;
  }
  b.a[0] = k / T;
  c.a[n - 1] = 1;
  return { a, b, c, d: zeros(1, 1) };
}

describe('frequency response', () => {
  it.each([1, 3, 12])('of a chain of %i lags is k/(1 + jωT)^n', (n) => {
    const plant = chain(n, 120, -0.7);
    const g = frequencyResponse(plant);
    for (const w of [1e-5, 1e-3, 8e-3, 5e-2]) {
      let exact = { re: -0.7, im: 0 };
      for (let k = 0; k < n; k++) exact = over(exact, { re: 1, im: w * 120 });
      const [seen] = g(w);
      const size = Math.hypot(exact.re, exact.im);
      expect(Math.hypot(seen.re - exact.re, seen.im - exact.im)).toBeLessThan(1e-10 * size + 1e-15);
    }
    expect(restGains(plant)?.[0][0]).toBeCloseTo(-0.7, 12);
  });

  it('steps of a chain follow Erlang: 1 − e^{−t/T}·Σ (t/T)^i/i!', () => {
    const t = 300;
    let sum = 0;
    let term = 1;
    for (let i = 0; i < 3; i++) {
      sum += term;
      term *= t / 120 / (i + 1);
    }
    expect(stepGains(chain(3, 120, 2), t)[0]).toBeCloseTo(2 * (1 - Math.exp(-t / 120) * sum), 12);
  });

  it('of a large plant survives its reduction where loops work', () => {
    const plant = chain(200, 20, 1);
    const small = reduced(plant);
    expect(small.a.n).toBeLessThan(60);
    const [g, s] = [frequencyResponse(plant), frequencyResponse(small)];
    for (const w of [1e-5, 1e-4, 5e-4, 1e-3]) {
      const [a, b] = [g(w)[0], s(w)[0]];
      expect(Math.hypot(a.re - b.re, a.im - b.im)).toBeLessThan(1e-3);
    }
  });
});

describe('dense algebra', () => {
  const a = { n: 3, m: 3, a: Float64Array.of(0, 1, 0, 4, -2, 1, 1e-3, 0, -5) };
  it('the exponential agrees with an independent one, and e^A·e^−A = 1', () => {
    const e = exponential(a);
    const other = expm(
      new Matrix([
        [0, 1, 0],
        [4, -2, 1],
        [1e-3, 0, -5],
      ]),
    );
    for (let i = 0; i < 9; i++) expect(e.a[i]).toBeCloseTo(other.get(Math.floor(i / 3), i % 3), 12);
    const back = multiply(e, exponential({ ...a, a: a.a.map((v) => -v) }));
    back.a.forEach((v, i) => {
      expect(v).toBeCloseTo(identity(3).a[i], 11);
    });
  });
  it('solves with a zero on the diagonal, and says where it cannot', () => {
    const x = solve(a, { n: 3, m: 1, a: Float64Array.of(1, 2, 3) });
    const back = multiply(a, x ?? zeros(3, 1));
    [1, 2, 3].forEach((v, i) => {
      expect(back.a[i]).toBeCloseTo(v, 12);
    });
    expect(solve(zeros(2), zeros(2, 1))).toBeNull();
    expect(scale(times({ re: 0, im: 1 }, { re: 0, im: 1 }), 2)).toEqual({ re: -2, im: 0 });
  });
});

import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import { describe, expect, test } from 'vitest';
import { assemble, type Plant } from '../../src/plant/assemble.ts';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { slowModes } from '../../src/solve/modes.ts';
import type { F } from '../../src/solve/system.ts';
import { steadyOf } from '../../src/study/run.ts';
import { cascade, crossCurrent } from '../study/cascade.ts';
import { scenario } from '../support/plants.ts';

/** Places that move: not totals, held ones, or the one of a closed set that follows from the others. */
const moving = ({ system }: Plant): number[] =>
  system.places.flatMap((q, i) => {
    const row = system.steady[i];
    const counts = q.kind !== 'total' && row !== 'hold' && !(typeof row === 'object' && 'keepsSumOf' in row);
    return counts ? [i] : [];
  });

/** The Jacobian over these places, dense; a place that follows from a kept sum is put in as minus its fellows. */
function dense(plant: Plant, x: F): Matrix {
  const { system, inputs, parameters } = plant;
  const values = new Float64Array(system.A.column.length);
  system.jacobian(x, inputs, parameters, values);
  const n = x.length;
  const full = Matrix.zeros(n, n);
  for (let i = 0; i < n; i++)
    for (let k = system.A.rowStart[i]; k < system.A.rowStart[i + 1]; k++)
      full.set(i, system.A.column[k], values[k]);
  system.steady.forEach((row, r) => {
    if (typeof row !== 'object' || !('keepsSumOf' in row)) return;
    for (const m of row.keepsSumOf)
      if (m !== r) for (let i = 0; i < n; i++) full.set(i, m, full.get(i, m) - full.get(i, r));
  });
  const list = moving(plant);
  return full.selection(list, list);
}

function eigenvalues(m: Matrix): { re: number; im: number }[] {
  const e = new EigenvalueDecomposition(m);
  return e.realEigenvalues
    .map((re, i) => ({ re, im: e.imaginaryEigenvalues[i] }))
    .sort((a, b) => Math.hypot(a.re, a.im) - Math.hypot(b.re, b.im));
}

const modesOf = (s: Scenario, count: number) => {
  const plant = assemble({ ...s, upsets: [] });
  const { state } = steadyOf(plant);
  return { plant, state, modes: slowModes(plant.system, state, plant.inputs, plant.parameters, count) };
};

describe('slowest modes', () => {
  test.each(['saltbush-copper', 'ten', 'wattle-acid-ratio', 'wattle-acid-table'])(
    'of %s are the eigenvalues of the dense Jacobian nearest to zero',
    (name) => {
      const { plant, state, modes } = modesOf(scenario(name), 6);
      const known = eigenvalues(dense(plant, state)).filter((q) => q.im >= 0);
      const own = [...modes].sort(
        (a, b) => Math.hypot(a.rate, a.frequency) - Math.hypot(b.rate, b.frequency),
      );
      expect(own).toHaveLength(6);
      own.forEach((m, i) => {
        const gap = (q: { re: number; im: number }): number =>
          Math.hypot(m.rate - q.re, m.frequency - q.im) / Math.hypot(q.re, q.im);
        // The slowest in their order. Chains of equal vessels make multiple eigenvalues farther out, which fall apart by
        // round-off in either program, each in its own way.
        if (i < 2) expect(gap(known[i]), `${i}`).toBeLessThan(1e-8);
        expect(Math.min(...known.map(gap)), `${i}`).toBeLessThan(1e-3);
        expect(m.rate).toBeLessThan(0);
        expect(m.residual).toBeLessThan(1e-9);
      });
    },
  );

  test('the shape v of a mode satisfies A·v = λ·v', () => {
    const { plant, state, modes } = modesOf(scenario('saltbush-copper'), 4);
    const a = dense(plant, state);
    const list = moving(plant);
    for (const { rate, frequency, shape } of modes) {
      const [re, im] = [shape.re, shape.im].map((v) => Matrix.columnVector(list.map((i) => v[i])));
      // The sign of the imaginary part is that of one of the pair.
      const off = [1, -1].map((sign) => {
        const left = a.mmul(re);
        const right = Matrix.sub(Matrix.mul(re, rate), Matrix.mul(im, sign * frequency));
        return Matrix.sub(left, right).norm() / Math.max(left.norm(), 1e-300);
      });
      expect(Math.min(...off)).toBeLessThan(1e-5);
    }
  });

  test('equal trains have equal modes, and none is lost', () => {
    const law = { law: 'ratio', ratio: 1 } as const;
    const s = crossCurrent({
      stages: 3,
      aqueous: 0.02,
      organic: 0.02,
      feed: 4,
      law,
      transfer: { given: 'efficiency', efficiency: 0.9 },
      parts: 2,
    });
    const { modes } = modesOf(s, 6);
    // With D = 1 and full exchange both phases of a mixer wash out together, in one residence time of a minute.
    const known = { re: -1 / 60 };
    // A triple eigenvalue falls apart by the cube root of round-off; a pair that comes of it stands for two.
    const own = modes.filter((m) => Math.abs(m.rate / known.re - 1) < 1e-3);
    expect(own.reduce((n, m) => n + (m.frequency > 0 ? 2 : 1), 0)).toBe(3);
  });

  test.each([
    { N: 3, E: 1.5 },
    { N: 5, E: 1 },
    { N: 10, E: 1.5 },
  ])('equilibrium stages, N = $N, E = $E: all eigenvalues in closed form', ({ N, E }) => {
    // λ_k = [−(L + mV) + 2√(L·mV)·cos(kπ/(N + 1))]/(h + mH), the tridiagonal Toeplitz matrix: D. Kulkarni, D. Schmidt and
    // S.-K. Tsui, Linear Algebra Appl. 297, 63 (1999); S. Noschese, L. Pasquini and L. Reichel, Numer. Linear Algebra
    // Appl. 20, 302 (2013). Here h = L·100 s, mH = E·h.
    const unit = 100;
    const s = cascade({
      stages: N,
      aqueous: 0.01,
      organic: 0.01 * E,
      feed: 1,
      law: { law: 'ratio', ratio: 1 },
      transfer: { given: 'ka', ka: 1e7, fixed: false },
      mixer: 0.01 * unit * (1 + E),
      layers: { aqueous: 1e-8, organic: 1e-8 },
    });
    const { modes } = modesOf(s, N);
    for (let k = 1; k <= N; k++) {
      const known = (-(1 + E) + 2 * Math.sqrt(E) * Math.cos((k * Math.PI) / (N + 1))) / (1 + E) / unit;
      expect(Math.abs(modes[k - 1].rate / known - 1), `k = ${k}`).toBeLessThan(1e-5);
    }
  });

  test('a drain that a closed loop does not have is none of its modes', () => {
    const { plant, state, modes } = modesOf(scenario('saltbush-vessels'), 5);
    const slowest = Math.max(...modes.map((m) => m.rate));
    expect(slowest).toBeLessThan(-1e-5);
    const known = eigenvalues(dense(plant, state)).filter((q) => Math.hypot(q.re, q.im) > 1e-9);
    expect(Math.abs(slowest / Math.max(...known.map((q) => q.re)) - 1)).toBeLessThan(1e-4);
  });
});

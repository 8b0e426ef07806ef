import { describe, expect, it } from 'vitest';
import { type Steady, steadyState } from '../../src/solve/steady.ts';
import { dense, type Equations, idle, none, options, solve } from './problems/dense.ts';
import { tanks } from './problems/tanks.ts';

const steady = (e: Equations, start: readonly number[], w: readonly number[] = []): Steady =>
  steadyState(dense(e), Float64Array.from(w), none, Float64Array.from(start));

function expectFound(s: Steady, exact: readonly number[], digits = 1e-11): void {
  if (!s.found) throw new Error(`not found: ${s.reason} in ${s.place}`);
  exact.forEach((v, i) => {
    expect(Math.abs(s.state[i] - v) / (1 + Math.abs(v)), `place ${i + 1}: ${s.state[i]}`).toBeLessThan(
      digits,
    );
  });
  expect(s.residual).toBeLessThan(1e-10);
  expect(s.iterations).toBeLessThan(40);
}

/** A second-order reaction in a stirred tank: x' = (w − x)/τ − k·x². */
const reactor: Equations = {
  name: 'reactor',
  size: 1,
  inputs: 1,
  rhs: ([x], [w]) => [(w - x) / 100 - 0.03 * x * x],
  jacobian: ([x]) => [[-0.01 - 0.06 * x]],
};

/** Three steady states, −1, 0 and 1; the middle one repels over an hour. */
const bistable: Equations = {
  name: 'bistable',
  size: 1,
  rhs: ([x]) => [(x - x ** 3) / 3600],
  jacobian: ([x]) => [[(1 - 3 * x * x) / 3600]],
};

describe('steady state', () => {
  it.each([1, 2, 3, 40])('of %i tanks is their feed', (n) => {
    expectFound(steady(tanks(n, 600), new Array(n).fill(0), [2.5]), new Array(n).fill(2.5));
    expectFound(steady(tanks(n, 600), new Array(n).fill(2.5), [2.5]), new Array(n).fill(2.5));
  });

  it('of a reaction is the root of its balance', () => {
    for (const feed of [0, 1e-6, 1, 1e4]) {
      const exact = (-1 + Math.sqrt(1 + 4 * 3 * feed)) / 6;
      expectFound(steady(reactor, [0], [feed]), [exact]);
      expectFound(steady(reactor, [7], [feed]), [exact]);
    }
  });

  it('is the one that the system itself would come to', () => {
    for (const [start, end] of [
      [0.1, 1],
      [0.5, 1],
      [5, 1],
      [-0.1, -1],
      [-30, -1],
    ]) {
      expectFound(steady(bistable, [start]), [end]);
      const run = solve(dense(bistable), [start], idle([0, 1e6]), options('rodas5p', 1e-9));
      expect(run.state[0]).toBeCloseTo(end, 8);
    }
  });

  it('is at rest in the dynamic equations', () => {
    const s = steady(reactor, [0], [3]);
    if (!s.found) throw new Error(s.reason);
    const run = solve(dense(reactor), [...s.state], idle([0, 1e7], [3]), options('rodas5p', 1e-9));
    expect(Math.abs(run.state[0] - s.state[0])).toBeLessThan(1e-10);
    expect(run.work.steps).toBeLessThan(20);
  });

  it('finds slow and fast places together', () => {
    const taus = [1e-2, 1, 1e4, 1e8];
    const mixed: Equations = {
      name: 'mixed',
      size: 4,
      rhs: (x) => taus.map((tau, i) => ((x[i - 1] ?? 1) - x[i]) / tau),
      jacobian: () => taus.map((tau, i) => taus.map((_, j) => (j === i ? -1 : j === i - 1 ? 1 : 0) / tau)),
    };
    expectFound(steady(mixed, [0, 0, 0, 0]), [1, 1, 1, 1]);
  });
});

describe('rows of their own kind', () => {
  it('hold: a total keeps its value to the last digit, and is not judged', () => {
    const counted: Equations = {
      ...reactor,
      size: 2,
      rhs: ([x], [w]) => [(w - x) / 100, x],
      jacobian: () => [
        [-0.01, 0],
        [1, 0],
      ],
      places: [{}, { kind: 'total' }],
      steady: ['free', 'hold'],
    };
    const s = steady(counted, [0, 123.456], [4]);
    expectFound(s, [4, 123.456]);
    if (s.found) expect(s.state[1]).toBe(123.456);
  });

  it('keepsSumOf: a closed set comes to equilibrium without gain or loss', () => {
    // 2A ⇌ B with K = b/a² = 1/2; a + 2b is kept, which the sum over (A, B, B) says.
    const closed: Equations = {
      name: 'closed',
      size: 2,
      rhs: ([a, b]) => [2e-3 * (2 * b - a * a), -1e-3 * (2 * b - a * a)],
      jacobian: ([a]) => [
        [-4e-3 * a, 4e-3],
        [2e-3 * a, -2e-3],
      ],
      steady: ['free', { keepsSumOf: [0, 1, 1] }],
    };
    // a + a² = 6
    expectFound(steady(closed, [6, 0]), [2, 2]);
    expectFound(steady(closed, [0, 3]), [2, 2]);
    expectFound(steady(closed, [0, 0]), [0, 0]);
  });

  it('followsVolume: the contents of a drifting volume are stationary in composition', () => {
    // Fed at 3 with 5, drawn at 2, decaying at k: c = 3·5/(3 + k·V), the volume staying where it is.
    const k = 1e-3;
    const drifting: Equations = {
      name: 'drifting',
      size: 2,
      rhs: ([v, m]) => [3 - 2, 3 * 5 - (2 * m) / v - k * m],
      jacobian: ([v, m]) => [
        [0, 0],
        [(2 * m) / (v * v), -2 / v - k],
      ],
      places: [{ kind: 'volume' }, {}],
      steady: ['hold', { followsVolume: 0 }],
    };
    for (const v of [10, 1000]) expectFound(steady(drifting, [v, 0]), [v, (15 / (3 + k * v)) * v]);
  });
});

describe('without a steady state', () => {
  // Beside a place that comes to rest at √2, where no double has a residual of zero.
  const beside = (
    rhs: Equations['rhs'],
    jacobian: Equations['jacobian'],
    floor: number | null = null,
  ): Equations => ({
    name: 'beside',
    size: 2,
    rhs: (x, w) => [...rhs(x.subarray(1), w), ...[(2 - x[0] * x[0]) / 60]].reverse(),
    jacobian: (x, w) => [
      [-x[0] / 30, 0],
      [0, jacobian(x.subarray(1), w)[0][0]],
    ],
    places: [{ path: 'calm' }, { path: 'restless', floor }],
  });

  it.each<[string, Equations]>([
    [
      'gains at a constant rate',
      beside(
        () => [1e-3],
        () => [[0]],
      ),
    ],
    [
      'loses at a constant rate until it is empty',
      beside(
        () => [-1e-3],
        () => [[0]],
        0,
      ),
    ],
    [
      'gains ever more slowly',
      beside(
        ([x]) => [1e-3 * Math.exp(-x)],
        ([x]) => [[-1e-3 * Math.exp(-x)]],
      ),
    ],
    [
      'runs away',
      beside(
        ([x]) => [1e-3 * (1 + x * x)],
        ([x]) => [[2e-3 * x]],
      ),
    ],
  ])('a place that %s is named', (_, e) => {
    const s = steady(e, [0, 1]);
    expect(s).toMatchObject({ found: false, place: 'restless', reason: 'the balances do not come to rest' });
  });

  it('a place without a finite balance is named', () => {
    const e = beside(
      ([x]) => [Math.sqrt(-1 - x * x)],
      () => [[0]],
    );
    const reason = 'the balances have no finite value at the start';
    expect(steady(e, [0, 1])).toMatchObject({ found: false, place: 'restless', reason });
  });
});

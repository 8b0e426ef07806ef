import { describe, expect, it } from 'vitest';
import { margins } from '../../src/control/margins.ts';
import { OpenLoops, SampledPlant } from '../../src/control/sampled.ts';
import type { PidSettings } from '../../src/control/spec.ts';
import { firstOrder, follow, spec as loopSpec } from './first-order.ts';

/*
 * The response in z and the loop that runs are written apart from each other: the gain at which the one says that the
 * loop swings for ever is where the other's swings neither grow nor die.
 */
const T = 60;
const plant = {
  a: { n: 1, m: 1, a: Float64Array.of(-1 / T) },
  b: { n: 1, m: 1, a: Float64Array.of(1 / T) },
  c: { n: 1, m: 1, a: Float64Array.of(1) },
  d: { n: 1, m: 1, a: Float64Array.of(0) },
};

interface Case {
  readonly delay: number;
  readonly takes: 'grab' | 'composite';
  readonly runs: 'on each result' | 'scan';
  readonly settings: Partial<PidSettings>;
}
const cases: [string, Case][] = [
  ['grab, on each result', { delay: 6, takes: 'grab', runs: 'on each result', settings: {} }],
  ['grab, late by more than an interval', { delay: 23, takes: 'grab', runs: 'on each result', settings: {} }],
  ['grab, on a scan', { delay: 6, takes: 'grab', runs: 'scan', settings: {} }],
  ['composite, on each result', { delay: 6, takes: 'composite', runs: 'on each result', settings: {} }],
  ['composite, on a scan', { delay: 3, takes: 'composite', runs: 'scan', settings: {} }],
  ['with derivative', { delay: 6, takes: 'grab', runs: 'on each result', settings: { derivativeTime: 8 } }],
  ['with a filter', { delay: 6, takes: 'grab', runs: 'on each result', settings: { filter: 15 } }],
];

/** Largest |y| in the last third over the largest in the third before. */
function growth(c: Case, gain: number): number {
  const plan = loopSpec({
    runs: c.runs,
    settings: { gain, integralTime: 70, ...c.settings },
    analyser: { every: 10, delay: c.delay, takes: c.takes },
    move: { low: -1e30, high: 1e30 },
  });
  const times = Array.from({ length: 1500 }, (_, k) => 2 * k + 0.5);
  const load = [{ input: 1, times: [0, 12, 12], values: [1, 1, 0] }];
  const y = follow(firstOrder(1, T), plan, times, { load }).at.map((q) => Math.abs(q[0]));
  return Math.max(...y.slice(1000)) / Math.max(...y.slice(500, 1000));
}

describe('the gain margin in z is where the running loop swings for ever', () => {
  it.each(cases)('%s', (_, c) => {
    const loops = new OpenLoops(
      new SampledPlant(plant, { every: 10, delay: c.delay, takes: c.takes, runs: c.runs }),
    );
    const base: PidSettings = {
      sense: -1,
      gain: 1,
      integralTime: 70,
      derivativeTime: 0,
      filter: 0,
      setPointWeight: 1,
      ...c.settings,
    };
    const m = margins(loops.loop(base), 1e-4, loops.top);
    expect(m.stable).toBe(true);
    expect(growth(c, 0.985 * m.gain)).toBeLessThan(0.9);
    expect(growth(c, 1.015 * m.gain)).toBeGreaterThan(1.1);
  });
});

describe('FOPDT with PI, Ti = T, K·θ = 0.5, sampled fast: the continuous loop', () => {
  it('set-point step: y(2, 3, 4, 5, 6 θ) = 0.5, 0.875, 1.020833, 1.039063, 1.021094', () => {
    // y′ = K·e(t − θ), piecewise polynomials; θ = 1, K = Kc/T.
    const plan = loopSpec({
      runs: 'scan',
      settings: { gain: 0.5 * T, integralTime: T },
      analyser: { every: 0.01, first: 0.01, delay: 1 },
      setPoint: { times: [0, 0.005, 0.005], values: [0, 0, 1] },
    });
    const { at } = follow(firstOrder(1, T), plan, [1.01, 2.01, 3.01, 4.01, 5.01]);
    // The dead time is in the measurement here: y leads the textbook's output by θ.
    [0.5, 0.875, 1.020833, 1.039063, 1.021094].forEach((y, k) => {
      expect(Math.abs(at[k][0] - y)).toBeLessThan(0.012);
    });
  });

  it('overshoots by 4.052 % at 4.740 θ, with IE 2 θ and IAE 2.16869 θ, as the interval goes to nothing', () => {
    const end = 24;
    const figures = (every: number): readonly number[] => {
      const plan = loopSpec({
        runs: 'scan',
        settings: { gain: 0.5 * T, integralTime: T },
        analyser: { every, first: every, delay: 1 },
        setPoint: { times: [0, 1e-6, 1e-6], values: [0, 0, 1] },
      });
      const step = 0.01;
      const times = Array.from({ length: end / step }, (_, k) => (k + 1) * step);
      const y = follow(firstOrder(1, T), plan, times, { end }).at.map((q) => q[0]);
      const top = y.indexOf(Math.max(...y));
      // The vertex of the parabola through the highest point and its neighbours.
      const [a, b, c] = [y[top - 1], y[top], y[top + 1]];
      const shift = (a - c) / (2 * (a - 2 * b + c));
      // What is measured comes θ later: until then the error is 1.
      const sum = (f: (e: number) => number): number =>
        1 + step * (f(1) / 2 + y.reduce((s, v) => s + f(1 - v), 0) - f(1 - y[y.length - 1]) / 2);
      return [b - ((a - c) * shift) / 4 - 1, times[top] + shift * step + 1, sum((e) => e), sum(Math.abs)];
    };
    const [coarse, fine] = [figures(0.04), figures(0.02)];
    const limit = fine.map((v, k) => 2 * v - coarse[k]);
    [0.04052, 4.74, 2, 2.16869].forEach((v, k) => {
      expect(Math.abs(limit[k] - v)).toBeLessThan([1e-4, 0.02, 1e-3, 1e-3][k]);
    });
  });
});

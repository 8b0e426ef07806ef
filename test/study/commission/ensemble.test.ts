import { describe, expect, test } from 'vitest';
import { commission } from '../../../src/study/commission/commission.ts';
import { ensemble } from '../../../src/study/commission/ensemble.ts';
import { latinHypercube } from '../../../src/study/commission/hypercube.ts';
import type { Compute } from '../../../src/study/commission/pool.ts';
import { quantile, rankCorrelation, ranks } from '../../../src/study/commission/ranks.ts';
import { samples } from '../../../src/study/commission/sample.ts';
import { usual } from '../../../src/study/run.ts';
import { scenario } from '../../support/plants.ts';

/** All batches in this thread, in an order of one's own. */
const here =
  (order: (n: number) => number[]): Compute =>
  async (batches, done) => {
    for (const b of order(batches.length)) done(b, samples(batches[b]));
  };
const forwards = here((n) => Array.from({ length: n }, (_, i) => i));
const backwards = here((n) => Array.from({ length: n }, (_, i) => n - 1 - i));

describe('a Latin hypercube', () => {
  test('has each input once in each stratum, is the same for the same seed, and another for another', () => {
    const cube = latinHypercube(40, 3, 7);
    for (let k = 0; k < 3; k++) {
      const strata = cube.map((row) => Math.floor(40 * row[k])).sort((a, b) => a - b);
      expect(strata).toEqual(Array.from({ length: 40 }, (_, i) => i));
    }
    expect(latinHypercube(40, 3, 7)).toEqual(cube);
    expect(latinHypercube(40, 3, 8)).not.toEqual(cube);
    // Inputs are paired by chance: with 40 samples |r| beyond 0.5 would be no chance.
    expect(
      Math.abs(
        rankCorrelation(
          cube.map((r) => r[0]),
          cube.map((r) => r[1]),
        ),
      ),
    ).toBeLessThan(0.5);
  });
});

describe('ranks and quantiles', () => {
  test('equal values share a rank; correlation is 1, −1, or a known figure', () => {
    expect(ranks([3, 1, 3, 2])).toEqual([3.5, 1, 3.5, 2]);
    expect(rankCorrelation([1, 2, 3, 4], [1, 4, 9, 16])).toBeCloseTo(1, 12);
    expect(rankCorrelation([1, 2, 3, 4], [8, 4, 2, 1])).toBeCloseTo(-1, 12);
    // 1 − 6·Σd²/(n(n² − 1)) with d = (0, 1, 1, 0): 0.8.
    expect(rankCorrelation([1, 2, 3, 4], [10, 30, 20, 40])).toBeCloseTo(0.8, 12);
    expect(rankCorrelation([1, 2, 3], [5, 5, 5])).toBe(0);
  });

  test('quantiles lie on straight lines between order statistics', () => {
    expect(quantile([1, 2, 3, 4, 5], 0.5)).toBe(3);
    expect(quantile([1, 2, 3, 4, 5], 0.9)).toBeCloseTo(4.6, 12);
    expect(quantile([1, 2, Number.POSITIVE_INFINITY], 0.9)).toBe(Number.POSITIVE_INFINITY);
  });
});

describe('an ensemble', () => {
  const s = scenario('saltbush-startup');
  const found = commission(s, usual);
  const fan = found.fan as NonNullable<typeof found.fan>;
  const settings = { ...usual, ...fan, runs: 12, seed: 3 };
  const uncertain = s.commissioning?.uncertain ?? [];

  test('is the same whoever computes what, and when', async () => {
    const one = await ensemble(found.proper, uncertain, settings, forwards);
    const other = await ensemble(found.proper, uncertain, settings, backwards);
    expect(other).toEqual(one);
    expect(one.runs).toBe(12);
    expect(one.unsettled).toBe(0);
    const { p10, p50, p90 } = one.steady as { p10: number; p50: number; p90: number };
    expect(p10).toBeLessThan(p50);
    expect(p50).toBeLessThan(p90);
    expect(one.fan.p50).toHaveLength(fan.times.length);
    one.fan.p50.forEach((v, i) => {
      expect(one.fan.p10[i]).toBeLessThanOrEqual(v);
      expect(one.fan.p90[i]).toBeGreaterThanOrEqual(v);
    });
  });

  test('with ranges next to nothing is the start-up as stated', async () => {
    const narrow = uncertain.map((u) => ({ ...u, share: 1e-9 }));
    const one = await ensemble(found.proper, narrow, { ...settings, runs: 3 }, forwards);
    for (const t of Object.values(one.steady))
      expect(Math.abs((t as number) / (found.steady as number) - 1)).toBeLessThan(1e-5);
    const { times, rows } = found.run.records;
    const output = found.plant.system.outputs.findIndex((o) => o.path === fan.shown);
    const end = rows[times.length - 1][output];
    expect(Math.abs(one.fan.p50[fan.times.length - 1] / end - 1)).toBeLessThan(0.01);
  });

  test('tells what matters: of a fuller tank the start-up is slower', async () => {
    const only = [{ path: 'organic tank.filled', share: 0.3 }];
    const one = await ensemble(found.proper, only, { ...settings, runs: 8 }, forwards);
    expect(one.influence).toEqual([{ path: 'organic tank.filled', correlation: 1 }]);
  });

  test('counts plants that cannot be started apart, and keeps what was done when it is stopped', async () => {
    const stop = new AbortController();
    const early: Compute = async (batches, done) => {
      done(0, samples(batches[0]));
      stop.abort();
    };
    const part = await ensemble(found.proper, uncertain, { ...settings, stop: stop.signal }, early);
    expect(part).toMatchObject({ asked: 12, runs: 5, failed: 0 });
    const broken: Compute = async (batches, done) => {
      for (const [b, q] of batches.entries())
        done(
          b,
          q.factors.map(() => ({ steady: null, onSpec: null, series: [], failed: 'too small' })),
        );
    };
    const none = await ensemble(found.proper, uncertain, settings, broken);
    expect(none).toMatchObject({ runs: 12, failed: 12, reason: 'too small', steady: { p50: null } });
  });
});

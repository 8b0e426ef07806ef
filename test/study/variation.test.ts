import { describe, expect, it } from 'vitest';
import { run } from '../../src/study/run.ts';
import { normalNumbers, realised } from '../../src/study/variation.ts';
import { sound } from '../scenario/wrong.ts';
import { fromText } from '../support/plants.ts';

const variation = {
  quantity: 'liquor.copper',
  base: 5,
  deviation: 0.2,
  correlation: 7200,
  every: 720,
  seed: 3,
  words: 'varies',
};

describe('a feed that varies at random', () => {
  it('has the stated mean, spread and correlation', () => {
    const { how } = realised(variation, 4000 * 7200);
    const values = 'follow' in how ? how.follow.values : [];
    const n = values.length;
    const mean = values.reduce((s, v) => s + v, 0) / n;
    const covariance = (lag: number): number =>
      values.slice(lag).reduce((s, v, i) => s + (v - mean) * (values[i] - mean), 0) / (n - lag);
    // 4000 correlation times hold 2000 independent values: 3 standard errors of mean, spread and correlation.
    expect(Math.abs(mean - 5)).toBeLessThan((3 * 0.2) / Math.sqrt(2000));
    expect(Math.abs(Math.sqrt(covariance(0)) / 0.2 - 1)).toBeLessThan(3 / Math.sqrt(2 * 2000));
    for (const lag of [1, 5, 10])
      expect(Math.abs(covariance(lag) / covariance(0) - Math.exp(-lag / 10))).toBeLessThan(
        3 / Math.sqrt(2000),
      );
  });

  it('is the same for the same seed and another for another', () => {
    const values = (seed: number): unknown => realised({ ...variation, seed }, 72000).how;
    expect(values(3)).toEqual(values(3));
    expect(values(3)).not.toEqual(values(4));
    const normal = normalNumbers(1);
    expect(Array.from({ length: 1000 }, normal).every(Number.isFinite)).toBe(true);
  });

  it('moves the outlet of a run, about where it would be without', () => {
    const text = sound.replace(/upsets:\n.*\n/, '').replace('horizon: 10 h', 'start: steady\nhorizon: 10 h');
    const varied = `${text}variation: [{change: liquor.copper, deviation: 5 %, correlation_time: 2 h, seed: 2}]\n`;
    const [calm, moved] = [text, varied].map((t) => run(fromText(t)));
    const at = calm.plant.system.outputs.findIndex((o) => o.path === 'raffinate.copper');
    const spread = (r: typeof calm): number => {
      const values = r.records.rows.map((row) => row[at]);
      return Math.max(...values) - Math.min(...values);
    };
    expect(spread(calm)).toBeLessThan(1e-8);
    expect(spread(moved)).toBeGreaterThan(0.01);
    expect(moved.shades).toEqual([]);
    expect(moved.courses.map((c) => c.quantity)).toEqual(['liquor.copper']);
  });
});

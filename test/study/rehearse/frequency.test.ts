import { describe, expect, it } from 'vitest';
import type { Scenario } from '../../../src/scenario/scenario.ts';
import { frequencyView } from '../../../src/study/rehearse/frequency.ts';
import { ground } from '../../../src/study/rehearse/ground.ts';
import { judge } from '../../../src/study/rehearse/judge.ts';
import { followedOutputs } from '../../../src/study/rehearse/rehearse.ts';
import { usual } from '../../../src/study/run.ts';
import { scenario } from '../../support/plants.ts';
import { STAY, tanksInSeries } from './tanks-in-series.ts';

describe('the frequency view', () => {
  it.each([1, 3, 6])('of %i tanks in series is (1 + jωτ)^−n', (n) => {
    const s = tanksInSeries(
      n,
      `horizon: 4 h
upsets: [{at: 1 h, change: brine.salt, by: +20 %}]
limits: [{keep: outlet.salt, below: 5.5 g/L}]
`,
    );
    const f = frequencyView(ground(s, usual), 0);
    expect(f).not.toBeNull();
    f?.periods.forEach((period, i) => {
      const x = ((2 * Math.PI) / period) * STAY;
      expect(f.ratios[i]).toBeCloseTo((1 + x * x) ** (-n / 2), 9);
      expect(f.lags[i] / ((n * Math.atan(x) * period) / (2 * Math.PI))).toBeCloseTo(1, 6);
    });
    expect(f?.lasting).toBeCloseTo(1, 6);
    // ±1 g/L reaches the room of 0.5 g/L where (1 + x²)^(−n/2) = 1/2; so does half of what lasts.
    const x = Math.sqrt(4 ** (1 / n) - 1);
    expect((f?.reaches ?? 0) / ((2 * Math.PI * STAY) / x)).toBeCloseTo(1, 2);
    expect((f?.half ?? 0) / ((2 * Math.PI * STAY) / x)).toBeCloseTo(1, 2);
  });

  it('is what a long run with a small swing of the feed shows, in the closed copper circuit', () => {
    const period = 4 * 3600;
    const cycles = 12;
    const corners = 64;
    const amplitude = 0.01;
    const times = Array.from({ length: cycles * corners + 1 }, (_, k) => (k * period) / corners);
    const values = times.map((t) => 5.2 + amplitude * Math.sin((2 * Math.PI * t) / period));
    const made: Scenario = {
      ...scenario('saltbush-copper'),
      start: 'steady',
      horizon: cycles * period,
      upsets: [
        {
          at: 0,
          quantity: 'leach liquor.copper',
          how: { follow: { times, values } },
          over: 0,
          lasts: null,
          words: 'swing',
        },
      ],
    };
    const g = ground(made, usual);
    const how = { ...usual, tolerance: 1e-9 };
    const { courses } = judge(g, g.changes, how, followedOutputs(g));
    const output = g.plant.system.outputs.findIndex((o) => o.path === 'raffinate.copper');
    // Fourier's coefficients over the last two periods; straight lines between n corners pass sinc²(π/n) of a sine.
    const steps = 4000;
    const from = (cycles - 2) * period;
    let [sin, cos] = [0, 0];
    for (let k = 0; k < steps; k++) {
      const t = from + ((k + 0.5) * 2 * period) / steps;
      const v = courses.value(output, t);
      sin += (2 / steps) * v * Math.sin((2 * Math.PI * t) / period);
      cos += (2 / steps) * v * Math.cos((2 * Math.PI * t) / period);
    }
    const passed = (Math.sin(Math.PI / corners) / (Math.PI / corners)) ** 2;
    const view = frequencyView(g, 0);
    const at = (list: readonly number[]): number => {
      const k = (view?.periods ?? []).findIndex((p) => p > period);
      const [a, b] = [view?.periods[k - 1] ?? 0, view?.periods[k] ?? 1];
      return list[k - 1] + ((list[k] - list[k - 1]) * Math.log(period / a)) / Math.log(b / a);
    };
    expect(Math.hypot(sin, cos) / amplitude / passed / at(view?.ratios ?? [])).toBeCloseTo(1, 2);
    const lag = (-Math.atan2(cos, sin) / (2 * Math.PI)) * period;
    expect(lag / at(view?.lags ?? [])).toBeCloseTo(1, 2);
  });
});

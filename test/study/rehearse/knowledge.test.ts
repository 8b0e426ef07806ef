import { describe, expect, it } from 'vitest';
import { cumulativeNormal } from '../../../src/study/rehearse/readings.ts';
import { rehearse } from '../../../src/study/rehearse/rehearse.ts';
import { tanksInSeries } from './tanks-in-series.ts';

const HOUR = 3600;
const known = (instruments: string, upset = '{at: 1 h, change: brine.salt, by: +3 g/L}') =>
  rehearse(
    tanksInSeries(
      1,
      `horizon: 12 h
upsets: [${upset}]
limits: [{keep: outlet.salt, below: 6 g/L}]
analysers: {${instruments}}
answers: {dip: {start: after upset, moves: [{change: brine.salt, by: -2.5 g/L}]}}
`,
    ),
  );

describe('who can know', () => {
  it('a feed analyser without noise: at once at best, an interval later at worst, and the delay', () => {
    const [k] = known('AT: {of: brine.salt, warn: 6 g/L, every: 30 min, delay: 10 min}').knowledge;
    expect((k.earliest ?? 0) - HOUR).toBeLessThan(600 + 2);
    expect((k.earliest ?? 0) - HOUR).toBeGreaterThanOrEqual(600);
    expect((k.latest ?? 0) - HOUR).toBeGreaterThan(600 + 1800 - 2);
    expect((k.latest ?? 0) - HOUR).toBeLessThanOrEqual(600 + 1800);
  });

  it('an outlet analyser counts from when the outlet passes the level', () => {
    // One tank: 5 + 3·(1 − e^(−t/600)) passes 6.5 at t = 600·ln 2.
    const [k] = known('AT: {of: outlet.salt, warn: 6.5 g/L, every: 10 min, delay: 6 min}').knowledge;
    const passes = HOUR + 600 * Math.LN2;
    expect(Math.abs((k.earliest ?? 0) - passes - 360)).toBeLessThan(3);
    expect(Math.abs((k.latest ?? 0) - passes - 960)).toBeLessThan(3);
  });

  it('a composite tells later, by the mean of what it collected', () => {
    // Mean of a step of 3 that began u ago over an interval T: 3·u/T; above 1 once u > T/3.
    const [k] = known('AT: {of: brine.salt, warn: 6 g/L, every: 30 min, takes: composite}').knowledge;
    expect(Math.abs((k.earliest ?? 0) - HOUR - 600)).toBeLessThan(45);
    expect(Math.abs((k.latest ?? 0) - HOUR - 2400)).toBeLessThan(45);
  });

  it('noise hides an upset at the level for so many results that 95 of 100 have seen it', () => {
    // The value rises by 3 to exactly the level: each result warns as likely as not, 1 − 2^(−k) ≥ 0.95 for k = 5.
    const [k] = known('AT: {of: brine.salt, warn: 8 g/L, every: 10 min, noise: 0.1 g/L}').knowledge;
    expect((k.latest ?? 0) - (k.earliest ?? 0)).toBeLessThanOrEqual(600);
    expect((k.latest ?? 0) - HOUR).toBeGreaterThan(2400);
    expect((k.latest ?? 0) - HOUR).toBeLessThanOrEqual(3000);
    expect(k.falseAlarms).toBeLessThan(1e-9);
  });

  it('says how often a result warns of nothing, and that a laboratory may miss what has passed', () => {
    const short = '{at: 1 h, change: brine.salt, by: +3 g/L, for: 1 h}';
    const r = known(
      'near: {of: brine.salt, warn: 5.1 g/L, every: 10 min, noise: 0.1 g/L}, laboratory: {of: brine.salt, warn: 6 g/L, every: 4 h, delay: 1 h}',
      short,
    );
    // One standard deviation above: 15.87 of 100.
    expect(r.knowledge[0].falseAlarms).toBeCloseTo(0.1587, 4);
    expect(r.knowledge[1].latest).toBeNull();
    expect(r.knowledge[1].earliest).toBeGreaterThanOrEqual(2 * HOUR);
  });

  it('the distribution function is that of the tables', () => {
    for (const [z, p] of [
      [0, 0.5],
      [1, 0.8413447],
      [-1.959964, 0.025],
      [3, 0.9986501],
    ])
      expect(cumulativeNormal(z)).toBeCloseTo(p, 6);
  });
});

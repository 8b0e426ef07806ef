import { describe, expect, test } from 'vitest';
import type { Change, Limit, Scenario } from '../../src/scenario/scenario.ts';
import type { LimitReport } from '../../src/study/limit-watch.ts';
import { run } from '../../src/study/run.ts';
import { cascade } from './cascade.ts';

/** Flow and residence time of the only vessel that counts: a well-mixed layer behind a mixer of next to nothing. */
const Q = 0.02;
const TAU = 1000;

const change = (at: number, value: number, lasts: number | null = null, over = 0): Change => ({
  at,
  quantity: 'feed.s',
  how: { to: value },
  over,
  lasts,
  words: '',
});
const limit = (value: number, more: Partial<Limit> = {}): Limit => ({
  stream: 'raffinate',
  quantity: 's',
  side: 'below',
  from: 0,
  value,
  ...more,
});

/** A layer of `parts` parts that holds `held` at the start and is fed `feed` and what the changes make of it. */
function vessel(p: {
  held?: number;
  feed?: number;
  parts?: number;
  changes?: Change[];
  limits: Limit[];
}): Scenario {
  const s = cascade({
    stages: 1,
    aqueous: Q,
    organic: Q,
    feed: p.feed ?? 0,
    law: null,
    transfer: { given: 'efficiency', efficiency: 0.9 },
    mixer: 1e-7,
    layers: { aqueous: Q * TAU, organic: 1 },
    parts: p.parts ?? 1,
    horizon: 8 * TAU,
    upsets: p.changes,
    limits: p.limits,
  });
  const [t] = s.trains;
  return { ...s, trains: [{ ...t, initial: { aqueous: [p.held ?? 0], organic: 'as entering' } }] };
}
const reports = (s: Scenario, tolerance = 1e-9): readonly LimitReport[] =>
  run(s, { integrator: 'rodas5p', tolerance }).limits;
const close = (value: number | null, known: number, relative = 1e-7): void => {
  expect(value).not.toBeNull();
  expect(Math.abs((value as number) - known), `${value} against ${known}`).toBeLessThan(
    relative * Math.abs(known),
  );
};

describe('washout c = c₀·e^(−t/τ) through a limit L', () => {
  const [first] = reports(vessel({ held: 10, limits: [limit(4)] }));

  test('is outside from the start until τ·ln(c₀/L)', () => {
    expect(first.atStart).toBe(true);
    expect(first.spells).toHaveLength(1);
    expect(first.spells[0].from).toBe(0);
    close(first.spells[0].to, TAU * Math.log(10 / 4));
    close(first.outside, TAU * Math.log(10 / 4));
  });

  test('lets Q·τ·(c₀ − L − L·ln(c₀/L)) through above the limit', () => {
    close(first.beyond, Q * TAU * (10 - 4 - 4 * Math.log(10 / 4)));
  });

  test('is worst at the start', () => {
    expect(first.worst).toEqual({ value: 10, time: 0 });
  });
});

describe('a step c = c_F·(1 − e^(−t/τ))', () => {
  const [over, never, lower] = reports(
    vessel({ feed: 10, limits: [limit(4), limit(11), limit(4, { side: 'above' })] }),
  );
  const crossing = -TAU * Math.log(1 - 4 / 10);
  const end = 8 * TAU;

  test('breaks the limit at −τ·ln(1 − L/c_F) and is still outside at the end', () => {
    expect(over.atStart).toBe(false);
    expect(over.spells).toHaveLength(1);
    close(over.spells[0].from, crossing);
    expect(over.spells[0].to).toBeNull();
    close(over.outside, end - crossing);
    close(
      over.beyond,
      Q * ((10 - 4) * (end - crossing) - 10 * TAU * (Math.exp(-crossing / TAU) - Math.exp(-8))),
    );
  });

  test('is worst at the end, all outputs of that moment kept', () => {
    close(over.worst.value, 10 * (1 - Math.exp(-8)));
    expect(over.worst.time).toBe(end);
    expect(over.atWorst.length).toBeGreaterThan(4);
    expect(over.atWorst).toContain(over.worst.value);
  });

  test('keeps a limit that it does not reach', () => {
    expect(never.spells).toEqual([]);
    expect(never.outside).toBe(0);
    expect(never.beyond).toBe(0);
    close(never.worst.value, over.worst.value, 1e-12);
  });

  test('a lower limit is broken before the crossing and has no amount beyond', () => {
    expect(lower.atStart).toBe(true);
    close(lower.spells[0].to, crossing);
    close(lower.outside, crossing);
    expect(lower.beyond).toBeNull();
    expect(lower.worst).toEqual({ value: 0, time: 0 });
  });
});

describe('two pulses', () => {
  // While the feed is at 10 the vessel climbs from c to 10 − (10 − c)·e^(−t/τ), then it falls by e in each τ.
  const [report] = reports(
    vessel({ changes: [change(500, 10, 900), change(4000, 10, 1500)], limits: [limit(3)] }),
  );
  const peak1 = 10 * (1 - Math.exp(-0.9));
  const before2 = peak1 * Math.exp(-(4000 - 1400) / TAU);
  const peak2 = 10 - (10 - before2) * Math.exp(-1.5);
  const spells = [
    [500 - TAU * Math.log(1 - 3 / 10), 1400 + TAU * Math.log(peak1 / 3)],
    [4000 + TAU * Math.log((10 - before2) / 7), 5500 + TAU * Math.log(peak2 / 3)],
  ];

  test('are two spells with their exact times', () => {
    expect(report.spells).toHaveLength(2);
    spells.forEach(([from, to], i) => {
      close(report.spells[i].from, from);
      close(report.spells[i].to, to);
    });
    close(report.outside, spells[0][1] - spells[0][0] + spells[1][1] - spells[1][0]);
  });

  test('the amount beyond is that of both', () => {
    // ∫(c − 3) dt by the vessel's balance: τ·dc/dt = c_F − c, so ∫c dt = ∫c_F dt − τ·Δc, and c is 3 at both ends.
    const above = (fed: number, lasts: number): number => 10 * fed - 3 * lasts;
    const kg =
      Q *
      (above(1400 - spells[0][0], spells[0][1] - spells[0][0]) +
        above(5500 - spells[1][0], spells[1][1] - spells[1][0]));
    close(report.beyond, kg);
  });

  test('the worst is where the second one ends: a corner', () => {
    close(report.worst.value, peak2);
    close(report.worst.time, 5500, 1e-8);
  });
});

describe('a smooth peak', () => {
  // A pulse of length T through two equal tanks: c = F(t) − F(t − T), greatest at T/(1 − e^(−T/(τ/2))).
  const T = 300;
  const half = TAU / 2;
  const F = (t: number): number => 1 - Math.exp(-t / half) * (1 + t / half);
  const time = T / (1 - Math.exp(-T / half));
  const value = 10 * (F(time) - F(time - T));

  test.each([1e-4, 1e-5, 1e-6, 1e-7, 1e-8, 1e-9])(
    'is found wherever the steps fall, tolerance %f',
    (tolerance) => {
      const [{ worst }] = reports(
        vessel({ parts: 2, changes: [change(0, 10, T)], limits: [limit(9)] }),
        tolerance,
      );
      expect(Math.abs(worst.value / value - 1)).toBeLessThan(2 * tolerance);
      expect(Math.abs(worst.time - time)).toBeLessThan(10 * TAU * tolerance + 1e-6 * TAU);
    },
  );
});

describe('a limit on what jumps', () => {
  // The feed itself: up to 8 at once, back to 2 over 1000 s from there.
  const changes = [change(600, 8), change(600, 2, null, 1000)];
  const [content, flow] = reports(
    vessel({
      feed: 2,
      changes: [...changes, { ...change(2000, 1.5 * Q, 500), quantity: 'feed.flow' }],
      limits: [limit(5, { stream: 'feed' }), limit(1.2 * Q, { stream: 'feed', quantity: 'flow' })],
    }),
  );

  test('counts the value just behind the jump as the worst', () => {
    expect(content.worst).toEqual({ value: 8, time: 600 });
    close(content.spells[0].from, 600);
    close(content.spells[0].to, 1100);
    // A triangle of 3 kg/m³ over 500 s.
    close(content.beyond, (Q * 3 * 500) / 2);
  });

  test('a flow has spells but nothing in kg', () => {
    close(flow.spells[0].from, 2000);
    close(flow.spells[0].to, 2500);
    expect(flow.beyond).toBeNull();
    close(flow.worst.value, 1.5 * Q, 1e-12);
  });
});

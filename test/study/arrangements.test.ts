import { describe, expect, test } from 'vitest';
import type { Arrangement, Scenario, Transfer } from '../../src/scenario/scenario.ts';
import { run } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { fromText } from '../support/plants.ts';
import {
  type Cascade,
  cascade,
  crossCurrent,
  ideal,
  reader,
  steadyProfile,
  steadyStream,
  unitsOfTransfer,
} from './cascade.ts';

const arranged = (c: Cascade, arrangement: Arrangement): Scenario => {
  const s = cascade(c);
  return { ...s, trains: s.trains.map((t) => ({ ...t, arrangement })) };
};
const equally = (n: number): number[] => Array.from({ length: n }, () => 1 / n);
const cross = (shares: readonly number[], fresh: 'aqueous' | 'organic' = 'organic'): Arrangement => ({
  kind: 'cross-current',
  fresh,
  shares,
});
const within = (value: number, printed: number, unit: number): void => {
  expect(Math.abs(value - printed), `${value} against ${printed}`).toBeLessThanOrEqual(unit / 2);
};
const plant = (stages: number, carrier: number, solvent: number, feed: number, ratio: number): Cascade => ({
  stages,
  aqueous: carrier,
  organic: solvent,
  feed,
  law: { law: 'ratio', ratio },
  transfer: unitsOfTransfer(1e9, carrier, solvent),
});
const extracted = (c: Cascade, shares = equally(c.stages)): number =>
  1 - steadyStream(arranged(c, cross(shares)), 'raffinate') / c.feed;

describe('cross-current, worked examples', () => {
  test('p-dioxane from water into benzene, five stages: 85.9 %', () => {
    // J. D. Seader and E. J. Henley, Example 5.1 (2nd ed.), from memory: X_F = 1/3, 3402 kg/h of water, 6804 kg/h of
    // benzene shared out equally, K' = 1.2.
    within(100 * extracted(plant(5, 3402, 6804, 1 / 3, 1.2)), 85.9, 0.1);
  });

  test('uranyl nitrate, two stages: 62.9 g of solvent in all extract 90 %', () => {
    // Seader and Henley, Exercise 5.9: 80 g of water, X = 0.25, K' = 5.5; printed to 0.1 g.
    within(100 * extracted(plant(2, 80, 62.9, 0.25, 5.5)), 90, 0.1);
  });

  test('penicillin F into amyl acetate, fresh solvent in both of two stages: 97.0 %', () => {
    // W. L. McCabe, J. C. Smith and P. Harriott, Unit Operations, Example 23.2 (from memory): D = 80, 6 volumes of
    // solvent on 100 of broth in each stage.
    within(100 * extracted(plant(2, 100, 12, 1, 80)), 97.0, 0.1);
  });

  test('nicotine three times with 50 kg of kerosene: 66.3 % as read off a graph', () => {
    // R. E. Treybal, Mass-Transfer Operations, 3rd ed., Illustration 10.3 (from memory); the measured isotherm is that
    // of Claffey et al., Ind. Eng. Chem. 42, 166 (1950). The book's graph is good to about 1 %.
    const water = [0, 0.001011, 0.00246, 0.00502, 0.00751, 0.00998, 0.0204];
    const kerosene = [0, 0.000807, 0.001961, 0.00456, 0.00686, 0.00913, 0.0187];
    const c: Cascade = {
      ...plant(3, 99, 150, 0.01 / 0.99, 1),
      law: { law: 'table', aqueous: water, organic: kerosene },
    };
    within(100 * extracted(c), 66.3, 2);
  });
});

describe('cross-current, closed forms', () => {
  const E = 2.4;
  test.each([[1], [2], [5], [10]])('%i equal shares leave 1/(1 + E/N)^N', (n) => {
    // J. D. Seader and E. J. Henley, eq. (5-21); for ever more stages exp(−E), eq. (5-23).
    const left = 1 - extracted(plant(n, 3, 6, 1 / 3, 1.2));
    expect(Math.abs(left * (1 + E / n) ** n - 1)).toBeLessThan(1e-6);
    expect(left).toBeGreaterThan(Math.exp(-E));
  });

  test('given shares leave Π 1/(1 + s_j·E)', () => {
    const shares = [0.5, 0.3, 0.2];
    const left = 1 - extracted(plant(3, 3, 6, 1 / 3, 1.2), shares);
    expect(Math.abs(left * shares.reduce((n, s) => n * (1 + s * E), 1) - 1)).toBeLessThan(1e-6);
  });

  test('the same written as one train a stage, each with a solvent of its own: the same course', () => {
    const c: Cascade = {
      ...plant(3, 3, 6, 1 / 3, 1.2),
      transfer: { given: 'ka', ka: 0.01, fixed: false },
      mixer: 300,
      layers: { aqueous: 200, organic: 150 },
      horizon: 900,
      recordEvery: 30,
    };
    const settings = { integrator: 'rodas5p', tolerance: 1e-9 } as const;
    const shared = run(arranged(c, cross(equally(3))), settings);
    const apart = run(crossCurrent({ ...c, organic: 2 }), settings);
    shared.records.rows.forEach((row, k) => {
      const [x, y] = [
        reader(shared.plant)(row, 'raffinate.s'),
        reader(apart.plant)(apart.records.rows[k], 'raffinate.s'),
      ];
      expect(Math.abs(x - y)).toBeLessThan(1e-8);
    });
    expect(shared.records.rows).toHaveLength(31);
  });

  test('a fresh aqueous washes an organic: 1/(1 + 1/(N·E))^N', () => {
    const c: Cascade = { ...plant(4, 6, 3, 0, 1.2), solvent: 5 };
    const left = steadyStream(arranged(c, cross(equally(4), 'aqueous')), 'extract') / 5;
    const perStage = 6 / 4 / (1.2 * 3);
    expect(Math.abs(left * (1 + perStage) ** 4 - 1)).toBeLessThan(1e-6);
  });
});

describe('co-current', () => {
  test('any number of ideal stages is one: 1/(1 + E)', () => {
    for (const n of [1, 4]) {
      const left = steadyStream(arranged(plant(n, 3, 6, 2, 1.2), { kind: 'co-current' }), 'raffinate') / 2;
      expect(Math.abs(left * 3.4 - 1)).toBeLessThan(1e-6);
    }
  });

  test('real stages come nearer to equilibrium by 1/(1 + n(1 + 1/E)) each', () => {
    // x_(j−1) − x_j = n(x_j − y_j/D) for a mixed mixer of n transfer units, y_j from the balance with the entrance:
    // the distance to equilibrium shrinks by the same factor in each.
    const [n, E, D] = [0.7, 2.4, 1.2];
    const transfer: Transfer = unitsOfTransfer(n, 3, 6);
    const s = arranged({ ...plant(5, 3, 6, 2, D), transfer }, { kind: 'co-current' });
    const rest = 2 / (1 + E);
    steadyProfile(s).forEach((x, j) => {
      const exact = rest + (2 - rest) / (1 + n * (1 + 1 / E)) ** (j + 1);
      expect(Math.abs(x / exact - 1)).toBeLessThan(1e-9);
    });
  });
});

/** A column of cells with back-flow; flows in m³/s, hold-ups in m³. */
const column = (c: {
  cells: number;
  back: [number, number];
  D: number;
  ka?: number;
  holdUp?: number;
}): Scenario => {
  const s = cascade({
    stages: c.cells,
    aqueous: 0.01,
    organic: 0.008,
    feed: 5,
    law: { law: 'ratio', ratio: c.D },
    transfer: c.ka === undefined ? ideal(0.01, 0.008) : { given: 'ka', ka: c.ka, fixed: false },
    mixer: 1,
  });
  return {
    ...s,
    trains: s.trains.map((t) => ({
      ...t,
      backFlow: { aqueous: c.back[0], organic: c.back[1] },
      stages: t.stages.map((q) => ({
        ...q,
        mixer: { ...q.mixer, organicShare: c.holdUp ?? 0.2 },
        settler: { ...q.settler, aqueous: 0, organic: 0, parts: 0 },
      })),
    })),
  };
};

describe('a column as cells with back-flow', () => {
  /*
   * C. A. Sleicher, AIChE J. 5, 145 (1959); T. Miyauchi and T. Vermeulen, Ind. Eng. Chem. Fundam. 2, 304 (1963); S. Hartland
   * and J. C. Mecklenburgh, The Theory of Backmixing (1975) (all from memory). With y = D·x in every cell the balance of
   * an inner cell is (1 + E')-linear: with f = F(1 + α) + S·D·β going down and g = F·α + S·D(1 + β) going up,
   *   f·x_(j−1) − (f + g)·x_j + g·x_(j+1) = 0, hence x_j = A + B·(f/g)^j,
   * and the two end cells fix A and B.
   */
  test.each([
    { cells: 6, back: [0.5, 0.2] as [number, number], D: 1.5 },
    { cells: 10, back: [2, 1] as [number, number], D: 2 },
    { cells: 4, back: [0, 0] as [number, number], D: 1 },
  ])('$cells ideal cells, back-flow $back: the closed form', ({ cells, back: [a, b], D }) => {
    const [F, S, feed] = [0.01, 0.008, 5];
    const f = F * (1 + a) + S * D * b;
    const g = F * a + S * D * (1 + b);
    const r = f / g;
    // First cell: F·feed + g·x_2 − (F(1 + α) + S·D(1 + β))·x_1 = 0 with what leaves it: down f, out S·D.
    // Last cell: f·x_(N−1) − (F + g)·x_N = 0.
    const first = (x1: number, x2: number): number => F * feed + g * x2 - (f + S * D) * x1;
    const last = (x0: number, x1: number): number => f * x0 - (F + g) * x1;
    // Both are linear in A and B.
    const m = [
      [first(1, 1) - F * feed, first(r, r * r) - F * feed],
      [last(1, 1), last(r ** (cells - 1), r ** cells)],
    ];
    const det = m[0][0] * m[1][1] - m[0][1] * m[1][0];
    const A = (-F * feed * m[1][1]) / det;
    const B = (F * feed * m[1][0]) / det;
    const x = steadyProfile(column({ cells, back: [a, b], D }));
    x.forEach((v, j) => {
      expect(Math.abs(v / (A + B * r ** (j + 1)) - 1), `cell ${j + 1}`).toBeLessThan(1e-6);
    });
  });

  test.each([
    [1, 0],
    [5, 0],
    [5, 0.4],
    [12, 1.5],
  ])('%i cells, back-flow %d: mean and variance of the time spent in them', (cells, alpha) => {
    // σ²/t² = (1 + 2α)/N − 2α(1 + α)/N²·(1 − (α/(1 + α))^N): S. Hartland and J. C. Mecklenburgh (from memory); at α = 0
    // that of N tanks in series, 1/N.
    const D = 1e-9;
    const residence = (cells * 1 * 0.8) / 0.01;
    const s = column({ cells, back: [alpha, 0], D, ka: 1e-9 });
    const every = residence / 400;
    const r = run(
      { ...s, horizon: 25 * residence, recordEvery: every },
      { integrator: 'rodas5p', tolerance: 1e-9 },
    );
    const read = reader(r.plant);
    // ∫(1 − F) dt and 2∫t(1 − F) dt by Simpson's rule over the records.
    let [mean, second] = [0, 0];
    const n = r.records.times.length - 1 - ((r.records.times.length - 1) % 2);
    for (let k = 0; k <= n; k++) {
      const weight = (k === 0 || k === n ? 1 : k % 2 === 1 ? 4 : 2) * (every / 3);
      const left = 1 - read(r.records.rows[k], 'raffinate.s') / 5;
      mean += weight * left;
      second += 2 * weight * left * r.records.times[k];
    }
    expect(Math.abs(mean / residence - 1)).toBeLessThan(2e-6);
    const variance =
      (1 + 2 * alpha) / cells -
      ((2 * alpha * (1 + alpha)) / cells ** 2) * (1 - (alpha / (1 + alpha)) ** cells);
    expect(Math.abs((second / mean ** 2 - 1) / variance - 1)).toBeLessThan(1e-4);
  });

  test('a bank of contactors: small hold-ups, the state of rest of any other cascade, in minutes', () => {
    // Lewis' overall efficiency does not know what holds the phases: W. K. Lewis, Ind. Eng. Chem. 28, 399 (1936) (from
    // memory), Kremser for the rest.
    const text = (settler: string): string => `
title: Contactors
solutes: [s]
feeds:
  feed: {phase: aqueous, flow: 60 L/h, s: 10 g/L}
  solvent: {phase: organic, flow: 40 L/h}
trains:
  bank:
    stages: 6
    aqueous: feed -> raffinate
    organic: solvent -> extract
    mixer: {volume: 0.1 L, stage_efficiency: 90 %}
    settler: ${settler}
    equilibrium: {s: {law: ratio, ratio: 3}}
horizon: 30 min
`;
    const [M, E] = [0.9, 2];
    const stages = (6 * -Math.log(1 + M * (1 / E - 1))) / Math.log(E);
    const exact = (10 * (E - 1)) / (E ** (stages + 1) - 1);
    for (const settler of ['none', '{aqueous_volume: 2 L, organic_volume: 2 L}']) {
      const r = steady(fromText(text(settler)));
      expect(Math.abs(reader(r.plant)(r.outputs, 'raffinate.s') / exact - 1)).toBeLessThan(1e-9);
      expect(r.figures[0].solutes[0].efficiency.every((e) => Math.abs((e as number) - M) < 1e-9)).toBe(true);
    }
    const end = run(fromText(text('none')), { integrator: 'rodas5p', tolerance: 1e-8 });
    const last = end.records.rows[end.records.rows.length - 1];
    expect(Math.abs(reader(end.plant)(last, 'raffinate.s') / exact - 1)).toBeLessThan(1e-6);
  });
});

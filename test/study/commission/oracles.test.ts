import { describe, expect, test } from 'vitest';
import type { Limit, Scenario } from '../../../src/scenario/scenario.ts';
import { commission } from '../../../src/study/commission/commission.ts';
import { follow } from '../../../src/study/commission/follow.ts';
import { comesGood } from '../../../src/study/commission/good.ts';
import { measure, startResult } from '../../../src/study/commission/procedures.ts';
import type { Rest } from '../../../src/study/commission/rest.ts';
import { usual } from '../../../src/study/run.ts';
import { scenario } from '../../support/plants.ts';
import { cascade } from '../cascade.ts';

const exact = { integrator: 'rodas5p', tolerance: 1e-10, repeatability: null, modes: 3 } as const;

/** Times of 10, 5, 2 and 1 % of the change by quantity. */
function timesOf(
  s: Scenario,
  settings: Parameters<typeof follow>[1] = exact,
): (path: string) => readonly (number | null)[] {
  const list = comesGood(follow(s, settings));
  return (path) => {
    const found = list.find((q) => q.quantity.path === path);
    if (!found) throw new Error(`nothing is watched at ${path}`);
    return found.ofChange;
  };
}

/** As good as equilibrium stages, all in the mixer; h/L of the aqueous is `unit`. */
const unit = 100;
function equilibriumStages(N: number, E: number, more: Partial<Scenario> = {}): Scenario {
  const s = cascade({
    stages: N,
    aqueous: 0.01,
    organic: 0.01 * E,
    feed: 1,
    law: { law: 'ratio', ratio: 1 },
    transfer: { given: 'ka', ka: 1e7, fixed: false },
    mixer: 0.01 * unit * (1 + E),
    layers: { aqueous: 1e-8, organic: 1e-8 },
    horizon: unit,
  });
  return { ...s, ...more };
}

describe('start-up of equilibrium stages', () => {
  // The cascade of L. Lapidus and N. R. Amundson, Ind. Eng. Chem. 42, 1071 (1950) (from memory), unit step in the feed,
  // h = L = 1, mH = E·h: times in h/L, computed outside this program from the eigenvalues of the tridiagonal matrix.
  const rows = [
    { N: 3, E: 1.5, T1: 3.25542, t95: 11.5983, t99: 16.8383, first: 13.0861 },
    { N: 5, E: 1, T1: 7.4641, t95: 27.0163, t99: 39.0296, first: 27.0169 },
    { N: 5, E: 2, T1: 5.44949, t95: 21.056, t99: 29.8304, first: 18.6807 },
    { N: 10, E: 1, T1: 24.68708, t95: 90.562, t99: 130.2948, first: 73.4547 },
    { N: 10, E: 1.5, T1: 16.69652, t95: 66.3313, t99: 93.2126, first: 44.8139 },
  ];

  test.each(rows)(
    'N = $N, E = $E: within 5 and 1 %, and the slowest time constant',
    ({ N, E, T1, t95, t99, first }) => {
      // The horizon is far too short on purpose: the run goes on by itself.
      const f = follow(equilibriumStages(N, E), exact);
      expect(f.ran).toBeGreaterThan(t99 * unit);
      expect(f.settled).toBe(true);
      const list = comesGood(f);
      const [raffinate, extract] = ['raffinate.s', 'extract.s'].map((path) =>
        list.find((q) => q.quantity.path === path),
      );
      const within = (t: number | null | undefined, known: number): void =>
        expect(Math.abs((t as number) / unit - known), `${known}`).toBeLessThan(6e-5);
      within(raffinate?.ofChange[1], t95);
      within(raffinate?.ofChange[3], t99);
      within(extract?.ofChange[3], first);
      // From solute-free stages the change is the final value.
      expect(raffinate?.ofFinal).toEqual(raffinate?.ofChange);
      const rest = f.rest as Rest;
      expect(Math.abs(-1 / rest.modes[0].rate / unit / T1 - 1)).toBeLessThan(1e-5);
      // In the tail nothing but that mode is left.
      expect(Math.abs((raffinate?.tail as number) / unit / T1 - 1)).toBeLessThan(2e-3);
      expect(raffinate?.overshoot).toBeNull();
    },
  );

  test.each([2, 3, 5, 8, 10])('mean response times at E = 1 from what the outlets made, N = %i', (N) => {
    // Area over the response: raffinate (h + mH)·N(N + 2)/(6L), extract (h + mH)(2N + 1)/(6L); kg made until t are
    // Q·c_end·(t − mean). A limit that no start-up can keep makes all of the run count.
    const limits: Limit[] = ['raffinate', 'extract'].map((stream) => ({
      stream,
      quantity: 's',
      side: 'above',
      value: 2,
      from: 0,
    }));
    const horizon = 60 * unit * (N + 1) ** 2 * 0.25;
    const stages = equilibriumStages(N, 1, { limits, horizon });
    const f = follow(stages, exact);
    const { waiting, onSpec } = startResult('plain', f, measure(stages, f, exact), null);
    expect(onSpec).toBeNull();
    const ends = [1 / (N + 1), N / (N + 1)];
    [(N * (N + 2)) / 3, (2 * N + 1) / 3].forEach((known, i) => {
      const { volume, solutes } = waiting.outlets[i];
      const mean = volume / 0.01 - solutes[0] / (0.01 * ends[i]);
      expect(Math.abs(mean / unit / known - 1)).toBeLessThan(1e-6);
    });
  });
});

describe('a layer of n parts is n tanks in series', () => {
  // F(θ) = 1 − e^(−nθ)·Σ_(i<n) (nθ)^i/i!, the gamma distribution: O. Levenspiel, Chemical Reaction Engineering, 3rd ed.
  // (1999), p. 327; R. B. MacMullin and M. Weber, Trans. AIChE 31, 409 (1935). Its 95 and 99 %:
  const rows = [
    { n: 1, at95: 2.99573, at99: 4.60517 },
    { n: 2, at95: 2.37193, at99: 3.31918 },
    { n: 3, at95: 2.0986, at99: 2.80198 },
    { n: 5, at95: 1.8307, at99: 2.32093 },
    { n: 10, at95: 1.57052, at99: 1.87831 },
  ];
  test.each(rows)('n = $n', ({ n, at95, at99 }) => {
    const residence = 1000;
    const s = cascade({
      stages: 1,
      aqueous: 0.02,
      organic: 0.03,
      feed: 1,
      law: null,
      transfer: { given: 'efficiency', efficiency: 0.9 },
      mixer: 1e-7,
      layers: { aqueous: 0.02 * residence, organic: 0.03 * residence },
      parts: n,
      horizon: residence,
    });
    const times = timesOf(s)('raffinate.s');
    expect(Math.abs((times[1] as number) / residence - at95)).toBeLessThan(6e-6);
    expect(Math.abs((times[3] as number) / residence - at99)).toBeLessThan(6e-6);
  });
});

describe('a batch', () => {
  test('is within 1 % when its closed exponential is', () => {
    // c_a = c* + (c_0 − c*)·e^(−k·a·(V/V_a + V/(D·V_o))·t), the balance of two stirred phases solved; here with V_a = V_o.
    const s = { ...scenario('wattle-shake-out'), upsets: [], limits: [] };
    const found = commission(s, { ...exact, tolerance: 1e-9 });
    const rate = 0.02 * (2 + 2 / 0.75);
    expect(Math.abs(found.modes[0].time * rate - 1)).toBeLessThan(1e-6);
    expect(Math.abs(((found.steady as number) * rate) / Math.log(100) - 1)).toBeLessThan(1e-6);
    expect(found.modes[0].lives.map((q) => q.where).sort()).toEqual([
      'aqueous of beaker',
      'organic of beaker',
    ]);
  });
});

describe('the invented plants at the figures with which they were laid out', () => {
  test('copper circuit: 95 % at 3.3 h, 99 % at 4.8 h, slowest mode 0.90 h', () => {
    const found = commission(scenario('saltbush-copper'), usual);
    const raffinate = found.quantities.find((q) => q.quantity.path === 'raffinate.copper');
    expect(Math.abs((raffinate?.ofChange[1] as number) / 3600 - 3.3)).toBeLessThan(0.05);
    expect(Math.abs((raffinate?.ofChange[3] as number) / 3600 - 4.8)).toBeLessThan(0.05);
    expect(Math.abs(found.modes[0].time / 3600 - 0.9)).toBeLessThan(0.005);
    expect(found.leftOut).toHaveLength(2);
  });

  test('acid on a measured isotherm: 99 % after 13.5 h', () => {
    const times = timesOf(
      { ...scenario('wattle-acid-table'), upsets: [] },
      { ...exact, tolerance: 1e-8 },
    )('raffinate.acid');
    expect(Math.abs((times[3] as number) / 3600 - 13.5)).toBeLessThan(0.051);
  });
});

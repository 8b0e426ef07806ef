import { describe, expect, test } from 'vitest';
import type { Law, Transfer } from '../../src/scenario/scenario.ts';
import { cascade, runToEnd, steadyProfile, unitsOfTransfer } from './cascade.ts';

/*
 * Constant distribution ratio. With E = D·Q_o/Q_a and Δ = x − y_in/D,
 *   Δ_n/Δ_F = (E^(N+1−n) − 1)/(E^(N+1) − 1), and (N + 1 − n)/(N + 1) at E = 1.
 * A. Kremser, Natl. Petrol. News 22(21), 43 (1930); M. Souders and G. G. Brown, Ind. Eng. Chem. 24, 519 (1932) (both
 * from memory). The form for n = N: N. S. Wang, ENCH250, University of Maryland, notes on extraction, part 3.
 */
const left = (E: number, N: number, n: number): number =>
  E === 1 ? (N + 1 - n) / (N + 1) : (E ** (N + 1 - n) - 1) / (E ** (N + 1) - 1);

/** The same solved for the ideal stages that leave a share of what the feed brings. */
const stagesFor = (share: number, E: number): number =>
  E === 1 ? 1 / share - 1 : Math.log((1 / share) * (1 - 1 / E) + 1 / E) / Math.log(E);

/**
 * Overall efficiency from the raffinate-phase Murphree efficiency M: E_o = −ln(1 + M(1/E − 1))/ln E, and M at E = 1.
 * W. K. Lewis, Ind. Eng. Chem. 28, 399 (1936) (from memory).
 */
const lewis = (M: number, E: number): number => (E === 1 ? M : -Math.log(1 + M * (1 / E - 1)) / Math.log(E));

const ratio = (D: number): Law => ({ law: 'ratio', ratio: D });
const D = 0.75;
const feed = 12;
const solvent = 0.3;
const clean = solvent / D;

function plant(N: number, E: number, transfer: Transfer, horizon?: number) {
  const flows = { aqueous: 0.01, organic: (0.01 * E) / D };
  return cascade({ ...flows, stages: N, feed, solvent, law: ratio(D), transfer, horizon });
}

/** Share of the feed's solute still there behind each stage. */
const shares = (x: readonly number[]): number[] => x.map((v) => (v - clean) / (feed - clean));
const relative = (a: readonly number[], b: readonly number[]): number =>
  Math.max(...a.map((v, i) => Math.abs(v / b[i] - 1)));

describe('stages as good as ideal are those of Kremser, Souders and Brown', () => {
  const cases = [1, 2, 5, 10, 20].flatMap((N) => [0.6, 1, 1.8].map((E) => ({ N, E })));

  test.each(cases)('N = $N, E = $E: all stages at steady state, by a very high k·a', ({ N, E }) => {
    const transfer = unitsOfTransfer(1e9, 0.01, (0.01 * E) / D);
    const x = steadyProfile(plant(N, E, transfer));
    const exact = x.map((_, i) => left(E, N, i + 1));
    expect(relative(shares(x), exact)).toBeLessThan(1e-6);
  });

  test.each(cases)('N = $N, E = $E: the end of a long run, by an efficiency of 99.9999 %', ({ N, E }) => {
    const efficiency = 0.999999;
    // The slowest mode takes about two minutes of each flow for each of (N + 1)²/π² stages.
    const s = plant(N, E, { given: 'efficiency', efficiency }, 600 * (N + 5) ** 2);
    const { end } = runToEnd(s, { integrator: 'rodas5p', tolerance: 1e-8 });
    const [share] = shares([end('raffinate.s')]);
    expect(Math.abs(share - left(E, N, N))).toBeLessThan(1e-6);
    // What is missing to ideal stages is Lewis' overall efficiency.
    expect(relative([stagesFor(share, E)], [N * lewis(efficiency, E)])).toBeLessThan(1e-6);
    // The extract follows from the balance over the cascade.
    expect(relative([end('extract.s')], [solvent + ((feed - clean) * (1 - share) * D) / E])).toBeLessThan(
      1e-6,
    );
  });
});

describe('finite k·a: well-mixed stages with n = K·a·V/Q_a transfer units', () => {
  // The same equations solved outside this program, y_in = 0, x_F = 1; 8 digits.
  const rows = [
    { N: 3, E: 2, n: 4, x: [0.55156951, 0.28251121, 0.12107623], ideal: 2.2108968, Eo: 0.7369656 },
    {
      N: 5,
      E: 1.5,
      n: 2,
      x: [0.72573555, 0.51241875, 0.34650568, 0.21746219, 0.11709502],
      ideal: 3.0990882,
      Eo: 0.6198176,
    },
    {
      N: 4,
      E: 0.8,
      n: 3,
      x: [0.87379481, 0.72392614, 0.5459571, 0.33461887],
      ideal: 3.0805327,
      Eo: 0.7701332,
    },
    { N: 3, E: 1.5, n: 1, x: [0.72864322, 0.50251256, 0.31407035], ideal: 1.3489809, Eo: 0.4496603 },
  ];

  test.each(rows)('N = $N, E = $E, n = $n: profile and Lewis efficiency', ({ N, E, n, x, ideal, Eo }) => {
    const s = cascade({
      stages: N,
      aqueous: 0.02,
      organic: 0.02 * E,
      feed: 1,
      law: ratio(1),
      transfer: unitsOfTransfer(n, 0.02, 0.02 * E),
    });
    const found = steadyProfile(s);
    found.forEach((v, i) => {
      expect(Math.abs(v - x[i])).toBeLessThan(5.01e-9);
    });
    const stages = stagesFor(found[N - 1], E);
    expect(Math.abs(stages - ideal)).toBeLessThan(1.01e-7);
    expect(Math.abs(stages / N - Eo)).toBeLessThan(5.01e-8);
    expect(Math.abs(lewis(n / (1 + n), E) - stages / N)).toBeLessThan(1e-11);
  });

  /** One stage against equilibrium: η = n(1 + 1/E)/(1 + n(1 + 1/E)), a balance over both phases. */
  test.each([
    { n: 1, E: 1, eta: 0.666667 },
    { n: 2, E: 1, eta: 0.8 },
    { n: 4, E: 1, eta: 0.888889 },
    { n: 9, E: 2, eta: 0.931034 },
    { n: 19, E: 2, eta: 0.966102 },
  ])('one stage, n = $n, E = $E: $eta of the way to equilibrium', ({ n, E, eta }) => {
    const transfer = unitsOfTransfer(n, 0.02, 0.02 * E);
    const s = cascade({ stages: 1, aqueous: 0.02, organic: 0.02 * E, feed: 1, law: ratio(1), transfer });
    const [x] = steadyProfile(s);
    expect(Math.abs((1 - x) / (1 - left(E, 1, 1)) - eta)).toBeLessThan(5.01e-7);
  });

  test('an organic-side coefficient with the same resistance gives the same stages: K_a = D·K_o', () => {
    const shared = { stages: 4, aqueous: 0.02, organic: 0.03, feed: 1, solvent: 0.1, law: ratio(2.5) };
    const onAqueous = steadyProfile(cascade({ ...shared, transfer: unitsOfTransfer(3, 0.02, 0.03) }));
    const onOrganic = steadyProfile(
      cascade({ ...shared, side: 'organic', transfer: unitsOfTransfer(3 / 2.5, 0.02, 0.03) }),
    );
    expect(relative(onOrganic, onAqueous)).toBeLessThan(1e-11);
  });
});

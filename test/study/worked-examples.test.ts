import { describe, expect, test } from 'vitest';
import {
  type Cascade,
  cascade,
  crossCurrent,
  steadyProfile,
  steadyStream,
  unitsOfTransfer,
} from './cascade.ts';

/*
 * Worked examples with a constant ratio, all on solute-free carriers: a flow is a carrier's mass flow and a
 * concentration a mass ratio, which is what densities of 1 kg/m³ make of them.
 */
const plant = (stages: number, carrier: number, solvent: number, feed: number, ratio: number): Cascade => ({
  stages,
  aqueous: carrier,
  organic: solvent,
  feed,
  law: { law: 'ratio', ratio },
  transfer: unitsOfTransfer(1e9, carrier, solvent),
});
const extracted = (c: Cascade): number => 1 - steadyStream(cascade(c), 'raffinate') / c.feed;
const extractedAcross = (c: Cascade): number => 1 - steadyStream(crossCurrent(c), 'raffinate') / c.feed;
/** A printed figure stands for everything that rounds to it. */
const within = (value: number, printed: number, unit: number): void => {
  expect(Math.abs(value - printed), `${value} against ${printed}`).toBeLessThanOrEqual(unit / 2);
};

describe('uranyl nitrate from water into tributyl phosphate', () => {
  // J. D. Seader and E. J. Henley, Separation Process Principles, 2nd ed., Exercise 5.9: 100 g of 20 wt % solution
  // (80 g of water, X = 0.25), K' = 5.5, 90 % extracted; the solvent needed is printed to 0.1 g.
  test.each([
    { way: 'one stage', stages: 1, solvent: 130.8, find: extracted },
    { way: 'two counter-current', stages: 2, solvent: 36.9, find: extracted },
    { way: 'two cross-current', stages: 2, solvent: 62.9 / 2, find: extractedAcross },
  ])('$way: the printed solvent extracts 90 %', ({ stages, solvent, find }) => {
    within(100 * find(plant(stages, 80, solvent, 0.25, 5.5)), 90, 0.2);
  });

  test('the counter-current solvent to four digits: 36.97 g', () => {
    // The book rounds E/S = 5.5/80 = 0.06875 to 0.0688 on its way to 36.9 g.
    expect(extracted(plant(2, 80, 36.965, 0.25, 5.5))).toBeLessThan(0.9);
    expect(extracted(plant(2, 80, 36.975, 0.25, 5.5))).toBeGreaterThan(0.9);
  });
});

describe('p-dioxane from water into benzene', () => {
  // J. D. Seader and E. J. Henley, Example 5.1 (2nd ed.), from memory: 4536 kg/h of 25 wt % dioxane, 6804 kg/h of
  // benzene, K' = 1.2, so E = 2.4. Printed to 0.1 %.
  const water = 3402;
  const benzene = 6804;
  test.each([
    { stages: 1, printed: 70.6 },
    { stages: 2, printed: 89.1 },
    { stages: 5, printed: 99.3 },
  ])('$stages counter-current: $printed %', ({ stages, printed }) => {
    within(100 * extracted(plant(stages, water, benzene, 1 / 3, 1.2)), printed, 0.1);
  });

  test('five cross-current with a fifth of the solvent each: 85.9 %', () => {
    within(100 * extractedAcross(plant(5, water, benzene / 5, 1 / 3, 1.2)), 85.9, 0.1);
  });
});

describe('penicillin F from broth into amyl acetate', () => {
  // W. L. McCabe, J. C. Smith and P. Harriott, Unit Operations of Chemical Engineering, Example 23.2 (answers from
  // memory): K = 80, 6 volumes of solvent to 100 of broth.
  test('one ideal stage: 82.8 %', () => {
    within(100 * extracted(plant(1, 100, 6, 1, 80)), 82.8, 0.1);
  });

  test('two stages with fresh solvent in both: 97.0 %', () => {
    within(100 * extractedAcross(plant(2, 100, 6, 1, 80)), 97.0, 0.1);
  });

  test('the same recovery counter-current takes about 2.1 stages', () => {
    // ln of the share left runs nearly straight over the stages, so interpolate there.
    const [two, three] = [2, 3].map((n) => Math.log(1 - extracted(plant(n, 100, 6, 1, 80))));
    const target = Math.log(1 - 0.97027);
    within(2 + (target - two) / (three - two), 2.1, 0.1);
  });
});

describe('a dilute solute with E = 2', () => {
  // N. S. Wang, ENCH250, University of Maryland, notes on extraction, part 3: 300 lb/h of feed at x₀ = 0.03,
  // 200 lb/h of clean solvent, K = 3; x_N ≤ 0.001 is wanted. Tridiagonal balances, x_i = 0.03·(2^(5−i) − 1)/31.
  test('four stages are enough, three are not, and the profile is that of the balances', () => {
    const x = steadyProfile(cascade(plant(4, 300, 200, 0.03, 3)));
    [0.0145161, 0.0067742, 0.0029032, 0.00096774].forEach((printed, i) => {
      within(x[i], printed, i === 3 ? 1e-8 : 1e-7);
    });
    expect(steadyStream(cascade(plant(3, 300, 200, 0.03, 3)), 'raffinate')).toBeGreaterThan(0.001);
  });
});

test('a counter-current cascade is not N stages with the whole solvent each: 0.641 % left, not 0.46 %', () => {
  // 1/(1 + E)^N, sometimes quoted for counter-current, holds where every stage gets the full flow of solvent.
  const c = plant(3, 1, 1, 1, 5);
  within(100 * (1 - extracted(c)), 0.641, 0.001);
  within(100 * (1 - extractedAcross(c)), 0.463, 0.001);
});

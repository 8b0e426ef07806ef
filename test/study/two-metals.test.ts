import { describe, expect, test } from 'vitest';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { run } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { reference, scenario } from '../support/plants.ts';
import { reader } from './cascade.ts';

const HOUR = 3600;
const s = scenario('mulga-two-metals');
const rest = steady(s);
const read = reader(rest.plant);
const at = (path: string): number => read(rest.outputs, path);

interface Known {
  readonly columns: readonly string[];
  readonly hours: readonly number[];
  readonly values: readonly (readonly number[])[];
}

describe('the two-metal circuit against an independent model', () => {
  // test/reference/make_two_metals.py: concentrations as states, SciPy's Radau at 1e-11.
  const known = reference('two-metals') as Known;
  const constant: Scenario = {
    ...s,
    horizon: 24 * HOUR,
    recordEvery: HOUR,
    limits: [],
    upsets: [{ at: 12 * HOUR, quantity: 'liquor.B', how: { to: 7.2 }, over: 0, lasts: null, words: '' }],
  };

  test.each(['rodas5p', 'rodas4'] as const)('start-up and a step of the other metal, %s', (integrator) => {
    const r = run(constant, { integrator, tolerance: 1e-8 });
    const look = reader(r.plant);
    let worst = 0;
    known.hours.forEach((h, k) => {
      const row = r.records.rows[r.records.times.indexOf(h * HOUR)];
      known.columns.forEach((c, i) => {
        const value = known.values[k][i];
        worst = Math.max(worst, Math.abs(look(row, c) - value) / (Math.abs(value) + 1e-4));
      });
    });
    expect(worst).toBeLessThan(1e-5);
    for (const c of r.closures) expect(c.closure, c.name).toBeLessThan(1e-12);
  });
});

describe('what the plant is known by', () => {
  test('product, purity and recovery at rest', () => {
    expect(Math.abs(at('product.A') - 29.7)).toBeLessThan(0.05);
    expect(Math.abs(at('product.B') - 0.12)).toBeLessThan(0.005);
    expect(Math.abs(at('product.purity of A') - 99.59)).toBeLessThan(0.005);
    const recovery = (8 * at('product.A')) / (60 * 4);
    expect(Math.abs(100 * recovery - 98.9)).toBeLessThan(0.05);
    const halved = {
      ...s,
      feeds: s.feeds.map((f) => (f.name === 'scrub acid' ? { ...f, flow: f.flow / 2 } : f)),
    };
    const r = steady(halved);
    expect(Math.abs(reader(r.plant)(r.outputs, 'product.purity of A') - 96.5)).toBeLessThan(0.06);
  });

  test('the balance of each metal and of the acid over the whole plant', () => {
    const [A, B] = ['A', 'B'].map((m) => 64 * at(`raffinate.${m}`) + 8 * at(`product.${m}`));
    expect(A / 240).toBeCloseTo(1, 9);
    expect(B / 360).toBeCloseTo(1, 9);
    // Acid in, and 1.543 and 1.7 times what the raffinate lacks of the metals less what the product took.
    const acid = 64 * at('raffinate.acid') + 8 * at('product.acid');
    expect(acid / (60 * 2 + 4 * 25 + 8 * 180)).toBeCloseTo(1, 9);
  });

  test('separation factor: (D_A/D_B) = K_A/K_B = 64 at equilibrium, less in real stages', () => {
    const [extraction, scrub, strip] = rest.figures;
    for (const f of [extraction, scrub, strip]) {
      const [factor] = f.separation?.factors ?? [];
      expect([factor.one, factor.other]).toEqual(['A', 'B']);
      for (const v of factor.stages) {
        expect(v as number).toBeLessThan(64.0001);
        expect(v as number).toBeGreaterThan(40);
      }
    }
    expect(extraction.separation?.load).toBeCloseTo(
      (at('loaded organic.A') + 1.1 * at('loaded organic.B')) / 11,
      12,
    );
  });

  test('crowding: beside A the organic takes a sixth of the B that it would take alone', () => {
    // In mass action B goes with F²; alone it would have F from F + 1.1·0.25·c_B/acid²·F² = 11.
    const c = (q: string): number => at(`extraction.1.mixer.aqueous.${q}`);
    const k = (K: number, m: string, n: number): number => (n * K * c(m)) / c('acid') ** 2;
    const root = (q: number): number => (-1 + Math.sqrt(1 + 4 * q * 11)) / (2 * q);
    const [both, alone] = [root(k(16, 'A', 1) + k(0.25, 'B', 1.1)), root(k(0.25, 'B', 1.1))];
    const share = rest.figures[0].separation?.crowding.find((q) => q.solute === 'B')?.share as number;
    expect(share).toBeCloseTo((both / alone) ** 2, 9);
  });

  test('purity comes good last, and is what the scrub keeps', () => {
    const r = run(s, { integrator: 'rodas5p', tolerance: 1e-6 });
    const [purity, raffinate] = r.limits;
    expect(purity.path).toBe('product.purity of A');
    expect(purity.spells).toHaveLength(1);
    expect(purity.spells[0].from).toBeGreaterThan(20 * HOUR);
    expect(purity.worst.value).toBeGreaterThan(96.45);
    expect(purity.worst.value).toBeLessThan(97);
    expect(purity.beyond).toBeNull();
    expect(raffinate.spells).toHaveLength(0);
    for (const c of r.closures) expect(c.closure, c.name).toBeLessThan(1e-12);
    // Last time outside 1 % of the way from what it is after two hours, where product is first made in earnest.
    const look = reader(r.plant);
    const lastOutside = (path: string, band: (final: number) => number): number => {
      const k = r.records.times.findLastIndex(
        (t, i) => t < 20 * HOUR && Math.abs(look(r.records.rows[i], path) - at(path)) > band(at(path)),
      );
      return r.records.times[k] / HOUR;
    };
    const impurity = lastOutside('product.purity of B', (v) => 0.01 * v);
    const product = lastOutside('product.A', (v) => 0.01 * v);
    expect(impurity).toBeGreaterThan(product + 1);
  });
});

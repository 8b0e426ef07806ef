import { describe, expect, it } from 'vitest';
import type { Scenario, Settler, Train } from '../../src/scenario/scenario.ts';
import { run } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { scenario } from '../support/plants.ts';

const HOUR = 3600;
const vessels = { ...scenario('saltbush-vessels'), upsets: [], limits: [] };

const withSettlers = (change: (q: Settler) => Partial<Settler>): Scenario => ({
  ...vessels,
  trains: vessels.trains.map((t) => ({
    ...t,
    stages: t.stages.map((q) => ({ ...q, settler: { ...q.settler, ...change(q.settler) } })),
  })),
});
const atRest = (s: Scenario): ((path: string) => number) => {
  const { plant, outputs } = steady({ ...s, start: 'barren' });
  return (path) => {
    const i = plant.system.outputs.findIndex((o) => o.path === path);
    expect(i, path).toBeGreaterThanOrEqual(0);
    return outputs[i];
  };
};

describe('settings of the settlers act by the factor that they state', () => {
  it('a coalescer of one half halves the band (H = κ·(Q_d/A)^p, κ by the factor)', () => {
    const plain = atRest(vessels);
    const packed = atRest(withSettlers((q) => ({ band: q.band && { ...q.band, coalescer: 0.5 } })));
    for (const stage of ['extraction.1', 'extraction.2', 'strip.1'])
      expect(packed(`${stage}.settler.band`) / plain(`${stage}.settler.band`)).toBeCloseTo(0.5, 4);
  });

  it('the power law: 6 cm at 2.4 m/h of dispersed aqueous, and at 420 m³/h over 180 m² by the cube', () => {
    const at = atRest(vessels);
    expect(at('extraction.1.settler.band')).toBeCloseTo(0.06 * (420 / 180 / 2.4) ** 3, 4);
  });

  it('the hyperbolic law: H = k₁q/(1 − k₂q) through the stated point, without end at the flooding flux', () => {
    const floodsAt = 4 / HOUR;
    const at = atRest(
      withSettlers((q) => ({ band: q.band && { ...q.band, law: { floodsAt }, other: null } })),
    );
    const q = 420 / 180 / HOUR;
    const point = 2.4 / HOUR;
    const k1 = (0.06 * (1 - point / floodsAt)) / point;
    expect(at('extraction.1.settler.band')).toBeCloseTo((k1 * q) / (1 - q / floodsAt), 4);
  });

  it('entrainment at the design throughput is the stated share: 30 ppm of 420 m³/h', () => {
    expect(atRest(vessels)('raffinate.carried organic') * HOUR).toBeCloseTo(0.0126, 5);
  });
});

it('recycle holds the organic to aqueous of a mixer: 1.3 to 1 while 430 to 420 pass through', () => {
  const trains = vessels.trains.map(
    (t): Train => (t.name === 'extraction' ? { ...t, recycle: { hold: 1.3 } } : t),
  );
  const at = atRest({ ...vessels, trains });
  for (const j of [1, 2, 3]) expect(at(`extraction.${j}.mixer.organic_share`)).toBeCloseTo(1.3 / 2.3, 3);
  expect(at('raffinate.flow') * HOUR).toBeCloseTo(420, 0);
});

it('continuity put in the other state carries over what that state is given: 120 ppm for 30', () => {
  const s: Scenario = {
    ...vessels,
    start: 'steady',
    horizon: 6 * HOUR,
    recordEvery: HOUR,
    // The mixers' own inversion is off, so that the stated continuity stays.
    trains: vessels.trains.map((t) => ({
      ...t,
      stages: t.stages.map((q) => ({ ...q, mixer: { ...q.mixer, inversion: null } })),
    })),
    upsets: [
      { at: HOUR, quantity: 'extraction.3.continuity', how: { to: 0 }, over: 0, lasts: null, words: 'flip' },
    ],
  };
  const r = run(s);
  const i = r.plant.system.outputs.findIndex((o) => o.path === 'raffinate.carried organic');
  const { rows } = r.records;
  expect(rows[rows.length - 1][i] / rows[0][i]).toBeCloseTo(4, 2);
});

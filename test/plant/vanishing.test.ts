import { describe, expect, test } from 'vitest';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { run, usual } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { fromText } from '../support/plants.ts';

/** A train at rest; one of its feeds stops for six hours, which is dozens of mixer residence times, and comes back. */
const plant = (law: string, side: string, transfer: string, stops: string): Scenario =>
  fromText(`
title: vanishing
solutes: [metal]
species: [acid]
feeds:
  liquor: {phase: aqueous, flow: 30 m^3/h, metal: 3 g/L, acid: 20 g/L}
  solvent: {phase: organic, flow: 25 m^3/h, metal: 0.5 g/L}
trains:
  train:
    stages: 3
    aqueous: liquor -> raffinate
    organic: solvent -> extract
    mixer: {volume: 3 m^3, continuity: organic, side: ${side}, ${transfer}}
    settler: {aqueous_volume: 6 m^3, organic_volume: 6 m^3, tanks_in_series: 2}
    equilibrium: {metal: ${law}}
start: steady
upsets: [{at: 30 min, change: ${stops}.flow, to: 0 m^3/h, for: 6 h}]
horizon: 30 h
`);

const laws = {
  ratio: '{law: ratio, ratio: 2}',
  langmuir: '{law: langmuir, capacity: 9 g/L, affinity: 0.8 L/g}',
  freundlich: '{law: freundlich, coefficient: 1.5, exponent: 0.7}',
  table: '{law: table, unit: g/L, aqueous: [1, 3, 8], organic: [2, 4, 6]}',
  exchange: '{law: exchange, constant: 30, extractant: 8 g/L, p: 1, releases: {acid: 1.5}}',
  formula: '{law: formula, organic: "8*c_a/(1 + c_a + 0.01*acid)"}',
};

describe.each(Object.entries(laws))('%s', (_, law) => {
  const cases = ['aqueous', 'organic'].flatMap((side) =>
    ['liquor', 'solvent'].flatMap((stops) =>
      ['stage_efficiency: 92 %', 'ka: {value: 1 1/s, fixed: true}'].map((transfer) => ({
        side,
        stops,
        transfer,
      })),
    ),
  );

  test.each(cases)('$side side, $transfer: $stops stops and comes back', ({ side, stops, transfer }) => {
    const s = plant(law, side, transfer, stops);
    const { complete, closures, work, records, plant: p } = run(s, usual);
    expect(complete).toBe(true);
    // A phase that is next to nothing must not hold up the integration.
    expect(work.steps).toBeLessThan(600);
    for (const c of closures) expect(c.closure).toBeLessThan(1e-11);
    // In the end the plant is where it was.
    const { outputs } = steady(s);
    const end = records.rows[records.rows.length - 1];
    p.system.outputs.forEach(({ path, scale }, k) => {
      expect(Math.abs(end[k] - outputs[k]), path).toBeLessThan(1e-5 * scale);
    });
  });
});

test.each([
  { side: 'aqueous', organic: 12.5 },
  { side: 'aqueous', organic: 30 },
  { side: 'organic', organic: 12.5 },
  { side: 'organic', organic: 30 },
])('an organic that arrives with $organic of 12 g/L is pulled back below its capacity, $side side', (p) => {
  const s = plant(
    '{law: langmuir, capacity: 12 g/L, affinity: 1.2 L/g}',
    p.side,
    'stage_efficiency: 92 %',
    'liquor',
  );
  const overloaded: Scenario = {
    ...s,
    start: 'barren',
    upsets: [],
    feeds: s.feeds.map((f) => (f.name === 'solvent' ? { ...f, content: [p.organic, 0] } : f)),
  };
  const { complete, closures, work, records, plant: made } = run(overloaded, usual);
  expect(complete).toBe(true);
  expect(work.steps).toBeLessThan(200);
  for (const c of closures) expect(c.closure).toBeLessThan(1e-11);
  const extract = made.system.outputs.findIndex((o) => o.path === 'extract.metal');
  expect(records.rows[records.rows.length - 1][extract]).toBeLessThan(12);
});

import { describe, expect, test } from 'vitest';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { run, usual } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { fromText, scenario } from '../support/plants.ts';
import { reader } from './cascade.ts';

const HOUR = 3600;
const plants = ['ten', 'saltbush-copper', 'wattle-acid-ratio', 'wattle-acid-table'];
const undisturbed = (name: string): Scenario => ({ ...scenario(name), upsets: [] });

describe.each(plants)('%s', (name) => {
  const s = undisturbed(name);

  test('the steady state is where a long run from barren ends', () => {
    const { outputs, plant, residual, imbalance, drifts } = steady(s);
    const { records, complete } = run(
      { ...s, horizon: 400 * HOUR, recordEvery: 400 * HOUR },
      { ...usual, tolerance: 1e-9 },
    );
    expect(complete).toBe(true);
    const end = records.rows[records.rows.length - 1];
    plant.system.outputs.forEach(({ path, scale }, k) => {
      expect(Math.abs(end[k] - outputs[k]), path).toBeLessThan(1e-8 * (Math.abs(outputs[k]) + 0.01 * scale));
    });
    expect(residual).toBeLessThan(1e-12);
    expect(imbalance).toBeLessThan(1e-12);
    expect(drifts).toEqual([]);
  });

  test('a run that starts there stays there', () => {
    const { records, plant, work } = run({ ...s, start: 'steady', horizon: 48 * HOUR }, usual);
    const [first] = records.rows;
    for (const row of records.rows)
      plant.system.outputs.forEach(({ path, scale }, k) => {
        expect(Math.abs(row[k] - first[k]), path).toBeLessThan(1e-9 * (Math.abs(first[k]) + 0.01 * scale));
      });
    // Where nothing moves, steps grow as fast as they may.
    expect(work.steps).toBeLessThan(40);
  });
});

/** A feed tank on a pump of its own in front of two stages. */
const buffered = (pump: number, content = 'solute: 1 g/L'): Scenario =>
  fromText(`
title: buffered
solutes: [solute]
feeds:
  ore water: {phase: aqueous, flow: 10 m^3/h, solute: 5 g/L}
  solvent: {phase: organic, flow: 12 m^3/h, solute: 0.1 g/L}
tanks:
  surge: {phase: aqueous, from: ore water, to: liquor, volume: 100 m^3, filled: 50 %, flow: ${pump} m^3/h, ${content}}
trains:
  train:
    stages: 2
    aqueous: liquor -> raffinate
    organic: solvent -> extract
    mixer: {volume: 1 m^3, stage_efficiency: 90 %}
    settler: {aqueous_volume: 3 m^3, organic_volume: 3 m^3}
    equilibrium: {solute: {law: ratio, ratio: 3}}
start: steady
horizon: 60 h
`);

describe('a tank whose level drifts', () => {
  test.each([
    { pump: 9, rate: 1, until: 50 },
    { pump: 11, rate: -1, until: 49 },
  ])(
    'pump $pump for an inflow of 10 m³/h: the drift, and $until h until it ends',
    ({ pump, rate, until }) => {
      const s = buffered(pump);
      const { drifts, outputs, plant } = steady(s);
      expect(drifts).toHaveLength(1);
      expect(drifts[0].tank).toBe('surge');
      expect(drifts[0].rate * HOUR).toBeCloseTo(rate, 9);
      expect(drifts[0].until / HOUR).toBeCloseTo(until, 6);
      // Its composition is that of its inflow, its level what it was.
      const read = reader(plant);
      expect(read(outputs, 'surge.solute')).toBeCloseTo(5, 9);
      expect(read(outputs, 'surge.volume')).toBe(50);
      // The run meets the end of the drift when it was foretold.
      const { events, records } = run(s, usual);
      expect(events[0].time / HOUR).toBeCloseTo(until, 6);
      expect(events[0].message).toMatch(rate > 0 ? /full/ : /empty/);
      const before = records.rows[Math.floor(records.rows.length * 0.8)];
      expect(read(before, 'raffinate.solute')).toBeCloseTo(read(outputs, 'raffinate.solute'), 8);
    },
  );

  test('one in balance does not drift', () => {
    expect(steady(buffered(10)).drifts).toEqual([]);
  });

  test('what goes with the drift is no imbalance of the boundary', () => {
    // Of 51.2 kg/h that enter, 5 kg/h stay in the tank that gains 1 m³/h at 5 g/L.
    const r = steady(buffered(9));
    expect(r.drifts[0].rate).toBeCloseTo(1 / 3600, 12);
    expect(r.imbalance).toBeLessThan(1e-12);
  });
});

describe('what cannot leave', () => {
  /** An organic loop through an extraction train alone; the second solute has no law and stays in the organic. */
  const loop = fromText(`
title: loop
solutes: [metal, guest]
species: [acid]
feeds:
  liquor: {phase: aqueous, flow: 10 m^3/h, metal: 2 g/L, acid: 3 g/L}
  strong: {phase: aqueous, flow: 4 m^3/h, acid: 180 g/L}
tanks:
  organic: {phase: organic, from: stripped, to: lean, volume: 20 m^3, filled: 50 %, flow: 9 m^3/h, guest: 7 g/L}
trains:
  extraction:
    stages: 2
    aqueous: liquor -> raffinate
    organic: lean -> loaded
    mixer: {volume: 1 m^3, stage_efficiency: 90 %}
    settler: {aqueous_volume: 3 m^3, organic_volume: 3 m^3}
    equilibrium: &law {metal: {law: exchange, constant: 20, extractant: 6 g/L, releases: {acid: 1.5}}}
  strip:
    stages: 1
    aqueous: strong -> product
    organic: loaded -> stripped
    mixer: {volume: 1 m^3, stage_efficiency: 90 %}
    settler: {aqueous_volume: 3 m^3, organic_volume: 3 m^3}
    equilibrium: *law
horizon: 100 h
`);

  test('keeps its amount: the same everywhere along the loop', () => {
    const { outputs, plant } = steady(loop);
    const read = reader(plant);
    // The trains start with the organic that enters them, so the whole loop holds 7 g/L, at rest too.
    for (const stream of ['lean', 'loaded', 'stripped'])
      expect(read(outputs, `${stream}.guest`)).toBeCloseTo(7, 9);
    expect(read(outputs, 'raffinate.guest')).toBe(0);
  });

  test('and what does leave is at rest as after a long run', () => {
    const { outputs, plant } = steady(loop);
    const read = reader(plant);
    const { records } = run(loop, { ...usual, tolerance: 1e-9 });
    const end = records.rows[records.rows.length - 1];
    for (const path of ['raffinate.metal', 'raffinate.acid', 'product.metal', 'product.acid', 'loaded.metal'])
      expect(Math.abs(read(end, path) / read(outputs, path) - 1), path).toBeLessThan(1e-8);
  });
});

test('recoveries say which way the solute went and what share of what was offered', () => {
  const { figures, outputs, plant } = steady(undisturbed('wattle-acid-ratio'));
  const read = reader(plant);
  expect(figures).toHaveLength(1);
  const [r] = figures[0].solutes;
  const fed = (30 / HOUR) * 40;
  expect(r.transferred).toBeCloseTo(fed - (30 / HOUR) * read(outputs, 'raffinate.acid'), 9);
  expect(r.recovery).toBeCloseTo(r.transferred / fed, 9);
});

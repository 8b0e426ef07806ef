import { describe, expect, test } from 'vitest';
import { run } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { fromText } from '../support/plants.ts';
import { reader } from './cascade.ts';

const beaker = (organic: number, more = '', law = '{law: ratio, ratio: 3}'): string => `
title: Shake-out
solutes: [copper]
batches:
  beaker:
    mixer: {volume: 1 L, organic_share: ${100 * organic} %, ka: 0.02 1/s${more}}
    aqueous: {copper: 5 g/L}
    organic: {copper: 0.5 g/L}
    equilibrium: {copper: ${law}}
horizon: 5 min
record_every: 5 s
`;

describe('phases stirred without flow come to equilibrium', () => {
  // d(c_a − c*)/dt = −k·a·(V/V_a + V/(D·V_o))·(c_a − c*): the balance of two mixed phases with a constant ratio D.
  test.each([
    [0.5, ''],
    [0.25, ''],
    [0.6, ', continuity: organic'],
  ])('organic share %d%s: the closed exponential, all along', (share, more) => {
    const D = 3;
    const r = run(fromText(beaker(share, more)), { integrator: 'rodas5p', tolerance: 1e-10 });
    const read = reader(r.plant);
    const rate = 0.02 * (1 / (1 - share) + 1 / (D * share));
    const total = 5 * (1 - share) + 0.5 * share;
    const rest = total / (1 - share + D * share);
    r.records.times.forEach((t, k) => {
      const exact = rest + (5 - rest) * Math.exp(-rate * t);
      expect(Math.abs(read(r.records.rows[k], 'beaker aqueous.copper') / exact - 1)).toBeLessThan(1e-8);
    });
    expect(r.closures[0].closure).toBeLessThan(1e-13);
  });

  test('on the organic side the rate is stated for the organic: K_o = K_a/D', () => {
    const r = run(fromText(beaker(0.5, ', side: organic')), { integrator: 'rodas5p', tolerance: 1e-10 });
    const read = reader(r.plant);
    const rate = 0.02 * (1 / 0.5 + 3 / 0.5);
    const rest = 2.75 / 2;
    const at = r.records.times.indexOf(20);
    const exact = rest + (5 - rest) * Math.exp(-rate * 20);
    expect(Math.abs(read(r.records.rows[at], 'beaker aqueous.copper') / exact - 1)).toBeLessThan(1e-8);
  });

  test('the state of rest is that of the isotherm, whatever the law', () => {
    // c_o = 12·0.8·c_a/(1 + 0.8·c_a) and c_a + c_o = 5.5 on equal volumes: a quadratic.
    const r = steady(fromText(beaker(0.5, '', '{law: langmuir, capacity: 12 g/L, affinity: 0.8 L/g}')));
    const read = reader(r.plant);
    const [a, b, c] = [0.8, 1 + 12 * 0.8 - 5.5 * 0.8, -5.5];
    const exact = (-b + Math.sqrt(b * b - 4 * a * c)) / (2 * a);
    expect(Math.abs(read(r.outputs, 'beaker aqueous.copper') / exact - 1)).toBeLessThan(1e-9);
    expect(read(r.outputs, 'beaker organic.copper')).toBeCloseTo(5.5 - exact, 9);
  });

  test('a stopped stirrer exchanges nothing, and a limit can be put on a phase', () => {
    const text = `${beaker(0.5)}upsets:
  - {at: 10 s, change: beaker.mixer, to: stopped, for: 1 min}
limits:
  - {keep: beaker aqueous.copper, below: 2 g/L, from: 1 min}
`;
    const r = run(fromText(text), { integrator: 'rodas5p', tolerance: 1e-9 });
    const read = reader(r.plant);
    const at = (t: number): number =>
      read(r.records.rows[r.records.times.indexOf(t)], 'beaker aqueous.copper');
    expect(at(70)).toBe(at(10));
    const rate = 0.02 * (2 + 2 / 3);
    const exact = 1.375 + (5 - 1.375) * Math.exp(-rate * 30);
    expect(Math.abs(at(90) / exact - 1)).toBeLessThan(1e-7);
    const [limit] = r.limits;
    expect(limit.atStart).toBe(true);
    expect(limit.worst.time).toBe(60);
    // Back at 2 g/L once exp(−rate·(t − 60)) = 0.625/3.625, the minute of standing taken off.
    const back = 60 - Math.log(0.625 / 3.625) / rate;
    expect(Math.abs((limit.spells[0].to as number) - back)).toBeLessThan(1e-3);
  });

  test('a plant and a batch can stand in one file', () => {
    const both = `${beaker(0.5)}
feeds:
  water: {phase: aqueous, flow: 1 m^3/h, copper: 1 g/L}
  oil: {phase: organic, flow: 1 m^3/h}
trains:
  one:
    stages: 1
    aqueous: water -> raffinate
    organic: oil -> extract
    mixer: {volume: 50 L, ka: 10 1/s}
    settler: none
    equilibrium: {copper: {law: ratio, ratio: 3}}
`;
    const r = steady(fromText(both));
    const read = reader(r.plant);
    expect(read(r.outputs, 'raffinate.copper')).toBeCloseTo(0.25, 2);
    expect(read(r.outputs, 'beaker aqueous.copper')).toBeCloseTo(1.375, 9);
  });
});

import { describe, expect, test } from 'vitest';
import type { Scenario } from '../../src/scenario/scenario.ts';
import type { RunResult } from '../../src/study/result.ts';
import { run, usual } from '../../src/study/run.ts';
import { fromText } from '../support/plants.ts';
import { follow } from './follow.ts';

const HOUR = 3600;

/** 10 m³/h of 4 g/L into a tank of 100 m³ that is half full of 1 g/L, and out of it by a pump. */
const plant = (pump: number, upsets = ''): Scenario =>
  fromText(`
title: tank
solutes: [metal]
feeds:
  liquor: {phase: aqueous, flow: 10 m^3/h, metal: 4 g/L}
  solvent: {phase: organic, flow: 10 m^3/h}
tanks:
  surge: {phase: aqueous, from: liquor, to: fed, volume: 100 m^3, filled: 50 %, flow: ${pump} m^3/h, metal: 1 g/L}
trains:
  train:
    stages: 1
    aqueous: fed -> raffinate
    organic: solvent -> extract
    mixer: {volume: 1 m^3, stage_efficiency: 90 %}
    settler: {aqueous_volume: 2 m^3, organic_volume: 2 m^3}
    equilibrium: {metal: {law: ratio, ratio: 2}}
upsets: [${upsets}]
horizon: 24 h
record_every: 1 h
`);
const read = (r: RunResult, path: string): number[] => {
  const k = r.plant.system.outputs.findIndex((o) => o.path === path);
  return r.records.rows.map((row) => row[k]);
};
const hours = (r: RunResult, message: RegExp): number[] =>
  r.events.filter((e) => message.test(e.message)).map((e) => Number((e.time / HOUR).toFixed(7)));
const account = (r: RunResult, name: string) => {
  const found = r.closures.find((c) => c.name === name);
  if (!found) throw new Error(`no account of ${name}`);
  return found;
};

describe('a tank that is drawn down', () => {
  // 50 m³ fall by 10 m³/h to the 1 m³ at which the pump stops; the inflow brings back 5 m³ before it starts again.
  const result = run(plant(20), { ...usual, tolerance: 1e-9 });

  test('runs empty, is refilled and runs empty again at its exact times', () => {
    const empty = hours(result, /run empty/);
    const again = hours(result, /enough again/);
    expect(empty.slice(0, 3)).toEqual([4.9, 5.7, 6.5]);
    expect(again.slice(0, 3)).toEqual([5.3, 6.1, 6.9]);
    expect(empty).toHaveLength(24);
    expect(again).toHaveLength(24);
  });

  test('its level is a straight line between them, the flow behind it stops and starts', () => {
    const volume = read(result, 'surge.volume');
    // 4 h is before the first stop; 6 h is 0.3 h into the second refilling: 1 + 3 m³.
    expect(volume[4]).toBeCloseTo(10, 6);
    expect(volume[6]).toBeCloseTo(4, 6);
    const flow = read(result, 'raffinate.flow').map((v) => v * HOUR);
    expect(flow[4]).toBeCloseTo(20, 9);
    expect(flow[6]).toBe(0);
    expect(flow[7]).toBeCloseTo(20, 9);
  });

  test('its content mixes as a tank of falling volume: 4 − 3·(V/V₀)^(10/10)', () => {
    // dm/dt = 10·4 − 20·c, dV/dt = −10, so V·dc/dt = 10·(4 − c) and (4 − c)/(4 − c₀) = V/V₀.
    const c = read(result, 'surge.metal');
    [0, 1, 2, 3, 4].forEach((t) => {
      expect(c[t]).toBeCloseTo(4 - (3 * (50 - 10 * t)) / 50, 7);
    });
  });

  test('all accounts close', () => {
    for (const a of result.closures) expect(a.closure).toBeLessThan(1e-11);
  });
});

describe('a tank that is filled', () => {
  // +5 m³/h for 10 h; from 15 h on the pump takes more than comes.
  const turnedUp = '{at: 15 h, change: surge.flow, to: 12 m^3/h}';
  const result = run(plant(5, turnedUp), { ...usual, tolerance: 1e-9 });

  test('overflows from 10 h until its pump is turned up at 15 h', () => {
    expect(hours(result, /is full and overflows/)).toEqual([10]);
    expect(hours(result, /no longer overflows/)).toEqual([15]);
    const volume = read(result, 'surge.volume');
    expect(volume[12]).toBeCloseTo(100, 8);
    expect(volume[15]).toBeCloseTo(100, 8);
    expect(volume[20]).toBeCloseTo(90, 8);
  });

  test('what spills is on the account of what left', () => {
    const { entered, left, heldBefore, heldAfter } = account(result, 'aqueous');
    // In 240; through the train 5·15 + 12·9 = 183; spilled 25.
    expect(entered).toBeCloseTo(240, 8);
    expect(left).toBeCloseTo(183 + 25, 7);
    expect(heldAfter - heldBefore).toBeCloseTo(32, 7);
  });

  test('what spills has the composition of the full tank', () => {
    // Up to 10 h V·dc/dt = 10·(4 − c) with dV/dt = 5; then 100·dc/dt = 10·(4 − c) while 5·c spills.
    const at10 = 4 - 3 * (50 / 100) ** 2;
    const c = read(result, 'surge.metal');
    expect(c[10]).toBeCloseTo(at10, 7);
    expect(c[15]).toBeCloseTo(4 - (4 - at10) * Math.exp(-0.5), 7);
    const { at } = follow(plant(5, turnedUp), 1e-9);
    expect(at('surge overflow.out.volume')).toBeCloseTo(25, 7);
    expect(at('surge overflow.out.metal')).toBeCloseTo(
      5 * (4 * 5 - (4 - at10) * 10 * (1 - Math.exp(-0.5))),
      6,
    );
  });
});

test('a tank in balance neither spills nor runs dry', () => {
  const { events, closures } = run(plant(10), usual);
  expect(events).toEqual([]);
  for (const a of closures) expect(a.closure).toBeLessThan(1e-11);
});

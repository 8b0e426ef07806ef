import { describe, expect, it } from 'vitest';
import type { SavedState, Scenario } from '../../src/scenario/scenario.ts';
import type { RunResult } from '../../src/study/result.ts';
import { run, usual } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { fromText, scenario } from '../support/plants.ts';

const open = (stages: number, more: string): Scenario =>
  fromText(`
title: open train
solutes: [acid]
feeds:
  broth:   {phase: aqueous, flow: 30 m^3/h, acid: 40 g/L}
  weak:    {phase: aqueous, flow: 30 m^3/h, acid: 25 g/L}
  solvent: {phase: organic, flow: 60 m^3/h, acid: 0.4 g/L}
trains:
  extraction:
    stages: ${stages}
    aqueous: broth -> raffinate
    organic: solvent -> extract
    mixer:   {volume: 4.5 m^3, ka: 0.05 1/s, pumps: true}
    settler: {aqueous_volume: 7.5 m^3, organic_volume: 15 m^3, tanks_in_series: 2}
    equilibrium: {acid: {law: ratio, ratio: 0.75}}
horizon: 80 h
record_every: 20 min
${more}`);

const last = (r: RunResult, path: string): number =>
  r.records.rows[r.records.rows.length - 1][r.plant.system.outputs.findIndex((o) => o.path === path)];
const swapLater = 'upsets:\n  - {at: 79 h 50 min, change: broth, to: weak}';

describe('outages', () => {
  it('a plant with a stage bypassed comes to rest as the plant without it', () => {
    const bypassed = run(
      open(
        4,
        `upsets:\n  - {at: 1 h, change: extraction.2, to: bypassed}\n  - {at: 79 h 59 min, change: broth, to: weak}`,
      ),
      { ...usual, tolerance: 1e-8 },
    );
    const { plant, outputs } = steady(open(3, swapLater));
    const shorter = (path: string): number => outputs[plant.system.outputs.findIndex((o) => o.path === path)];
    const k = bypassed.records.times.findIndex((t) => t >= 79 * 3600);
    const at = (path: string): number =>
      bypassed.records.rows[k][bypassed.plant.system.outputs.findIndex((o) => o.path === path)];
    expect(at('raffinate.acid')).toBeCloseTo(shorter('raffinate.acid'), 6);
    expect(at('extraction.1.settler.aqueous.acid')).toBeCloseTo(
      shorter('extraction.1.settler.aqueous.acid'),
      6,
    );
    expect(at('extraction.3.settler.aqueous.acid')).toBeCloseTo(
      shorter('extraction.2.settler.aqueous.acid'),
      6,
    );
    for (const c of bypassed.closures) expect(c.closure).toBeLessThan(1e-9);
  });

  it('only one phase can be led past a stage', () => {
    const r = run(
      open(
        3,
        `upsets:\n  - {at: 1 h, change: extraction.2, to: organic bypassed, for: 30 h}\n  - {at: 79 h 59 min, change: broth, to: weak}`,
      ),
    );
    expect(r.complete).toBe(true);
    for (const c of r.closures) expect(c.closure).toBeLessThan(1e-9);
  });

  it('another feed in its place is the other feed, flow and all', () => {
    const swapped = run(open(3, 'upsets:\n  - {at: 1 h, change: broth, to: weak}'), {
      ...usual,
      tolerance: 1e-8,
    });
    const s = open(3, swapLater);
    const weak = {
      ...s,
      upsets: [],
      feeds: s.feeds.map((f) => (f.name === 'broth' ? { ...f, content: [25] } : f)),
    };
    const { plant, outputs } = steady(weak);
    const expected = outputs[plant.system.outputs.findIndex((o) => o.path === 'raffinate.acid')];
    expect(last(swapped, 'raffinate.acid')).toBeCloseTo(expected, 5);
    expect(swapped.shades).toHaveLength(1);
    expect(last(swapped, 'broth.flow')).toBeCloseTo(30 / 3600, 12);
    expect(last(swapped, 'broth.acid')).toBe(25);
  });

  it('a stopped agitator that also pumps stops the flows through its train', () => {
    const r = run(
      open(
        3,
        'upsets:\n  - {at: 10 h, change: extraction.2.mixer, to: stopped, for: 1 h}\n  - {at: 79 h 59 min, change: broth, to: weak}',
      ),
    );
    const k = r.records.times.findIndex((t) => t >= 10.5 * 3600);
    const flow = (path: string): number =>
      r.records.rows[k][r.plant.system.outputs.findIndex((o) => o.path === path)];
    expect([flow('raffinate.flow'), flow('extract.flow'), flow('broth.flow')]).toEqual([0, 0, 0]);
    for (const c of r.closures) expect(c.closure).toBeLessThan(1e-9);
  });

  it('a tripped pump stops its loop, and the aqueous goes on', () => {
    const base = scenario('saltbush-copper');
    const r = run({
      ...base,
      start: 'steady',
      horizon: 3 * 3600,
      upsets: [
        {
          at: 3600,
          quantity: 'organic tank.pump',
          how: { to: 0 },
          over: 0,
          lasts: 1200,
          words: 'pump tripped',
        },
      ],
    });
    const k = r.records.times.findIndex((t) => t >= 4200);
    const read = (path: string): number =>
      r.records.rows[k][r.plant.system.outputs.findIndex((o) => o.path === path)];
    expect(read('loaded organic.flow')).toBe(0);
    expect(read('raffinate.flow')).toBeCloseTo(420 / 3600, 12);
    expect(
      Math.max(
        ...r.records.rows.map(
          (row) => row[r.plant.system.outputs.findIndex((o) => o.path === 'raffinate.copper')],
        ),
      ),
    ).toBeGreaterThan(1);
  });
});

describe('a kept state', () => {
  const s = { ...scenario('saltbush-vessels'), horizon: 20 * 3600 };
  const kept = (r: RunResult): SavedState => {
    const k = r.kept as {
      topology: string;
      places: string[];
      values: number[];
      modes: Record<string, number>;
    };
    return { file: 'kept.json', topology: k.topology, places: k.places, values: k.values, modes: k.modes };
  };

  it('goes on where it was kept', () => {
    const whole = run(s, { ...usual, keepAt: 12 * 3600 });
    const shifted = s.upsets.map((u) => ({ ...u, at: u.at - 12 * 3600 }));
    const rest = run({ ...s, start: kept(whole), horizon: 8 * 3600, upsets: shifted });
    for (const path of ['raffinate.copper', 'organic tank.volume', 'extraction.2.settler.interface'])
      expect(Math.abs(last(rest, path) / last(whole, path) - 1)).toBeLessThan(1e-4);
  });

  it('of another plant is refused with the places that differ', () => {
    const other = kept(run({ ...scenario('saltbush-copper'), horizon: 3600, upsets: [] }));
    expect(() => run({ ...s, start: other })).toThrow(/of another plant: it lacks extraction\.1\./);
  });

  it('keeps its concentrations in vessels of another size', () => {
    const base = { ...scenario('saltbush-copper'), horizon: 30 * 3600, upsets: [] };
    const whole = run(base);
    const state = { ...kept(whole), volumes: (whole.kept as { volumes_m3: (number | null)[] }).volumes_m3 };
    const larger = {
      ...base,
      horizon: 3600,
      start: state,
      tanks: base.tanks.map((t) => ({ ...t, held: 0.5 * t.held })),
      trains: base.trains.map((t) => ({
        ...t,
        stages: t.stages.map((q) => ({
          ...q,
          mixer: { ...q.mixer, volume: 2 * q.mixer.volume },
          settler: { ...q.settler, aqueous: 3 * q.settler.aqueous },
        })),
      })),
    };
    const next = run(larger);
    for (const path of [
      'raffinate.copper',
      'raffinate.acid',
      'rich electrolyte.copper',
      'organic tank.copper',
    ]) {
      const i = next.plant.system.outputs.findIndex((o) => o.path === path);
      for (const row of next.records.rows)
        expect(Math.abs(row[i] / last(whole, path) - 1)).toBeLessThan(1e-5);
    }
  });

  it('may come from a run in which no flow moved', () => {
    const base = { ...scenario('saltbush-copper'), horizon: 3600 };
    const still = kept(run({ ...base, upsets: [] }));
    const moved = run({
      ...base,
      start: still,
      upsets: [
        {
          at: 600,
          quantity: 'organic tank.flow',
          how: { by: 0.1, relative: true },
          over: 0,
          lasts: null,
          words: 'more',
        },
      ],
    });
    expect(moved.complete).toBe(true);
  });
});

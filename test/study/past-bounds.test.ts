import { describe, expect, it } from 'vitest';
import { checkScreen } from '../../src/report/check-screen.ts';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { check } from '../../src/study/check/check.ts';
import type { RunResult } from '../../src/study/result.ts';
import { run } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { fromText, scenario } from '../support/plants.ts';

const HOUR = 3600;
const column = (r: RunResult, path: string): number[] => {
  const i = r.plant.system.outputs.findIndex((o) => o.path === path);
  expect(i, path).toBeGreaterThanOrEqual(0);
  return r.records.rows.map((row) => row[i]);
};

const open = (q: {
  tank?: string;
  mixer?: string;
  settler?: string;
  stages?: number;
  more?: string;
}): string => `
title: open train
solutes: [acid]
feeds:
  broth: {phase: aqueous, flow: 30 m^3/h, acid: 40 g/L}
  fresh: {phase: organic, flow: 60 m^3/h, acid: 0.4 g/L}
${q.tank === undefined ? '' : `tanks:\n  T: {phase: organic, from: fresh, to: solvent, volume: 50 m^3, ${q.tank}}`}
trains:
  extraction:
    stages: ${q.stages ?? 3}
    aqueous: broth -> raffinate
    organic: ${q.tank === undefined ? 'fresh' : 'solvent'} -> extract
    mixer:   {${q.mixer ?? 'volume: 4.5 m^3, stage_efficiency: 90 %'}}
    settler: {${q.settler ?? 'area: 20 m^2, aqueous_depth: 0.3 m, organic_depth: 0.3 m'}}
    equilibrium: {acid: {law: ratio, ratio: 0.75}}
start: barren
horizon: 24 h
record_every: 1 h
${q.more ?? ''}`;

describe('what is past a bound at the start', () => {
  it('a full tank overflows from the first second, by what flows in less what is pumped', () => {
    const r = run(fromText(open({ tank: 'filled: 100 %, flow: 55 m^3/h' })));
    for (const v of column(r, 'T.volume')) expect(v).toBeCloseTo(50, 6);
    expect(r.events.map((e) => [e.time, e.name])).toEqual([[0, 'T full']]);
    const lost = r.plant.accounts.map((a) => a.name);
    expect(lost.length).toBeGreaterThan(0);
    for (const c of r.closures) expect(c.closure, c.name).toBeLessThan(1e-12);
  });

  it('an empty tank is not pumped from', () => {
    const r = run(fromText(open({ tank: 'filled: 0.5 %, flow: 90 m^3/h' })));
    expect(r.complete).toBe(true);
    expect(r.events[0]).toMatchObject({ time: 0, name: 'T empty' });
    for (const v of column(r, 'T.volume')) expect(v).toBeGreaterThan(0);
  });

  it('a mixer beyond its inversion limits is in the other continuity', () => {
    const mixer = 'volume: 4.5 m^3, stage_efficiency: 90 %, continuity: aqueous, inversion: {above: 60 %}';
    const text = open({ mixer }).replace(/inversion: \{.*?\}/, 'inversion: {below: 20 %, above: 60 %}');
    const r = run(fromText(text));
    expect(r.events.map((e) => e.time)).toEqual([0, 0, 0]);
    for (const e of r.events) expect(e.message).toContain('organic continuous');
  });
});

describe('what a mixer should not be', () => {
  it('of too little continuous phase is said: in check at design, in a run when it comes about', () => {
    // 60 of organic to 30 of aqueous is 67 %; another half of organic makes it 75 %, twice 80 %.
    const half = run(fromText(open({ more: 'upsets:\n  - {at: 1 h, change: fresh.flow, by: +45 %}' })));
    expect(half.events).toEqual([]);
    const twice = run(fromText(open({ more: 'upsets:\n  - {at: 1 h, change: fresh.flow, by: +100 %}' })));
    expect(twice.events.map((e) => e.name).sort()).toEqual(
      [1, 2, 3].map((j) => `extraction.${j} near inversion`),
    );
    for (const e of twice.events) expect(e.time).toBeGreaterThan(HOUR);
    const still = open({}).replace('60 m^3/h', '120 m^3/h');
    expect(checkScreen(check(fromText(still))).join('\n')).toMatch(
      /extraction\.1: the continuous phase, aqueous, is 20\.0 % of the mixer/,
    );
    expect(checkScreen(check(fromText(open({})))).join('\n')).not.toMatch(/may invert/);
  });

  it('too slow to disperse is said, with the least speed of Skelland and Ramsay', () => {
    const s = scenario('saltbush-vessels');
    const slow = (by: number): RunResult =>
      run({
        ...s,
        start: 'barren',
        horizon: 2 * HOUR,
        limits: [],
        upsets: [
          {
            at: HOUR,
            quantity: 'extraction.2.mixer.speed',
            how: { by, relative: true },
            over: 0,
            lasts: null,
            words: 'slow',
          },
        ],
      });
    const least = column(slow(-0.01), 'extraction.2.mixer.speed over least')[0];
    const said = (r: RunResult): string[] =>
      r.events.flatMap((e) => (e.name.endsWith('below least speed') ? [e.name] : []));
    expect(said(slow(0.95 * (1 / least - 1)))).toEqual([]);
    expect(said(slow(1.05 * (1 / least - 1)))).toEqual(['extraction.2.mixer below least speed']);
  });
});

describe('bypass of the last stage', () => {
  it('the outlet is that of the stage before', () => {
    const upset = 'upsets:\n  - {at: 1 h, change: extraction.3, to: bypassed}';
    const r = run(fromText(open({ more: upset }).replace('horizon: 24 h', 'horizon: 60 h')));
    const alone = steady(fromText(open({ stages: 2 })));
    const i = alone.plant.system.outputs.findIndex((o) => o.path === 'raffinate.acid');
    expect(column(r, 'raffinate.acid').at(-1)).toBeCloseTo(alone.outputs[i], 3);
    expect(column(r, 'raffinate.flow').at(-1)).toBeCloseTo(30 / HOUR, 12);
    expect(column(r, 'extraction.3.settler.aqueous.acid').at(-1)).not.toBeCloseTo(alone.outputs[i], 1);
  });

  it('with weirs the stage keeps its levels, carries nothing over, and the stream goes on', () => {
    const s = scenario('saltbush-vessels');
    const bypass = (phase: string): Scenario['upsets'][number] => ({
      at: 2 * HOUR,
      quantity: `extraction.3.${phase} bypass`,
      how: { to: 1 },
      over: 0,
      lasts: 8 * HOUR,
      words: 'extraction.3 bypassed',
    });
    const trains = s.trains.map((t) => ({
      ...t,
      stages: t.stages.map((q) => ({
        ...q,
        settler: { ...q.settler, carry: q.settler.carry && { ...q.settler.carry, organicInAqueous: 5e-3 } },
      })),
    }));
    const r = run({
      ...s,
      trains,
      start: 'barren',
      horizon: 9 * HOUR,
      recordEvery: HOUR,
      limits: [],
      upsets: [bypass('aqueous'), bypass('organic')],
    });
    expect(r.complete).toBe(true);
    const depth = column(r, 'extraction.3.settler.organic_depth');
    expect(Math.abs(depth[9] - depth[3])).toBeLessThan(2e-3);
    expect(column(r, 'extraction.3.settler.organic_carried')[5]).toBe(0);
    expect(column(r, 'raffinate.flow')[8] / (420 / HOUR)).toBeCloseTo(1, 2);
    expect(column(r, 'raffinate.copper')[8]).toBeCloseTo(
      column(r, 'extraction.2.settler.aqueous.copper')[8],
      9,
    );
    for (const c of r.closures) expect(c.closure, c.name).toBeLessThan(1e-9);
  });
});

describe('vessels that are too small', () => {
  it('a full vessel whose layer is used up says so', () => {
    const r = run(
      fromText(
        open({
          mixer: 'volume: 4 m^3, continuity: organic, stage_efficiency: 90 %',
          settler:
            'area: 20 m^2, aqueous_depth: 0.12 m, organic_depth: 0.5 m, band: {thickness: 6 cm, at: 1.5 m/h, exponent: 3}',
          more: 'upsets:\n  - {at: 2 h, change: broth.flow, by: +150 %}',
        }),
      ),
    );
    expect(r.events.map((e) => e.name)).toContain('extraction.1.settler aqueous layer used up');
  });

  const refused = (text: string): string => {
    try {
      run(fromText(text));
    } catch (e) {
      return (e as Error).message;
    }
    return 'accepted';
  };

  it('a phase led past a stage leaves its mixer to the other one, which the layer must hold', () => {
    const bypass = 'upsets:\n  - {at: 1 h, change: extraction.2, to: organic bypassed}';
    const small = 'volume: 10 m^3, stage_efficiency: 90 %';
    const settler = 'aqueous_volume: 2 m^3, organic_volume: 2 m^3';
    expect(refused(open({ mixer: small, settler, more: bypass }))).toMatch(/stage 2 is too small/);
    expect(refused(open({ mixer: small, settler }))).toBe('accepted');
  });

  it('the recycle counts in what a mixer can take up: organic from 30 alone, or 30 with 60 or more', () => {
    const tripped = 'upsets:\n  - {at: 1 h, change: T.pump, to: tripped, for: 1 h}';
    const mixer = 'volume: 12 m^3, stage_efficiency: 90 %';
    const settler = 'aqueous_volume: 5 m^3, organic_volume: 9 m^3';
    const text = open({ tank: 'filled: 30 %, flow: 60 m^3/h', mixer, settler, more: tripped });
    // Without it 2/3 of organic becomes none: 8 m³ of 12. With 30 m³/h back it becomes 1/2 from 3/4: 3 m³.
    expect(refused(text)).toMatch(/takes up 8 m\^3/);
    expect(refused(text.replace('equilibrium', 'recycle: {organic: 30 m^3/h}\n    equilibrium'))).toBe(
      'accepted',
    );
  });
});

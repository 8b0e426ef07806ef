import fc from 'fast-check';
import { describe, expect, it, test } from 'vitest';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { run, usual } from '../../src/study/run.ts';
import { fromText, scenario } from '../support/plants.ts';

const vessels = scenario('saltbush-vessels');
const HOUR = 3600;
const spread = (least: number, most: number): fc.Arbitrary<number> =>
  fc.double({ min: least, max: most, noNaN: true });

/** The plant with everything on, its weirs, bands, carry-over and agitators varied, and a few upsets of any kind. */
const anyVessels: fc.Arbitrary<Scenario> = fc
  .record({
    start: fc.constantFrom('empty' as const, 'barren' as const),
    length: spread(2, 15),
    port: spread(0.02, 0.15),
    loss: spread(0, 0.05),
    thickness: spread(0.005, 0.06),
    carry: spread(1e-6, 2e-3),
    short: spread(0, 0.3),
    passes: spread(0, 1),
    speed: spread(0.5, 1.3),
    recycle: fc.option(
      fc.oneof(
        fc.record({
          phase: fc.constantFrom('aqueous' as const, 'organic' as const),
          flow: spread(0.001, 0.01),
        }),
        fc.record({ hold: spread(0.9, 1.2) }),
      ),
      { nil: null },
    ),
    upsets: fc.array(
      fc.record({
        at: spread(0, 5),
        lasts: spread(0.1, 2),
        what: fc.constantFrom<[string, Scenario['upsets'][number]['how']]>(
          ['leach liquor.flow', { by: 0.3, relative: true }],
          ['leach liquor.flow', { to: 0 }],
          ['organic tank.flow', { by: -0.5, relative: true }],
          ['organic tank.pump', { to: 0 }],
          ['extraction.2.mixer', { to: 0 }],
          ['extraction.1.mixer.speed', { by: 0.3, relative: true }],
          ['extraction.3.settler.aqueous_weir', { by: -0.05, relative: false }],
          ['extraction.2.aqueous bypass', { to: 1 }],
          ['extraction.2.organic bypass', { to: 1 }],
          ['extraction.3.continuity', { to: 0 }],
        ),
      }),
      { maxLength: 4 },
    ),
  })
  .map(
    (v): Scenario => ({
      ...vessels,
      start: v.start,
      horizon: 6 * HOUR,
      recordEvery: HOUR,
      limits: [],
      tanks: vessels.tanks.map((t) => ({ ...t, passes: v.passes })),
      upsets: v.upsets.map(({ at, lasts, what: [quantity, how] }) => ({
        at: at * HOUR,
        quantity,
        how,
        over: 0,
        lasts: lasts * HOUR,
        words: quantity,
      })),
      trains: vessels.trains.map((t) => ({
        ...t,
        recycle: t.name === 'extraction' ? v.recycle : null,
        stages: t.stages.map((q) => ({
          ...q,
          mixer: {
            ...q.mixer,
            transfer:
              q.mixer.transfer.given === 'impeller'
                ? {
                    given: 'impeller' as const,
                    impeller: {
                      ...q.mixer.transfer.impeller,
                      speed: q.mixer.transfer.impeller.speed * v.speed,
                    },
                  }
                : q.mixer.transfer,
          },
          settler: {
            ...q.settler,
            shortCircuit: v.short,
            band: q.settler.band && { ...q.settler.band, thickness: v.thickness },
            carry: q.settler.carry && { ...q.settler.carry, organicInAqueous: v.carry },
            weirs: q.settler.weirs && {
              ...q.settler.weirs,
              organicLength: v.length,
              port: v.port,
              loss: v.loss,
            },
          },
        })),
      })),
    }),
  );

test('whatever the vessels and their upsets: the run ends and balances close for copper, acid and both phases', () => {
  fc.assert(
    fc.property(anyVessels, (s) => {
      const r = run(s);
      expect(r.stop.reason).toBe('reached-end');
      for (const c of r.closures) expect(c.closure, c.name).toBeLessThanOrEqual(1e-9);
      for (const row of r.records.rows) expect(row.every(Number.isFinite)).toBe(true);
    }),
    { seed: 7, numRuns: 30, endOnFailure: true },
  );
});

describe('methods agree on the plant with everything on', () => {
  const s: Scenario = {
    ...vessels,
    start: 'barren',
    horizon: 3 * HOUR,
    recordEvery: 600,
    limits: [],
    upsets: [{ at: HOUR, quantity: 'organic tank.pump', how: { to: 0 }, over: 0, lasts: 900, words: 'trip' }],
  };
  const reference = run(s, { ...usual, tolerance: 1e-9 });
  const apart = (integrator: string, tolerance: number, horizon = s.horizon): number => {
    const r = run({ ...s, horizon }, { integrator, tolerance });
    const { outputs } = r.plant.system;
    let worst = 0;
    // The last row stands at the horizon of its own run.
    r.records.rows.slice(0, -1).forEach((row, k) => {
      row.forEach((v, i) => {
        if (outputs[i].unit !== 'kg/m^3' && outputs[i].unit !== 'm') return;
        const expected = reference.records.rows[k][i];
        worst = Math.max(worst, Math.abs(v - expected) / (Math.abs(expected) + 1e-2 * outputs[i].scale));
      });
    });
    return worst;
  };

  it.each([
    ['rodas5p', 1e-6],
    ['rodas4', 1e-6],
  ] as const)('%s at %d, over a pump trip', (integrator, tolerance) => {
    expect(apart(integrator, tolerance)).toBeLessThan(300 * tolerance);
  });

  it('odex over the first minutes: weirs and mixers are too stiff for it to go on', () => {
    expect(apart('odex', 1e-6, 1500)).toBeLessThan(3e-4);
  });
});

describe('losses and what makes up for them', () => {
  const text = (more: string): string => `
title: leaky loop
solutes: [metal]
feeds:
  liquor: {phase: aqueous, flow: 10 m^3/h, metal: 2 g/L}
  strip liquor: {phase: aqueous, flow: 3 m^3/h}
  fresh organic: {phase: organic, flow: 20 L/h}
tanks:
  tank: {phase: organic, from: lean, to: pumped, volume: 20 m^3, filled: 10 m^3, flow: 10 m^3/h${more}}
trains:
  extraction:
    stages: 2
    aqueous: liquor -> raffinate
    organic: pumped -> loaded
    mixer: {volume: 1 m^3, stage_efficiency: 95 %}
    settler: {aqueous_volume: 2 m^3, organic_volume: 2 m^3, entrainment: {organic_in_aqueous: 2000 ppm}}
    equilibrium: {metal: {law: ratio, ratio: 5}}
  strip:
    stages: 1
    aqueous: strip liquor -> rich
    organic: loaded -> lean
    mixer: {volume: 0.5 m^3, stage_efficiency: 95 %}
    settler: {aqueous_volume: 2 m^3, organic_volume: 2 m^3}
    equilibrium: {metal: {law: ratio, ratio: 0.05}}
horizon: 100 h
record_every: 10 h
`;
  const level = (s: Scenario): number[] => {
    const r = run(s);
    for (const c of r.closures) expect(c.closure, c.name).toBeLessThanOrEqual(1e-9);
    const i = r.plant.system.outputs.findIndex((o) => o.path === 'tank.volume');
    return r.records.rows.map((row) => row[i]);
  };

  it('entrainment drains the loop by exactly what it carries: 2000 ppm of 10 m³/h are 2 m³ in 100 h', () => {
    const plain = text('').replace(/ {2}fresh organic.*\n/, '');
    expect(level(fromText(plain)).at(-1)).toBeCloseTo(8, 9);
  });

  it('a make-up of the same flow holds the level', () => {
    for (const v of level(fromText(text(', make_up: fresh organic')))) expect(v).toBeCloseTo(10, 9);
  });

  it('a stated recycle adds to the mixer, not to the stages', () => {
    const s = scenario('wattle-acid-ratio');
    const base = run({ ...s, upsets: [], horizon: 600 });
    const more = run({
      ...s,
      upsets: [],
      horizon: 600,
      trains: s.trains.map((t) => ({ ...t, recycle: { phase: 'aqueous' as const, flow: 30 / 3600 } })),
    });
    // 30 + 30 m³/h of aqueous against 60 of organic: the mixer holds as much of each.
    expect(base.figures[0].stages[3].mixerRatio).toBeCloseTo(2, 9);
    expect(more.figures[0].stages[3].mixerRatio).toBeCloseTo(1, 9);
    expect(more.figures[0].advance).toBeCloseTo(2, 9);
  });
});

import { describe, expect, it } from 'vitest';
import { statedChanges, withChanges } from '../../../src/scenario/loop-changes.ts';
import type { Change, Scenario } from '../../../src/scenario/scenario.ts';
import type { Watcher } from '../../../src/solve/integrate.ts';
import { devicesUnder, ground, integrateFrom, keptDevices } from '../../../src/study/rehearse/ground.ts';
import { Standings } from '../../../src/study/rehearse/judge.ts';
import { rehearse } from '../../../src/study/rehearse/rehearse.ts';
import { run, usual } from '../../../src/study/run.ts';
import { fromText } from '../../support/plants.ts';

const HOUR = 3600;

/** A plant whose loop has a delay, noise, a slew and a filter of the wild flow. */
const plant = (answers: string, loop: Partial<Record<'controller' | 'analyser' | 'more', string>> = {}) =>
  fromText(`title: Loops in a rehearsal
solutes: [copper]
feeds:
  liquor: {phase: aqueous, flow: 420 m^3/h, copper: 5.2 g/L}
  lean: {phase: organic, flow: 430 m^3/h, copper: 0.2 g/L}
trains:
  extraction:
    stages: 2
    aqueous: liquor -> raffinate
    organic: lean -> loaded
    mixer: {volume: 42 m^3, stage_efficiency: 94 %}
    settler: {area: 180 m^2, aqueous_depth: 0.35 m, organic_depth: 0.30 m}
    equilibrium: {copper: {law: langmuir, capacity: 9 g/L, affinity: 1.5 L/g}}
loops:
  AIC-1:
    measure: {of: raffinate.copper, analyser: {every: 10 min, delay: 6 min, noise: 1 % of reading${loop.analyser ?? ''}}}
    move: {ratio: lean.flow / liquor.flow, low: 0.4, high: 1.6, slew: 0.02 per min, flow_lag: 20 s}
    keep_at: 0.5 g/L
    controller: {action: direct, gain: 0.3 per g/L, integral_time: 40 min${loop.controller ?? ''}}
${loop.more ?? ''}horizon: 10 h
record_every: 10 min
upsets: [{at: 1 h, change: liquor.copper, by: +20 %, over: 15 min, for: 4 h}]
limits: [{keep: raffinate.copper, below: 0.62 g/L}]
${answers === '' ? '' : `answers:\n${answers}`}`);

const answers = `  lower set point: {start: 20 min after upset, moves: [{change: AIC-1.set point, by: -0.05 g/L}]}
  by hand: {start: 10 min after upset, ends: 30 min after upset ends, moves: [{change: lean.flow, by: +30 %, put: AIC-1 in manual}]}
  wider: {start: after upset, moves: [{change: AIC-1.high, to: 0.95, for: 2 h}]}
  hands off: {start: 30 min after upset, moves: [{change: AIC-1.mode, to: manual, for: 90 min}]}
`;

/** The same scenario, steady at first, with moves as further upsets: the verb `run` knows nothing of answers. */
const plainly = (s: Scenario, moves: readonly Change[]) =>
  run({ ...withChanges(s, [...statedChanges(s), ...moves]), start: 'steady' });

describe('a loop in automatic', () => {
  const s = plant(answers);
  const r = rehearse(s);

  it('acts in every run of a rehearsal as it does in a plain run with the same moves', () => {
    const alone = plainly(s, []);
    expect(r.nothing.limits[0].worst.value).toBeCloseTo(alone.limits[0].worst.value, 5);
    expect(r.nothing.limits[0].breaks?.time).toBeCloseTo(alone.limits[0].spells[0].from, 0);
    const before = run({ ...withChanges(s, []), start: 'steady', horizon: HOUR }).loops[0].travel;
    expect(r.nothing.loops[0].travel).toBeCloseTo(alone.loops[0].travel - before, 4);
    expect(r.answers).toHaveLength(4);
    for (const a of r.answers) {
      const same = plainly(s, a.plan.moves);
      expect(a.figures.limits[0].worst.value, a.answer.name).toBeCloseTo(same.limits[0].worst.value, 5);
      expect(a.figures.outside, a.answer.name).toBeCloseTo(same.limits[0].outside, -1);
      expect(a.figures.loops[0].travel, a.answer.name).toBeCloseTo(same.loops[0].travel - before, 4);
    }
  });

  it('is out of it while an answer has it in manual, and back afterwards', () => {
    const by = (name: string) => r.answers.find((a) => a.answer.name === name)?.figures.loops[0];
    expect(by('hands off')?.automatic).toBeCloseTo(9 * HOUR - 90 * 60, 6);
    expect(by('by hand')?.automaticAtEnd).toBe(true);
    expect(by('by hand')?.automatic).toBeLessThan(5 * HOUR);
  });

  it('pumps what its flow says: extra organic is that of the records', () => {
    const total = (moves: readonly Change[]): number => {
      const { records, plant: p } = plainly({ ...s, recordEvery: 10 }, moves);
      const i = p.system.outputs.findIndex((o) => o.path === 'lean.flow');
      const { times, rows } = records;
      let sum = 0;
      for (let k = 1; k < times.length; k++)
        sum += ((times[k] - times[k - 1]) * (rows[k][i] + rows[k - 1][i])) / 2;
      return sum;
    };
    const none = total([]);
    for (const a of r.answers.filter((q) => q.answer.name !== 'hands off')) {
      const extra = total(a.plan.moves) - none;
      expect(Math.abs(a.figures.extraSolvent - extra), a.answer.name).toBeLessThan(0.5);
    }
  });

  it('latest starts and least sizes are edges that plain runs confirm', () => {
    const hand = r.answers.find((a) => a.answer.name === 'by hand');
    expect(hand?.binds).toBe('lateness');
    const latest = hand?.latest as number;
    const kept = (at: number, factor = 1): boolean => {
      const moves = (hand?.answer.steps[0].moves ?? []).map(
        (m): Change => ({
          ...m,
          at,
          lasts: 5.75 * HOUR - at,
          how: { by: 0.3 * factor, relative: true },
        }),
      );
      return plainly(s, moves).limits[0].spells.length === 0;
    };
    expect([kept(latest - 15), kept(latest + 15)]).toEqual([true, false]);
    const least = hand?.bounds?.sizes?.[0].from as number;
    const begun = HOUR + 600;
    expect([kept(begun, least + 0.003), kept(begun, least - 0.003)]).toEqual([true, false]);
  });

  it('an upset can be one of the loop: without it the loop keeps its set point', () => {
    const own = plant('').upsets;
    const bump = fromText(
      plantText().replace(
        /upsets: .*/,
        'upsets: [{at: 1 h, change: AIC-1.set point, by: +0.1 g/L, for: 3 h}]',
      ),
    );
    expect(own).toHaveLength(1);
    const q = rehearse(bump);
    expect(q.ground.upsets[0].words).toContain('AIC-1.set point');
    expect(q.nothing.limits[0].worst.value).toBeCloseTo(plainly(bump, []).limits[0].worst.value, 5);
    expect(q.nothing.limits[0].worst.value).toBeGreaterThan(0.58);
  });
});

const plantText = (): string => `title: Set point
solutes: [copper]
feeds:
  liquor: {phase: aqueous, flow: 420 m^3/h, copper: 5.2 g/L}
  lean: {phase: organic, flow: 430 m^3/h, copper: 0.2 g/L}
trains:
  extraction:
    stages: 2
    aqueous: liquor -> raffinate
    organic: lean -> loaded
    mixer: {volume: 42 m^3, stage_efficiency: 94 %}
    settler: {area: 180 m^2, aqueous_depth: 0.35 m, organic_depth: 0.30 m}
    equilibrium: {copper: {law: langmuir, capacity: 9 g/L, affinity: 1.5 L/g}}
loops:
  AIC-1:
    measure: {of: raffinate.copper, analyser: {every: 10 min, delay: 6 min}}
    move: {ratio: lean.flow / liquor.flow, low: 0.4, high: 1.6}
    keep_at: 0.5 g/L
    controller: {action: direct, gain: 0.3 per g/L, integral_time: 40 min}
horizon: 10 h
upsets: [{at: 1 h, change: liquor.copper, by: +20 %}]
limits: [{keep: raffinate.copper, below: 0.62 g/L}]
`;

describe('a run that goes on from where another one was', () => {
  it.each([
    [
      'on each result, with a filter and derivative action',
      { controller: ', derivative_time: 5 min, filter: 5 min' },
    ],
    ['on a scan', { controller: ', runs: every 1 s' }],
    ['on composites that sometimes fail', { analyser: ', takes: composite, dropout: 10 %' }],
    [
      'with lead-lag feedforward',
      {
        more: `    feedforward: {from: liquor.copper, analyser: {every: 7 min, delay: 3 min, noise: 1 % of reading}, gain: 0.1 per g/L, lead: 20 min, lag: 10 min}
`,
      },
    ],
  ])('is the same run: %s', (_, loop) => {
    const g = ground(plant('', loop), usual);
    const whole = end(g, g.changes);
    const times = [1.03, 2.5, 4.77, 7.2].map((t) => t * HOUR);
    const devices = devicesUnder(g, g.before, g.changes);
    const kept = new Standings(times, devices);
    integrateFrom(g, g.before, g.changes, g.horizon, usual, [kept], devices);
    expect(kept.kept.size).toBe(times.length);
    for (const from of kept.kept.values()) {
      const parts = end(g, g.changes, from);
      whole.forEach((v, i) => {
        const { scale } = g.plant.system.places[i];
        expect(Math.abs(parts[i] - v)).toBeLessThan(2e-5 * scale + 1e-6 * Math.abs(v));
      });
    }
  });

  function end(g: ReturnType<typeof ground>, changes: readonly Change[], from = g.before): Float64Array {
    const devices = devicesUnder(g, from, changes);
    const state = new Float64Array(g.plant.system.places.length);
    const keep: Watcher = {
      end(_, x) {
        state.set(x);
      },
    };
    const { time } = integrateFrom(g, from, changes, g.horizon, usual, [keep], devices);
    expect(time).toBe(g.horizon);
    expect(keptDevices(devices, time).devices).toHaveLength(1);
    return state;
  }
});

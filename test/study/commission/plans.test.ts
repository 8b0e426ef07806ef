import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, test } from 'vitest';
import type { Commissioning, Procedure } from '../../../src/scenario/commissioning.ts';
import { readScenario } from '../../../src/scenario/read.ts';
import { Refusal } from '../../../src/scenario/refusal.ts';
import type { Change, Scenario } from '../../../src/scenario/scenario.ts';
import { commission } from '../../../src/study/commission/commission.ts';
import { provedByPair } from '../../../src/study/commission/sampling.ts';
import { run, usual } from '../../../src/study/run.ts';
import { scenario } from '../../support/plants.ts';
import { cascade, reader, unitsOfTransfer } from '../cascade.ts';

const HOUR = 3600;
const none: Commissioning = { samples: null, prices: null, procedures: [], uncertain: [], compare: null };
const plant = (commissioning: Partial<Commissioning>, more: Partial<Scenario> = {}): Scenario => ({
  ...cascade({
    stages: 4,
    aqueous: 0.02,
    organic: 0.02,
    feed: 4,
    solvent: 0.2,
    law: { law: 'ratio', ratio: 1.5 },
    transfer: unitsOfTransfer(5, 0.02, 0.02),
    layers: { aqueous: 3, organic: 3 },
  }),
  horizon: 2 * HOUR,
  ...more,
  commissioning: { ...none, ...commissioning },
});
const move = (quantity: string, by: number, lasts: number | null): Change => ({
  at: 0,
  quantity,
  how: { by, relative: true },
  over: 0,
  lasts,
  words: quantity,
});
const procedure = (name: string, more: Partial<Procedure>): Procedure => ({
  name,
  start: null,
  tanks: [],
  trains: [],
  moves: [],
  ...more,
});

describe('procedures', () => {
  const steadyOrganic = procedure('loaded organic', { trains: [{ train: 0, initial: { organic: [3] } }] });
  const atRest = procedure('from rest', { start: 'steady' });
  const richer = procedure('richer for good', { moves: [move('feed.s', 0.2, null)] });
  const slower = procedure('half the feed', { moves: [move('feed.flow', -0.5, HOUR)] });
  const nothing = procedure('as it is', { moves: [move('feed.s', 0, HOUR)] });
  const { starts, plain } = commission(
    plant({ procedures: [slower, richer, atRest, steadyOrganic, nothing] }),
    usual,
  );
  const of = (name: string) => starts.find((q) => q.name === name) as (typeof starts)[number];

  test('are ranked with the plain start among them, the fastest first', () => {
    expect(starts).toHaveLength(6);
    expect(starts[0].name).toBe('from rest');
    expect(of('from rest').steady).toBe(0);
    const times = starts.map((q) => Math.round((q.steady as number) / 60));
    expect(times).toEqual([...times].sort((a, b) => a - b));
    expect(of('half the feed').steady).toBeGreaterThan(plain.steady as number);
  });

  test('one that changes nothing takes as long as the plain start, and costs as much', () => {
    expect(Math.abs((of('as it is').steady as number) / (plain.steady as number) - 1)).toBeLessThan(1e-4);
    expect(Math.abs(of('as it is').waiting.solventFed / plain.waiting.solventFed - 1)).toBeLessThan(1e-4);
  });

  test('one that ends elsewhere is told apart', () => {
    expect(of('richer for good').endsElsewhere.map((q) => q.path)).toEqual(['raffinate.s', 'extract.s']);
    for (const name of ['half the feed', 'from rest', 'loaded organic', 'as it is'])
      expect(of(name).endsElsewhere).toEqual([]);
  });

  test('a kept state is a start as well: the run goes on from there', () => {
    const kept = run({ ...plant({}), horizon: HOUR / 2 }).kept as {
      topology: string;
      places: string[];
      values: number[];
      modes: object;
    };
    const saved = { file: 'kept.json', ...kept, modes: {} };
    const found = commission(plant({ procedures: [procedure('restart', { start: saved })] }), usual);
    const restart = found.starts.find((q) => q.name === 'restart');
    // The same path, half an hour further on, on the same bands.
    expect(Math.abs((restart?.steady as number) - ((found.plain.steady as number) - HOUR / 2))).toBeLessThan(
      2,
    );
  });

  test('one that cannot be started is refused at its own place', () => {
    const saved = { file: 'kept.json', topology: '', places: ['a.volume'], values: [1], modes: {} };
    const wrong = plant({ procedures: [procedure('restart', { start: saved })] });
    let problems: Refusal['problems'] = [];
    try {
      commission(wrong, usual);
    } catch (e) {
      if (e instanceof Refusal) problems = e.problems;
    }
    expect(problems.map((p) => p.path)).toEqual([['procedures', 'restart', 'from', 'saved']]);
  });
});

describe('what the waiting costs', () => {
  const prices = {
    currency: 'USD',
    streams: new Map([
      ['solvent', 10],
      ['extract', 2],
    ]),
    solutes: new Map([['s', 3]]),
    energy: 1e-6,
    power: 5000,
  };
  const limits = [
    { stream: 'raffinate', quantity: 's', side: 'below', value: 2, from: 0 },
    { stream: 'extract', quantity: 's', side: 'above', value: 3.5, from: 0 },
  ] as const;
  const { plain, limits: onSpec } = commission(plant({ prices }, { limits }), usual);
  const [raffinate, extract] = onSpec.map((l) => l.from as number);

  test('counts each outlet until its own limit is kept for good, at constant flows to the last drop', () => {
    const [own, other] = plain.waiting.outlets;
    expect(own).toMatchObject({ outlet: 'raffinate', until: raffinate, by: 'limit', loses: true });
    expect(other).toMatchObject({ outlet: 'extract', until: extract, by: 'limit', loses: false });
    expect(own.volume).toBeCloseTo(0.02 * raffinate, 8);
    expect(other.volume).toBeCloseTo(0.02 * extract, 8);
    // All solute that came in is held, or went out with one of them.
    const later = run({ ...plant({}), horizon: extract, recordEvery: extract / 2000 });
    const read = reader(later.plant);
    const { times, rows } = later.records;
    let sum = 0;
    for (let k = 1; k < times.length; k++)
      sum +=
        ((times[k] - times[k - 1]) / 2) *
        0.02 *
        (read(rows[k - 1], 'extract.s') + read(rows[k], 'extract.s'));
    expect(Math.abs(other.solutes[0] / sum - 1)).toBeLessThan(1e-5);
  });

  test('and puts prices on it', () => {
    const until = Math.max(raffinate, extract);
    const of = (name: string): number => plain.waiting.costs.find((c) => c.of === name)?.amount as number;
    expect(plain.waiting.until).toBe(until);
    expect(of('solvent')).toBeCloseTo(10 * 0.02 * until, 6);
    expect(of('extract')).toBeCloseTo(2 * 0.02 * extract, 6);
    expect(of('energy')).toBeCloseTo(5e-3 * until, 6);
    expect(of('s in off-spec outlets')).toBeCloseTo(3 * plain.waiting.outlets[0].solutes[0], 9);
    expect(plain.waiting.energy).toBeCloseTo(5000 * until, 3);
  });
});

describe('samples', () => {
  const samples = { repeatability: 0.02, gap: HOUR };
  const found = commission({ ...scenario('saltbush-copper'), commissioning: { ...none, samples } }, usual);
  const plan = found.samples as NonNullable<typeof found.samples>;
  const slow = found.modes[0].time;

  test('a stream can be trusted when its drift is below the repeatability, which is its band of the final value', () => {
    const raffinate = found.quantities.find((q) => q.quantity.path === 'raffinate.copper');
    const last = plan.trusted[plan.trusted.length - 1];
    expect(last).toEqual({ path: 'raffinate.copper', from: raffinate?.ofFinal[2] });
  });

  test('two equal samples leave no more than the slowest decay allows, and with a short gap that is much', () => {
    const [short, long] = plan.pairs;
    expect(short.gap).toBe(HOUR / 4);
    expect(long.allowed).toBeCloseTo(0.02 / (Math.exp(HOUR / slow) - 1), 12);
    for (const q of plan.pairs) {
      // The tail is the slowest mode alone by then, so the bound is nearly met; records are a minute apart.
      expect(q.left).toBeLessThan(1.03 * q.allowed);
      expect(q.left).toBeGreaterThan(0.85 * q.allowed);
    }
    expect(short.left).toBeGreaterThan(5 * (long.left as number));
    // Half an hour apart with a decay of an hour: 1/(√e − 1) = 1.5415 repeatabilities may be left.
    expect(provedByPair(0.02, HOUR / 2, HOUR)).toBeCloseTo(0.03083, 5);
  });

  test('the plan begins with the first turnover, and its last two samples confirm', () => {
    const { times, expected, points } = plan;
    const done = plan.trusted[plan.trusted.length - 1].from as number;
    expect(times.length).toBeLessThanOrEqual(10);
    expect(times[0]).toBeGreaterThanOrEqual(found.limits[0].turned as number);
    expect(times[times.length - 2]).toBeGreaterThanOrEqual(done);
    expect(times[times.length - 1] - times[times.length - 2]).toBe(HOUR);
    expect(times.every((t) => t % 300 === 0)).toBe(true);
    const k = points.indexOf('raffinate.copper');
    const [a, b] = expected.slice(-2).map((row) => row[k]);
    expect(Math.abs(b / a - 1)).toBeLessThan(0.02);
  });
});

describe('plant samples', () => {
  const folder = mkdtempSync(join(tmpdir(), 'upsettle-'));
  afterAll(() => rmSync(folder, { recursive: true }));
  const text = `title: t
solutes: [s]
feeds:
  feed: {phase: aqueous, flow: 72 m^3/h, s: 4 g/L}
  solvent: {phase: organic, flow: 72 m^3/h, s: 0.2 g/L}
trains:
  train:
    stages: 3
    aqueous: feed -> raffinate
    organic: solvent -> extract
    mixer: {volume: 2 m^3, stage_efficiency: 90 %}
    settler: {aqueous_volume: 3 m^3, organic_volume: 3 m^3}
    equilibrium: {s: {law: ratio, ratio: 1.5}}
horizon: 1 h
record_every: 10 min
compare: {file: plant.csv, at: 10 min, columns: {raffinate.s: "R [mg/L]", extract.s: "E [g/L]"}}
`;

  test('are read with their units and blanks, and held against the run at their times', () => {
    const bare = run(readScenario(text.replace(/compare:.*\n/, ''), { file: 't', folder }).scenario);
    const read = reader(bare.plant);
    const model = (t: number, path: string): number => read(bare.records.rows[t / 600], path);
    // Off by +0.1 and −0.3 g/L, and −0.5 g/L.
    const lines = [
      'h,R [mg/L],E [g/L]',
      `0,,${model(600, 'extract.s') + 0.5}`,
      `0.3333333333333333,${1000 * (model(1800, 'raffinate.s') - 0.1)},`,
      `0.6666666666666666,${1000 * (model(3000, 'raffinate.s') + 0.3)},`,
    ];
    writeFileSync(join(folder, 'plant.csv'), `${lines.join('\n')}\n`.replace('h,R', 'time [h],R'));
    const { comparison } = commission(readScenario(text, { file: 't', folder }).scenario, usual);
    const [raffinate, extract] = comparison?.columns ?? [];
    expect(raffinate.times.map(Math.round)).toEqual([1800, 3000]);
    expect(raffinate.bias).toBeCloseTo(-0.1, 6);
    expect(raffinate.rmse).toBeCloseTo(Math.sqrt((0.01 + 0.09) / 2), 6);
    expect(extract.times).toEqual([600]);
    expect(extract.bias).toBeCloseTo(-0.5, 6);
    expect(extract.rmse).toBeCloseTo(0.5, 6);
  });
});

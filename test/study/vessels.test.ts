import { beforeAll, describe, expect, it } from 'vitest';
import { headFor } from '../../src/plant/weir-law.ts';
import type { Scenario } from '../../src/scenario/scenario.ts';
import type { RunResult } from '../../src/study/result.ts';
import { run, usual } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { scenario } from '../support/plants.ts';

const at = (r: RunResult, path: string): number => {
  const i = r.plant.system.outputs.findIndex((o) => o.path === path);
  if (i < 0) throw new Error(`no output ${path}`);
  return i;
};
const series = (r: RunResult, path: string): number[] => r.records.rows.map((row) => row[at(r, path)]);
const tight = { ...usual, tolerance: 1e-9 };
const circuit = scenario('saltbush-copper');
const vessels = scenario('saltbush-vessels');

/** A scenario with all stages of all trains changed. */
function everywhere(
  s: Scenario,
  mixer: Partial<Scenario['trains'][number]['stages'][number]['mixer']>,
  settler: Partial<Scenario['trains'][number]['stages'][number]['settler']>,
  train: Partial<Scenario['trains'][number]> = {},
): Scenario {
  return {
    ...s,
    trains: s.trains.map((t) => ({
      ...t,
      ...train,
      stages: t.stages.map((q) => ({
        ...q,
        mixer: { ...q.mixer, ...mixer },
        settler: { ...q.settler, ...settler },
      })),
    })),
  };
}

/** Largest difference of the raffinate between two runs, relative. */
function apart(a: Scenario, b: Scenario): number {
  const [x, y] = [run(a, tight), run(b, tight)].map((r) => series(r, 'raffinate.copper'));
  return Math.max(...x.map((v, k) => Math.abs(v - y[k]) / Math.max(v, 1e-3)));
}

describe('a feature at its neutral value gives the answer of the plain circuit', () => {
  const short = { ...circuit, horizon: 6 * 3600, upsets: [] };
  it.each<[string, Scenario]>([
    [
      'no entrainment',
      everywhere(
        short,
        {},
        { carry: { organicInAqueous: 0, aqueousInOrganic: 0, exponent: 2, other: null } },
      ),
    ],
    ['no short circuit', everywhere(short, {}, { shortCircuit: 0 })],
    ['no recycle', everywhere(short, {}, {}, { recycle: { phase: 'organic', flow: 0 } })],
  ])('%s', (_, s) => {
    expect(apart(short, s)).toBeLessThan(1e-9);
  });

  it('weirs at the flows that they were set for', () => {
    const s = { ...vessels, start: 'barren' as const, horizon: 6 * 3600, upsets: [] };
    const plain = everywhere(s, { inversion: null }, { band: null, carry: null, shortCircuit: 0 });
    // Both start with the same organic in the tank: in full vessels its level stays.
    expect(
      apart({ ...plain, trains: plain.trains.map((t) => ({ ...t, hydraulics: 'full' as const })) }, plain),
    ).toBeLessThan(1e-8);
  });
});

describe('the circuit with everything on', () => {
  let result: RunResult;
  beforeAll(() => {
    result = run(vessels);
  });

  it('closes for copper, acid and both phases', () => {
    expect(result.closures.map((c) => c.name)).toEqual(['copper', 'acid', 'aqueous', 'organic']);
    for (const c of result.closures) expect(c.closure).toBeLessThan(1e-9);
  });

  it('fills in the order in which water runs, and the organic the other way', () => {
    const reaches = (path: string, level: number): number => {
      const k = series(result, path).findIndex((v) => v > level);
      return k < 0 ? Number.NaN : result.records.times[k];
    };
    const order = [1, 2, 3].map((j) => reaches(`extraction.${j}.settler.interface`, 0.2));
    expect(order[0]).toBeLessThan(order[1]);
    expect(order[1]).toBeLessThan(order[2]);
    expect(reaches('raffinate.flow', 0.05)).toBeGreaterThanOrEqual(order[2] - 300);
    expect(reaches('extraction.3.mixer.organic_share', 0.9)).toBeLessThan(
      reaches('extraction.2.settler.interface', 0.1),
    );
  });

  it('takes a bounded number of steps: a weir that starts and a band that vanishes are no obstacles', () => {
    expect(result.work.steps).toBeLessThan(1800);
    expect(result.work.rejectedByNonFinite).toBeLessThan(20);
  });

  it('tells of the interface that filling overshoots and of continuities that flip', () => {
    const names = result.events.map((e) => e.name).join('; ');
    expect(names).toMatch(/inverts|becomes/);
    expect(names).toMatch(/interface high/);
  });

  it('shows a pump trip as a rise of every interface, and its end', () => {
    const z = series(result, 'extraction.2.settler.interface');
    const when = (h: number): number => result.records.times.findIndex((t) => t >= h * 3600);
    expect(z[when(28.4)]).toBeGreaterThan(z[when(27.9)] + 0.02);
    expect(Math.abs(z[when(30.9)] - z[when(27.9)])).toBeLessThan(0.005);
  });

  it('a slower agitator makes larger drops and a worse raffinate, the weir a higher interface', () => {
    const when = (h: number): number => result.records.times.findIndex((t) => t >= h * 3600);
    const d = series(result, 'extraction.3.mixer.drop diameter');
    // d32 goes with N^-1.2 at the same hold-up.
    expect(d[when(25)] / d[when(23.9)]).toBeCloseTo(0.6 ** -1.2, 2);
    expect(series(result, 'raffinate.copper')[when(25.9)]).toBeGreaterThan(
      series(result, 'raffinate.copper')[when(23.9)],
    );
    expect(series(result, 'extraction.1.settler.interface')[when(32.9)]).toBeGreaterThan(0.45);
  });

  it('at rest each weir carries its flow under the head of the weir law', () => {
    const { plant, outputs } = steady({ ...vessels, upsets: [] });
    const read = (path: string): number => outputs[plant.system.outputs.findIndex((o) => o.path === path)];
    const crest = 0.65 - headFor(plant.designs[0].stages[0].leaving.organic, 8);
    expect(read('extraction.1.settler.level') - crest).toBeCloseTo(
      headFor(read('loaded organic.flow'), 8),
      8,
    );
  });

  it('at rest the loop holds the organic that it was filled with', () => {
    const { plant, outputs } = steady({ ...vessels, upsets: [] });
    const read = (path: string): number => outputs[plant.system.outputs.findIndex((o) => o.path === path)];
    const heel = 0.01;
    const account = plant.accounts.find((a) => a.name === 'organic');
    const initial = (account?.held ?? []).reduce((sum, i) => sum + plant.barren[i], 0);
    expect(initial).toBeGreaterThan(520);
    expect(initial).toBeLessThan(520 + heel * 400);
    expect(read('organic tank.volume')).toBeLessThan(260);
  });
});

describe('a band that outgrows its settler', () => {
  it('floods with an event, at a time, and the neighbours feel it', () => {
    const s: Scenario = {
      ...vessels,
      start: 'barren',
      horizon: 8 * 3600,
      upsets: [
        {
          at: 3600,
          quantity: 'leach liquor.flow',
          how: { by: 0.6, relative: true },
          over: 600,
          lasts: 2 * 3600,
          words: 'more liquor',
        },
      ],
    };
    const r = run(s);
    const flood = r.events.find((e) => e.name.includes('floods'));
    expect(flood?.time).toBeGreaterThan(3600);
    expect(flood?.time).toBeLessThan(3 * 3600);
    const carried = series(r, `${flood?.name.split('.settler')[0]}.settler.aqueous_carried`);
    expect(Math.max(...carried)).toBeGreaterThan(20 * carried[0]);
    for (const c of r.closures) expect(c.closure).toBeLessThan(1e-9);
  });
});

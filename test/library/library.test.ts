import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import {
  findStartUp,
  findSteady,
  NotCompleted,
  readScenario,
  readScenarioFile,
  ScenarioRefused,
  simulate,
} from '../../src/library/index.ts';
import { working } from '../../src/library/inside.ts';
import { commission } from '../../src/study/commission/commission.ts';
import { Incomplete, run, usual } from '../../src/study/run.ts';
import { inRepo, scenario } from '../support/plants.ts';

const file = (name: string): string => inRepo(`scenarios/${name}.yaml`);
const refusal = (work: () => unknown): ScenarioRefused => {
  try {
    work();
  } catch (e) {
    if (e instanceof ScenarioRefused) return e;
    throw e;
  }
  throw new Error('not refused');
};

describe('the library', () => {
  it('simulates as run does, to the last bit', () => {
    const ours = simulate(readScenarioFile(file('ten')));
    const r = run(scenario('ten'), usual);
    const i = r.plant.system.outputs.findIndex((o) => o.path === 'extract.solute');
    expect(ours.complete).toBe(true);
    expect(ours.times).toEqual(r.records.times);
    expect([...ours.values('extract.solute')]).toEqual(r.records.rows.map((row) => row[i]));
    expect(ours.quantities[i]).toEqual({ path: 'extract.solute', unit: 'kg/m^3' });
    expect(ours.limits[0]).toMatchObject({ keep: 'extract.solute', side: 'below', limit: 8.5, kept: false });
    expect(ours.limits[0].worst).toEqual(r.limits[0].worst);
    expect(ours.closure).toBeLessThan(1e-9);
  });

  it('a plant of one train comes to the rest of Kremser', () => {
    const plant = readScenario({
      title: 'ratio',
      solutes: ['acid'],
      feeds: {
        broth: { phase: 'aqueous', flow: '10 m^3/h', acid: '10 g/L' },
        solvent: { phase: 'organic', flow: '20 m^3/h' },
      },
      trains: {
        t: {
          stages: 4,
          aqueous: 'broth -> raffinate',
          organic: 'solvent -> extract',
          mixer: { volume: '1 m^3', ka: { value: '1e6 1/s', fixed: true } },
          settler: { aqueous_volume: '1 m^3', organic_volume: '1 m^3' },
          equilibrium: { acid: { law: 'ratio', ratio: 0.75 } },
        },
      },
      horizon: '1 h',
    });
    // Souders and Brown: with E = D·O/A = 1.5 and four stages (E − 1)/(E⁵ − 1) is left.
    const left = 10 * (0.5 / (1.5 ** 5 - 1));
    const rest = findSteady(plant);
    expect(rest.value('raffinate.acid') / left).toBeCloseTo(1, 4);
    expect(rest.trains[0]).toMatchObject({ train: 't', solute: 'acid', loading: null });
    expect(rest.trains[0].recovery).toBeCloseTo(1 - left / 10, 4);
  });

  it('changes make another scenario, and leave the first one as it was', () => {
    const base = readScenarioFile(file('saltbush-copper'));
    const before = structuredClone(base.settings);
    const other = base.with({
      'trains.extraction.stages': 2,
      'trains.extraction.stage 2.mixer.volume': '30 m^3',
      'trains.extraction.equilibrium.copper.constant': 12,
      'upsets.0': undefined,
      limits: [{ keep: 'raffinate.copper', below: '1 g/L' }],
    });
    expect(base.settings).toEqual(before);
    expect(other.settings).toMatchObject({
      trains: {
        extraction: { stages: 2, 'stage 2': { mixer: { volume: '30 m^3' } } },
        // What an alias repeats stays as it was.
        strip: { equilibrium: { copper: { constant: 16 } } },
      },
    });
    expect((other.settings.upsets as unknown[]).length).toBe(1);
    expect(findSteady(other).value('raffinate.copper')).toBeGreaterThan(
      findSteady(base).value('raffinate.copper'),
    );
  });

  it('data files lie beside the scenario, in a changed one as well', () => {
    const plant = readScenarioFile(file('wattle-acid-table')).with({ horizon: '26 h' });
    expect(simulate(plant).times.at(-1)).toBe(26 * 3600);
  });

  it('a start-up says when all comes good, as commission does', () => {
    const plant = readScenarioFile(file('saltbush-startup')).with({ procedures: undefined });
    const found = findStartUp(plant);
    const { procedures: _, ...without } = scenario('saltbush-startup').commissioning!;
    const r = commission(
      { ...scenario('saltbush-startup'), commissioning: { ...without, procedures: [] } },
      usual,
    );
    expect(found.atRest).toBe(r.steady);
    expect(found.onSpec).toBe(r.onSpec);
    expect(found.slowest[0]).toBeCloseTo(r.modes[0].time, 6);
    expect(found.starts.map((s) => s.name)).toEqual([r.plain.name]);
    const copper = found.quantities.find((q) => q.path === 'raffinate.copper')!;
    expect(copper.within.map((w) => w.percent)).toEqual([10, 5, 2, 1]);
    expect(copper.within[3].time).toBeGreaterThan(copper.within[0].time!);
  });
});

describe('what is wrong', () => {
  it('with a text is told with its place', () => {
    const text = readFileSync(file('ten'), 'utf8')
      .replace('stages: 10', 'stages: ten')
      .replace('horizon', 'horizn');
    const e = refusal(() => readScenario(text, inRepo('scenarios')));
    expect(e.complaints.map((c) => c.path)).toEqual(
      ['trains.extraction.stages', 'horizn', 'horizon'].sort(
        (a, b) => e.complaints.findIndex((c) => c.path === a) - e.complaints.findIndex((c) => c.path === b),
      ),
    );
    expect(e.message).toMatch(/^scenario:\d+:\d+ /);
  });

  it('with a change is told with its path', () => {
    const base = readScenarioFile(file('ten'));
    const e = refusal(() => base.with({ 'trains.extraction.mixer.volume': '36 m' }));
    expect(e.complaints).toMatchObject([{ path: 'trains.extraction.mixer.volume' }]);
    expect(() => base.with({ 'title.long': 'x' })).toThrow(/title\.long: title holds no settings/);
  });

  it('with the plant is told when it is computed', () => {
    const base = readScenarioFile(file('wattle-acid-ratio'));
    const small = base.with({ 'trains.extraction.settler.aqueous_volume': '0.1 m^3' });
    expect(refusal(() => simulate(small)).complaints[0].message).toMatch(/settler of stage 1 is too small/);
  });

  it('with a path is told with the nearest one, and a tolerance with what is possible', () => {
    const base = readScenarioFile(file('ten'));
    expect(() => findSteady(base).value('raffinat.solute')).toThrow(/did you mean 'raffinate\.solute'/);
    expect(() => simulate(base, { tolerance: 1 })).toThrow(/from 1e-12 to 1e-2/);
    expect(() => simulate({} as never)).toThrow(TypeError);
  });

  it('a computation that comes to no end is an error of the library with its words', () => {
    const base = readScenarioFile(file('ten'));
    const never = (): never => {
      throw new Incomplete('no steady state found: …; run the scenario');
    };
    expect(() => working(base, never)).toThrow(NotCompleted);
    expect(() => working(base, never)).toThrow(/no steady state found/);
  });
});

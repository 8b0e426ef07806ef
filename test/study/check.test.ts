import { readdirSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { checkScreen } from '../../src/report/check-screen.ts';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { type Checked, check } from '../../src/study/check/check.ts';
import { steady } from '../../src/study/steady.ts';
import { fromText, inRepo, scenario } from '../support/plants.ts';

const single = (q: { mixer?: string; settler?: string; flow?: string; more?: string } = {}): Checked =>
  check(
    fromText(`
title: single
solutes: [acid]
feeds:
  broth: {phase: aqueous, flow: 30 m^3/h, acid: 40 g/L}
  fresh: {phase: organic, flow: ${q.flow ?? '60 m^3/h'}, acid: 0.4 g/L}
trains:
  extraction:
    stages: 4
    aqueous: broth -> raffinate
    organic: fresh -> extract
    mixer:   {${q.mixer ?? 'volume: 4.5 m^3, stage_efficiency: 90 %'}, continuity: organic}
    settler: {${q.settler ?? 'area: 20 m^2, aqueous_depth: 0.3 m, organic_depth: 0.3 m'}}
    equilibrium: {acid: {law: ratio, ratio: 0.75}}
horizon: 24 h
record_every: 10 min
${q.more ?? ''}`),
  );
const looks = (c: Checked): string => checkScreen(c).join('\n').split('Worth a look\n')[1] ?? '';

describe('check looks at the plant at rest', () => {
  it('the extraction factor of a constant ratio is D·O/A, that of stripping its inverse', () => {
    const [f] = single().factors;
    expect(f.extracts).toBe(true);
    for (const v of f.stages) expect(v).toBeCloseTo(0.75 * 2, 9);
    const back = check(
      fromText(`
title: strip
solutes: [acid]
feeds:
  water: {phase: aqueous, flow: 30 m^3/h}
  loaded: {phase: organic, flow: 20 m^3/h, acid: 10 g/L}
trains:
  strip:
    stages: 2
    aqueous: water -> liquor
    organic: loaded -> lean
    mixer: {volume: 3 m^3, stage_efficiency: 90 %}
    settler: {aqueous_volume: 5 m^3, organic_volume: 5 m^3}
    equilibrium: {acid: {law: ratio, ratio: 0.5}}
horizon: 6 h
`),
    );
    expect(back.factors[0].extracts).toBe(false);
    for (const v of back.factors[0].stages) expect(v).toBeCloseTo(3, 9);
  });

  it('recoveries and limits are those of steady', () => {
    const s = scenario('saltbush-copper');
    const c = check(s);
    const at = steady(s);
    expect(c.figures[0].solutes[0].recovery).toBeCloseTo(at.figures[0].solutes[0].recovery, 10);
    const i = at.plant.system.outputs.findIndex((o) => o.path === 'raffinate.copper');
    expect(c.limited[0]).toBeCloseTo(at.outputs[i], 10);
    expect(checkScreen(c).join('\n')).toMatch(
      /raffinate\.copper below 0\.600 g\/L; at rest 0\.234 g\/L, 61 % in hand/,
    );
  });

  it('a limit that is broken at rest already is said', () => {
    const c = single({ more: 'limits: [{keep: raffinate.acid, below: 1 g/L}]' });
    expect(checkScreen(c).join('\n')).toMatch(/at rest \S+ g\/L, \d+ % BEYOND it/);
    expect(looks(c)).toMatch(
      /raffinate\.acid: the limit is broken at rest already; look at flows, stages and law/,
    );
  });

  it('a plant that has no rest is told with what to do, and the rest of the screen is there', () => {
    const c: Checked = { ...single(), restless: 'no steady state found: …; run the scenario', figures: [] };
    expect(checkScreen(c).join('\n')).toMatch(/At rest\n {2}no steady state found/);
  });
});

describe('check knows which way a loop drives the plant', () => {
  const s = scenario('saltbush-loop');
  const turned = (action: 'direct' | 'reverse'): Scenario => ({
    ...s,
    loops: s.loops?.map((l) => ({ ...l, controller: { ...l.controller, action, auto: false } })),
  });

  it('the right way round, with the gain that two steady states give', () => {
    // An efficiency is one at the design flows; a rate stays what it is when the design moves.
    const rated = (of: Scenario): Scenario => ({
      ...of,
      trains: of.trains.map((t) => ({
        ...t,
        stages: t.stages.map((q) => ({
          ...q,
          mixer: { ...q.mixer, transfer: { given: 'ka', ka: 0.1, fixed: true } },
        })),
      })),
    });
    const c = check(rated(turned('direct')));
    const gain = c.loops[0].gain as number;
    const value = (flow: number): number => {
      const moved = { ...rated(s), loops: [], tanks: s.tanks.map((t) => ({ ...t, flow: t.flow! * flow })) };
      const r = steady(moved);
      return r.outputs[r.plant.system.outputs.findIndex((o) => o.path === 'raffinate.copper')];
    };
    const ratio = 430 / 420;
    expect(gain / ((value(1.001) - value(0.999)) / (0.002 * ratio))).toBeCloseTo(1, 3);
    expect(c.loops[0].right).toBe(true);
    expect(checkScreen(c).join('\n')).toMatch(
      /raffinate\.copper high -> more organic tank; plant -\S+ g\/L per ratio at rest: the right way round/,
    );
  });

  it('the wrong way round, with what to write instead', () => {
    expect(checkScreen(check(turned('reverse'))).join('\n')).toMatch(
      /raffinate\.copper high -> less organic tank; plant -.*: the WRONG WAY ROUND, write action: direct/,
    );
  });

  it('a loop whose output binds is worth a look', () => {
    const far = { ...s, loops: s.loops?.map((l) => ({ ...l, keepAt: 0.05 })) };
    expect(looks(check(far))).toMatch(
      /AIC-101: at rest its output stands at its high limit, 1\.50: widen low and high/,
    );
  });
});

describe('what is unusual is said with its figure, the usual range and what to do', () => {
  it.each([
    [
      { mixer: 'volume: 0.3 m^3, stage_efficiency: 90 %' },
      /extraction: mixer time 12 s, usual 1 min to 5 min: look/,
    ],
    [{ mixer: 'volume: 15 m^3, stage_efficiency: 90 %' }, /mixer time 10 min, usual 1 min to 5 min: look/],
    [
      { flow: '240 m^3/h' },
      /extraction: O\/A in the mixer 8\.00, usual 0\.250 to 4\.00: look .* recycle: \{hold: 1\.0\}/,
    ],
    [
      { settler: 'area: 8 m^2, aqueous_depth: 0.3 m, organic_depth: 0.3 m' },
      /settler load 11\.3 m\/h, usual 2\.00 m\/h to 6\.00 m\/h: look at the area/,
    ],
    [
      {
        settler:
          'area: 20 m^2, aqueous_depth: 0.3 m, organic_depth: 0.3 m, band: {thickness: 20 cm, at: 1.5 m/h, exponent: 3}',
      },
      /dispersion band 20\.0 cm, usual up to 15\.0 cm: look at thickness[\s\S]*takes 66\.7 %, usual up to 50\.0 %: deepen/,
    ],
    [
      { mixer: 'volume: 4.5 m^3, stage_efficiency: 60 %' },
      /stage efficiency 60\.0 %, usual 75\.0 % to 99\.5 %: look/,
    ],
    [
      { more: 'upsets: [{at: 3 h, change: broth.acid, by: +5 %, for: 1 min}]' },
      /record_every: 10 min, but an upset lasts 1 min: .*write record_every: 12 s/,
    ],
  ] as const)('%o', (q, line) => {
    expect(looks(single())).toBe('');
    expect(looks(single(q))).toMatch(line);
  });

  it('single stages are named', () => {
    const c = single({ more: '' });
    const one = check({
      ...c.plant.scenario,
      trains: c.plant.scenario.trains.map((t) => ({
        ...t,
        stages: t.stages.map((q, j) => (j === 1 ? { ...q, mixer: { ...q.mixer, volume: 0.3 } } : q)),
      })),
    });
    expect(looks(one)).toMatch(/ {2}extraction\.2: mixer time 12 s/);
  });

  const files = readdirSync(inRepo('scenarios')).filter((n) => n.endsWith('.yaml'));
  it.each(files)('every remark on %s ends in what to do', (name) => {
    const remarks = looks(check(scenario(name.replace('.yaml', '')))).split('\n\n')[0];
    for (const line of remarks.split('\n').filter((l) => l !== ''))
      expect(line).toMatch(/look at|write |state |give it|widen|keeps its level|deepen/);
  });
});

import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { parseDocument, stringify } from 'yaml';
import { plainSettler } from '../../src/scenario/plain.ts';
import { readScenario } from '../../src/scenario/read.ts';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { fromText, inRepo, scenario } from '../support/plants.ts';
import { closed, exchange, instead, sound } from './wrong.ts';

/**
 * A scenario but for the user's own words, in which an upset is repeated to him, and for whether its start was stated:
 * only a rehearsal minds that, which starts steady where it was not.
 */
const plain = (s: Scenario): unknown => ({
  ...s,
  upsets: s.upsets.map((u) => ({ ...u, words: '' })),
  rehearsing: { ...s.rehearsing, startStated: true },
});
const of = (text: string): unknown => plain(fromText(text));

const LAW = '{law: ratio, ratio: 3}';

describe('the same plant, written differently', () => {
  it('in other units', () => {
    const other = instead(
      '420 m^3/h',
      '7000 L/min',
      '430 m^3/h',
      '430 m³/h',
      'copper: 5.2 g/L',
      'copper: 5200 mg/L',
      'acid: 1.8 g/L',
      'acid: 1.8 kg/m^3',
      'copper: 2 g/L',
      'copper: 2 g·L⁻¹',
      '42 m^3,',
      '42000 L,',
      '94 %',
      '94%',
      '180 m^2',
      '180 m²',
      '0.35 m',
      '35 cm',
      'horizon: 10 h',
      'horizon: 9 h 60 min',
      '10 min',
      '600 s',
      'at: 2 h',
      'at: 120 min',
      '0.6 g/L',
      '600 mg/L',
    );
    expect(of(other)).toEqual(of(sound));
  });

  it('12 h 40 min are 760 min', () => {
    const upset = (times: string): string => instead('at: 2 h', times, 'horizon: 10 h', 'horizon: 2 d');
    const a = fromText(upset('at: 12 h 40 min, over: 1 h 30 min, for: 1 d 2 h'));
    expect(plain(a)).toEqual(of(upset('at: 760 min, over: 90 min, for: 26 h')));
    expect(a.upsets[0]).toMatchObject({ at: 45600, over: 5400, lasts: 93600 });
  });

  it('with its keys in another order', () => {
    const sections = sound.split(/^(?=\S)/m);
    const turned = [...sections].reverse().join('');
    expect(turned).not.toBe(sound);
    expect(of(turned)).toEqual(of(sound));
    const feed = instead(
      '{phase: aqueous, flow: 420 m^3/h, copper: 5.2 g/L, acid: 1.8 g/L}',
      '{acid: 1.8 g/L, copper: 5.2 g/L, flow: 420 m^3/h, phase: aqueous}',
    );
    expect(of(feed)).toEqual(of(sound));
  });

  it('in block and in flow style, with quotes, comments and aliases', () => {
    const raw = parseDocument(sound).toJS();
    for (const text of [
      stringify(raw),
      stringify(raw, { collectionStyle: 'flow' }),
      stringify(raw, { defaultStringType: 'QUOTE_SINGLE', defaultKeyType: 'QUOTE_DOUBLE' }),
      JSON.stringify(raw),
      `# a comment\n---\n${sound.replaceAll('\n', ' # more\n')}...\n`,
    ])
      expect(of(text)).toEqual(of(sound));
    const about = (title: string, again: string): string =>
      instead('title: Plain plant', `title: ${title}\nabout: ${again}`);
    expect(of(about('&name Plain plant', '*name'))).toEqual(of(about('Plain plant', 'Plain plant')));
  });

  it('with what is usual left out or stated', () => {
    const stated = instead(
      'horizon',
      'start: barren\nhorizon',
      'stage_efficiency: 94 %',
      'stage_efficiency: 94 %, continuity: aqueous, side: aqueous',
      'organic_depth: 0.30 m',
      'organic_depth: 0.3 m, tanks_in_series: 1',
    );
    expect(of(stated)).toEqual(of(sound));
    expect(of(instead('stages: 3', 'stages: 3\n    initial: {organic: as entering}'))).toEqual(of(sound));
    expect(of(instead('stage_efficiency: 94 %', 'ka: 0.15 1/s'))).toEqual(
      of(instead('stage_efficiency: 94 %', 'ka: {value: 540 1/h, fixed: false}')),
    );
  });

  it('with the settings of each stage stated apart', () => {
    const own =
      '{mixer: {volume: 42 m^3, stage_efficiency: 94 %}, settler: {aqueous_volume: 63 m^3, organic_volume: 54 m^3, area: 180 m^2}}';
    const apart = fromText(
      instead(
        '    mixer: {volume: 42 m^3, stage_efficiency: 94 %}\n',
        `    stage 1: ${own}\n    stage 2: ${own}\n    stage 3: ${own}\n`,
        '    settler: {area: 180 m^2, aqueous_depth: 0.35 m, organic_depth: 0.30 m}\n',
        '',
      ),
    );
    const [stage] = fromText(sound).trains[0].stages;
    // 180 m² · 0.35 m and 180 m² · 0.30 m
    const same = {
      ...plainSettler,
      aqueous: expect.closeTo(63, 12),
      organic: expect.closeTo(54, 12),
      parts: 1,
      area: 180,
    };
    for (const q of [stage, ...apart.trains[0].stages]) expect(q).toEqual({ ...stage, settler: same });
  });

  it('a tank filled by share or by volume', () => {
    expect(of(exchange(closed, '70 %', '70 m^3'))).toEqual(of(closed));
    expect(fromText(exchange(closed, 'filled: 70 %, ', '')).tanks[0].held).toBe(100);
  });

  it('every demonstration plant, after a round through JSON', () => {
    for (const name of ['saltbush-copper', 'ten', 'wattle-acid-ratio', 'wattle-acid-table']) {
      const raw = parseDocument(readFileSync(inRepo(`scenarios/${name}.yaml`), 'utf8')).toJS();
      expect(of(JSON.stringify(raw)), name).toEqual(plain(scenario(name)));
    }
  });
});

describe('isotherms in the file and beside it', () => {
  const folder = mkdtempSync(join(tmpdir(), 'upsettle-'));
  afterAll(() => rmSync(folder, { recursive: true }));

  const inline = (settings: string): Scenario => fromText(instead(LAW, `{law: table, ${settings}}`));
  const beside = (content: string, aqueous: string, organic: string, more = ''): Scenario => {
    writeFileSync(join(folder, 'isotherm.csv'), content);
    const law = `{law: table, file: isotherm.csv, aqueous: "${aqueous}", organic: "${organic}"}`;
    const text = instead(LAW, law, 'horizon', `${more}horizon`);
    return readScenario(text, { file: 'x.yaml', folder }).scenario;
  };

  it('give the same law', () => {
    const a = inline('unit: g/L, aqueous: [0, 1, 2.5, 4], organic: [0, 3, 5, 6.25]');
    for (const b of [
      inline('unit: kg/m^3, aqueous: [1, 2.5, 4], organic: [3, 5, 6.25]'),
      beside('aq [g/L],org [g/L]\n0,0\n1,3\n2.5,5\n4,6.25\n', 'aq [g/L]', 'org [g/L]'),
      beside('n;org g/L;aq kg/m³\n1;3;1\n2;5;2.5\n3;6.25;4\n', 'aq kg/m³', 'org g/L'),
      beside(
        '"aq (mg/L)"\t"org (mg/mL)"\r\n1000\t3\r\n2500\t5\r\n4000\t6.25\r\n',
        'aq (mg/L)',
        'org (mg/mL)',
      ),
    ])
      expect(plain(b)).toEqual(plain(a));
  });

  it('in mol/L by the molar mass, each phase with its own density in kg/kg', () => {
    const molar = beside(
      'aq mol/L,org mol/L\n0.02,0.05\n0.04,0.08\n',
      'aq mol/L',
      'org mol/L',
      'molar_masses: {copper: 63.5 g/mol}\n',
    );
    const [law] = molar.trains[0].equilibrium;
    if (law?.law !== 'table') throw new Error('expected a table');
    [0, 1.27, 2.54].forEach((v, i) => {
      expect(law.aqueous[i]).toBeCloseTo(v, 12);
    });
    [0, 3.175, 5.08].forEach((v, i) => {
      expect(law.organic[i]).toBeCloseTo(v, 12);
    });
    const ratios = beside(
      'aq g/kg,org g/kg\n1,3\n2,5\n',
      'aq g/kg',
      'org g/kg',
      'densities: {aqueous: 1000 kg/m^3, organic: 800 kg/m^3}\n',
    );
    const [second] = ratios.trains[0].equilibrium;
    if (second?.law !== 'table') throw new Error('expected a table');
    [0, 1, 2].forEach((v, i) => {
      expect(second.aqueous[i]).toBeCloseTo(v, 12);
    });
    [0, 2.4, 4].forEach((v, i) => {
      expect(second.organic[i]).toBeCloseTo(v, 12);
    });
  });

  it('a course in elapsed minutes or by the clock', () => {
    const follow = (content: string): unknown => {
      writeFileSync(join(folder, 'course.csv'), content);
      const text = instead('by: +35 %', 'follow: {file: course.csv, column: "Cu g/L"}');
      return readScenario(text, { file: 'x.yaml', folder }).scenario.upsets;
    };
    const a = follow('time [min],Cu g/L\n0,5\n30,6\n90,5.5\n');
    expect(a).toMatchObject([
      { at: 7200, how: { follow: { times: [7200, 9000, 12600], values: [5, 6, 5.5] } } },
    ]);
    expect(follow('time [h];Cu g/L\n0;5\n0.5;6\n1.5;5.5\n')).toEqual(a);
    expect(follow('when,Cu g/L\n2026-03-01 06:00,5\n2026-03-01 06:30,6\n2026-03-01 07:30,5.5\n')).toEqual(a);
    expect(follow('when,Cu g/L\n2026-02-28T23:30Z,5\n2026-03-01T00:00Z,6\n2026-03-01T01:00Z,5.5\n')).toEqual(
      a,
    );
  });
});

describe('streams by mass', () => {
  const water =
    'densities: {aqueous: 1000 kg/m^3, organic: 800 kg/m^3}\nmolar_masses: {copper: 63.5 g/mol}\nhorizon';
  const feed = (settings: string): Scenario['feeds'][number] =>
    fromText(instead('flow: 420 m^3/h, copper: 5.2 g/L, acid: 1.8 g/L', settings, 'horizon', water)).feeds[0];

  it('1000 kg/h at 1 wt % are 990 kg/h of carrier with 10/990 kg/kg', () => {
    const { flow, content } = feed('flow: 1000 kg/h, copper: 1 wt%');
    expect(flow * 3600).toBeCloseTo(0.99, 14);
    expect(content[0] / 1000).toBeCloseTo(10 / 990, 16);
    expect(content[0]).toBeCloseTo(10.1010101010101, 12);
    // Mass goes in as stated: carrier and copper together are 1000 kg/h.
    expect(flow * 3600 * (1000 + content[0])).toBeCloseTo(1000, 10);
  });

  it.each([
    ['flow: 1 t/h, copper: 1 %'],
    ['flow: 1000 kg/h, copper: 10000 ppm'],
    ['flow: 24 t/day, copper: 1 wt %'],
    ['flow: 0.99 m^3/h, copper: 0.0101010101010101 kg/kg'],
    ['flow: 0.99 m^3/h, copper: 10.10101010101010 g/L'],
    ['flow: 0.99 m^3/h, copper: 0.15907102521275 mol/L'],
  ])('the same as %s', (settings) => {
    const a = feed('flow: 1000 kg/h, copper: 1 wt%');
    const b = feed(settings);
    expect(b.flow).toBeCloseTo(a.flow, 14);
    expect(b.content[0]).toBeCloseTo(a.content[0], 11);
  });

  it('shares are of the whole stream, whatever else is in it and however that is stated', () => {
    // 1000 kg: 10 copper, 40 acid, 950 carrier.
    const shares = feed('flow: 1000 kg/h, copper: 1 wt%, acid: 4 wt%');
    expect(shares.flow * 3600).toBeCloseTo(0.95, 14);
    expect(shares.content[0]).toBeCloseTo(10 / 0.95, 12);
    expect(shares.content[1]).toBeCloseTo(40 / 0.95, 12);
    const mixed = feed(`flow: 1000 kg/h, copper: 1 wt%, acid: ${40 / 0.95} g/L`);
    expect(mixed.flow).toBeCloseTo(shares.flow, 14);
    expect(mixed.content[0]).toBeCloseTo(shares.content[0], 11);
  });

  it('an organic is counted with its own density', () => {
    const text = instead(
      'flow: 430 m^3/h, copper: 2 g/L',
      'flow: 806 kg/h, copper: 7.5 g/kg',
      'horizon',
      water,
    );
    const lean = fromText(text).feeds[1];
    // 7.5 g/kg · 800 kg/m³ = 6 kg/m³; 806 kg/h are 1 m³/h of 800 + 6 kg/m³.
    expect(lean.content[0]).toBeCloseTo(6, 13);
    expect(lean.flow * 3600).toBeCloseTo(1, 13);
  });

  it('a change to what is there already changes nothing', () => {
    const to = (quantity: string, value: string): number => {
      const text = instead(
        'flow: 420 m^3/h, copper: 5.2 g/L, acid: 1.8 g/L',
        'flow: 1000 kg/h, copper: 1 wt%, acid: 4 wt%',
        'horizon',
        water,
        'change: liquor.copper, by: +35 %',
        `change: liquor.${quantity}, to: ${value}`,
      );
      const { how } = fromText(text).upsets[0];
      return 'to' in how ? how.to : Number.NaN;
    };
    const { flow, content } = feed('flow: 1000 kg/h, copper: 1 wt%, acid: 4 wt%');
    expect(to('flow', '1000 kg/h')).toBeCloseTo(flow, 16);
    expect(to('copper', '1 wt%')).toBeCloseTo(content[0], 12);
    expect(to('acid', '4 wt%')).toBeCloseTo(content[1], 12);
  });

  it('a limit by mass where one component is dissolved', () => {
    const limit = (text: string): number =>
      fromText(
        exchange(instead('0.6 g/L', text, 'horizon', water), 'species: [acid]\n', '', ', acid: 1.8 g/L', ''),
      ).limits[0].value;
    expect(limit('1 wt%')).toBeCloseTo(1000 / 99, 12);
    expect(limit('1 g/kg')).toBeCloseTo(1, 14);
    expect(limit('0.02 mol/L')).toBeCloseTo(1.27, 14);
  });
});

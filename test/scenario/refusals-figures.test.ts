import { describe, expect, it } from 'vitest';
import { type Complaint, closed, exchange, expectRefusal, instead, refuses, sound } from './wrong.ts';

const FLOW = '5:34 feeds.liquor.flow';
const COPPER = '5:53 feeds.liquor.copper';
const flow = (text: string): string => instead('420 m^3/h', text);
const copper = (text: string): string => instead('5.2 g/L', text);

describe('units', () => {
  refuses([
    ['unknown', flow('420 m^3/hh'), [FLOW, 'a flow by volume', "'420 m^3/hh'", 'unknown unit', "'m^3/hh'"]],
    ['of something else', flow('420 kg/m^3'), [FLOW, 'a flow by volume', "'420 kg/m^3', a concentration"]],
    ['of nothing that a plant has', flow('420 V'), [FLOW, "'420 V', which is something else"]],
    ['a share for a flow', flow('5 %'), [FLOW, "'5 %', a percentage"]],
    ['none', flow('420'), [FLOW, 'bare number 420', 'write its unit', "'420 m^3/h'"]],
    ['none, in quotes', flow('"420"'), [FLOW, "'420' without a unit"]],
    ['a decimal comma', copper('"5,2 g/L"'), [COPPER, "'5,2 g/L'", 'decimal point, not a comma']],
    ['a thousands comma', flow('"1,420 m^3/h"'), [FLOW, 'decimal point, not a comma']],
    ['a thousands blank', flow('1 420 m^3/h'), [FLOW, 'unknown unit', "'420 m^3/h'"]],
    ['a ton', flow('420 ton/h'), [FLOW, 'several meanings', 't for 1000 kg']],
    ['a gallon', flow('420 gal/min'), [FLOW, 'several meanings', 'write L']],
    ['a product where a quotient is meant', copper('5.2 g/L h'), [COPPER, "'5.2 g/L h'", 'something else']],
    ['a word', copper('some'), [COPPER, "got 'some'"]],
    ['a list', copper('[5.2]'), [COPPER, 'got [5.2]']],
    ['true', copper('true'), [COPPER, 'got true']],
    ['yes, which is a text', copper('yes'), [COPPER, "got 'yes'"]],
    [
      'an efficiency as a number',
      instead('94 %', '0.94'),
      ['12:47 trains.extraction.mixer.stage_efficiency', "'94 %'", 'bare number 0.94'],
    ],
    [
      'a rate without unit',
      instead('stage_efficiency: 94 %', 'ka: 0.15'),
      ['12:33 trains.extraction.mixer.ka', "'0.15 1/s'", 'bare number'],
    ],
    [
      'a density without unit',
      instead('horizon', 'densities: {aqueous: 1000}\nhorizon'),
      ['15:22 densities.aqueous', 'bare number 1000'],
    ],
    [
      'a mass flow without density',
      flow('420 t/h'),
      [FLOW, 'a flow by mass needs densities.aqueous', '1000 kg/m^3'],
    ],
    ['a mass fraction without density', copper('1 wt%'), [COPPER, 'a mass fraction needs densities.aqueous']],
    ['a mass ratio without density', copper('1 g/kg'), [COPPER, 'a mass ratio needs densities.aqueous']],
    ['mol without molar mass', copper('0.1 mol/L'), [COPPER, 'molar_masses.copper', '63.55 g/mol']],
    [
      'fractions that leave no carrier',
      instead(
        'horizon',
        'densities: {aqueous: 1000 kg/m^3}\nhorizon',
        '5.2 g/L',
        '60 wt%',
        '1.8 g/L',
        '40 wt%',
      ),
      ['5:11 feeds.liquor', 'leave no carrier'],
    ],
    [
      'the molar mass of nobody',
      instead('horizon', 'molar_masses: {coper: 63 g/mol}\nhorizon'),
      ['15:16 molar_masses.coper', "did you mean 'copper'?"],
    ],
    [
      'the density of nobody',
      instead('horizon', 'densities: {water: 1 kg/L}\nhorizon'),
      ['15:13 densities.water', 'unknown key', 'aqueous, organic'],
    ],
  ]);
});

describe('values', () => {
  refuses([
    ['NaN', copper('NaN'), [COPPER, "got 'NaN'"]],
    ['.nan', copper('.nan'), [COPPER, 'got NaN']],
    ['.inf', copper('.inf'), [COPPER, 'got Infinity']],
    ['minus .inf', copper('-.inf'), [COPPER, 'got -Infinity']],
    ['a number beyond numbers', copper('1e400'), [COPPER, 'got Infinity']],
    ['a figure beyond numbers', copper('1e400 g/L'), [COPPER, "'1e400 g/L' is too large", '1e12 kg/m^3']],
    ['a figure beyond plants', copper('1e13 g/L'), [COPPER, 'too large for a plant']],
    ['a figure below plants', flow('1e-12 m^3/h'), [FLOW, 'too small for a plant']],
    ['a figure below numbers', flow('1e-400 m^3/h'), [FLOW, 'greater than 0', "'1e-400 m^3/h'"]],
    ['a negative flow', flow('-420 m^3/h'), [FLOW, 'greater than 0', "'-420 m^3/h'"]],
    ['no flow', flow('0 m^3/h'), [FLOW, 'greater than 0']],
    ['a negative concentration', copper('-5.2 g/L'), [COPPER, 'must not be negative', "'-5.2 g/L'"]],
    [
      'a negative volume',
      instead('42 m^3,', '-42 m^3,'),
      ['12:21 trains.extraction.mixer.volume', 'greater than 0'],
    ],
    ['no volume', instead('42 m^3,', '0 m^3,'), ['12:21 trains.extraction.mixer.volume', 'greater than 0']],
    ['no area', instead('180 m^2', '0 m^2'), ['13:21 trains.extraction.settler.area', 'greater than 0']],
    [
      'a negative depth',
      instead('0.30 m', '-0.3 m'),
      ['13:68 trains.extraction.settler.organic_depth', 'greater than 0'],
    ],
    [
      'efficiency 100 %',
      instead('94 %', '100 %'),
      ['12:47 trains.extraction.mixer.stage_efficiency', 'between 0 and 100 %', "'100 %'"],
    ],
    [
      'efficiency 0 %',
      instead('94 %', '0 %'),
      ['12:47 trains.extraction.mixer.stage_efficiency', 'between 0 and 100 %'],
    ],
    [
      'efficiency -5 %',
      instead('94 %', '-5 %'),
      ['12:47 trains.extraction.mixer.stage_efficiency', "'-5 %'"],
    ],
    [
      'no rate',
      instead('stage_efficiency: 94 %', 'ka: 0 1/s'),
      ['12:33 trains.extraction.mixer.ka', 'greater than 0'],
    ],
    [
      'a rate with a wrong key',
      instead('stage_efficiency: 94 %', 'ka: {value: 1 1/s, fix: true}'),
      ['12:48 trains.extraction.mixer.ka.fix', "did you mean 'fixed'?"],
    ],
    [
      'a rate fixed by a word',
      instead('stage_efficiency: 94 %', 'ka: {value: 1 1/s, fixed: yes}'),
      ['12:55 trains.extraction.mixer.ka.fixed', 'true or false', "'yes'"],
    ],
    [
      'another phase',
      instead('phase: aqueous', 'phase: Aqueous'),
      ['5:19 feeds.liquor.phase', 'aqueous, organic', "did you mean 'aqueous'?"],
    ],
    [
      'another start',
      instead('horizon', 'start: stedy\nhorizon'),
      ['15:8 start', 'barren, steady', "did you mean 'steady'?"],
    ],
    [
      'a kept state that is not there',
      instead('horizon', 'start: {saved: a}\nhorizon'),
      ['15:16 start.saved', 'cannot read a'],
    ],
    ['a title that moves the cursor', instead('Plain plant', '"\\e[31mred"'), ['1:8 title', "'\\u001b'"]],
    ['a title of two lines', instead('title: Plain plant', 'title: "a\\nb"'), ['1:8 title', "'\\u000a'"]],
    ['an endless title', instead('Plain plant', 'x'.repeat(201)), ['1:8 title', '201 characters', '200']],
    ['a title that is a number', instead('Plain plant', '12'), ['1:8 title', 'expected a text, got 12']],
  ]);

  it('an about may have lines', () => {
    expectRefusal(instead('solutes', 'about: |\n  one\n  two\nsolutes'), []);
  });
});

describe('stages', () => {
  const STAGES = '9:13 trains.extraction.stages';
  it.each(['0', '-1', '1.5', '1e6', '5001', 'three', '"3"', 'true', '.inf', '[3]'])('%s', (value) => {
    expectRefusal(instead('stages: 3', `stages: ${value}`), [[STAGES, 'whole number from 1 to 5000, got']]);
  });

  const differs = (text: string): string => instead('stages: 3', `stages: 3\n    ${text}`);
  refuses([
    [
      'that are not there',
      differs('stage 4: {mixer: {volume: 3 m^3}}'),
      ['10:5 trains.extraction.stage 4', 'stages 1 to 3'],
    ],
    [
      'numbered 0',
      differs('stage 0: {mixer: {volume: 3 m^3}}'),
      ['10:5 trains.extraction.stage 0', 'stages 1 to 3'],
    ],
    [
      'numbered 02',
      differs('stage 02: {mixer: {volume: 3 m^3}}'),
      ['10:5 trains.extraction.stage 02', "'stage 2'"],
    ],
    [
      'numbered 1.5',
      differs('stage 1.5: {mixer: {volume: 3 m^3}}'),
      ['10:5 trains.extraction.stage 1.5', 'unknown key'],
    ],
    ['with nothing', differs('stage 2:'), ['10:5 trains.extraction.stage 2', 'got nothing']],
    [
      'with a wrong key',
      differs('stage 2: {mixr: {volume: 3 m^3}}'),
      ['10:15 trains.extraction.stage 2.mixr', "did you mean 'mixer'?"],
    ],
    [
      'with two rates',
      differs('stage 2: {mixer: {ka: 1 1/s, stage_efficiency: 90 %}}'),
      ['10:22 trains.extraction.stage 2.mixer', 'ka', 'stage_efficiency', 'got both'],
    ],
    [
      'with two depths',
      differs('stage 2: {settler: {aqueous_depth: 1 m, aqueous_volume: 3 m^3}}'),
      ['10:24 trains.extraction.stage 2.settler', 'aqueous layer', 'got both'],
    ],
    [
      'with a start of another word',
      differs('initial: {aqueous: full}'),
      ['10:24 trains.extraction.initial.aqueous', "'as entering'", "'full'"],
    ],
    [
      'with a start of another solute',
      differs('initial: {aqueous: {coper: 1 g/L}}'),
      ['10:25 trains.extraction.initial.aqueous.coper', "did you mean 'copper'?"],
    ],
    [
      'with a species in the organic',
      differs('initial: {organic: {acid: 1 g/L}}'),
      ['10:25 trains.extraction.initial.organic.acid', 'stays in the aqueous'],
    ],
    [
      'with two rates in all',
      instead('94 %', '94 %, ka: 0.1 1/s'),
      ['12:12 trains.extraction.mixer', 'got both'],
    ],
    [
      'with depths but no area',
      instead('area: 180 m^2, ', ''),
      ['13:14 trains.extraction.settler', 'aqueous', 'a depth without an area'],
      ['13:14 trains.extraction.settler', 'organic', 'a depth without an area'],
    ],
    [
      'with too many parts',
      instead('area: 180', 'tanks_in_series: 51, area: 180'),
      ['13:32 trains.extraction.settler.tanks_in_series', 'from 1 to 50, got 51'],
    ],
  ]);

  it('a stage replaces what it states in another way', () => {
    expectRefusal(differs('stage 2: {mixer: {ka: 0.1 1/s}, settler: {aqueous_volume: 60 m^3}}'), []);
  });

  it('settings in common are not needed where each stage has its own', () => {
    const own = '{mixer: {volume: 42 m^3, ka: 0.1 1/s}}';
    const text = instead(
      '    mixer: {volume: 42 m^3, stage_efficiency: 94 %}\n',
      `    stage 1: ${own}\n    stage 2: ${own}\n    stage 3: ${own}\n`,
    );
    expectRefusal(text, []);
  });
});

describe('times of the run', () => {
  const HORIZON = '15:10 horizon';
  const lasts = (text: string): string =>
    exchange(sound.slice(0, sound.indexOf('upsets:')), 'horizon: 10 h', `horizon: ${text}`);
  const times: readonly (readonly [string, ...string[]])[] = [
    ['0 h', 'greater than 0'],
    ['-3 h', 'greater than 0'],
    ['12', 'bare number 12'],
    ['"12"', "'12' without a unit"],
    ['12:30', "'12:30'", 'd, h, min, s'],
    ['2026-03-01', "'2026-03-01'"],
    ['forever', "'12 h 40 min'", "'forever'"],
    ['1 h 30', "'1 h 30'", 'd, h, min, s'],
    ['3 h -5 min', "'3 h -5 min'"],
    ['1.5.2 h', "'1.5.2 h'"],
    ['12 kg', "'12 kg', which is something else"],
    ['101 years', 'too large', '100 years'],
    ['1e30 h', 'too large', '100 years'],
    ['.inf', 'got Infinity'],
  ];
  it.each(times.map(([text, ...words]) => ({ text, words })))('$text', ({ text, words }) => {
    expectRefusal(lasts(text), [[HORIZON, ...words] as unknown as Complaint]);
  });

  refuses([
    [
      'no time between records',
      instead('every: 10 min', 'every: 0 s'),
      ['16:15 record_every', 'greater than 0'],
    ],
    [
      'a thousand million records',
      instead('every: 10 min', 'every: 36 us'),
      ['16:15 record_every', '1.00e+9 records are too many', '2000000'],
    ],
    [
      'records too small for a plant',
      instead('every: 10 min', 'every: 1e-300 s'),
      ['16:15 record_every', 'too small'],
    ],
    [
      'more values than a memory holds',
      instead('stages: 3', 'stages: 5000', 'every: 10 min', 'every: 1 s'),
      ['16:15 record_every', 'records of 30000 concentrations are too many values'],
    ],
    [
      'more concentrations than a memory holds',
      instead('stages: 3', 'stages: 5000', 'area: 180', 'tanks_in_series: 50, area: 180'),
      ['8:3 trains', '765000 concentrations are too many', '400000'],
    ],
  ]);
});

describe('tanks', () => {
  const tank = (...pieces: string[]): string => exchange(closed, ...pieces);
  refuses([
    [
      'filled to 120 %',
      tank('70 %', '120 %'),
      ['7:75 tanks.tank.filled', 'more than its volume of 100 m^3', "'120 %'"],
    ],
    [
      'filled with more',
      tank('70 %', '101 m^3'),
      ['7:75 tanks.tank.filled', 'more than its volume', "'101 m^3'"],
    ],
    ['empty', tank('70 %', '0 %'), ['7:75 tanks.tank.filled', 'greater than 0']],
    ['filled to a number', tank('70 %', '0.7'), ['7:75 tanks.tank.filled', "'94 %'", 'bare number 0.7']],
    ['of no volume', tank('100 m^3', '0 m^3'), ['7:58 tanks.tank.volume', 'greater than 0']],
    [
      'with a species in the organic',
      tank('filled: 70 %', 'acid: 1 g/L, filled: 70 %'),
      ['7:67 tanks.tank.acid', 'stays in the aqueous'],
    ],
    [
      'without phase',
      tank('phase: organic, from', 'from'),
      ['7:9 tanks.tank.phase', 'is missing', 'aqueous, organic'],
    ],
    ['without from', tank('from: loaded, ', ''), ['7:9 tanks.tank.from', 'is missing']],
    ['from a number', tank('from: loaded', 'from: 12'), ['7:32 tanks.tank.from', 'expected a text, got 12']],
  ]);

  it('a sound one is taken', () => {
    expect(closed).not.toBe(sound);
    expectRefusal(closed, []);
    expectRefusal(sound, []);
  });
});

import { describe, it } from 'vitest';
import { type Complaint, expectRefusal, instead, refuses } from './wrong.ts';

const law = (text: string): string => instead('{law: ratio, ratio: 3}', text);
const LAW = '14:27 trains.extraction.equilibrium.copper';
/** A setting of the law, at its column. */
const at = (column: number, path: string): string =>
  `14:${column} trains.extraction.equilibrium.copper.${path}`;

describe('laws', () => {
  refuses([
    [
      'misspelt',
      law('{law: langmiur, capacity: 1 g/L}'),
      [at(33, 'law'), 'ratio, langmuir', "'langmiur'", "did you mean 'langmuir'?"],
    ],
    [
      'unknown',
      law('{law: plait}'),
      [at(33, 'law'), 'ratio, langmuir, freundlich, table, exchange, formula', "'plait'"],
    ],
    ['without name', law('{ratio: 3}'), [at(27, 'law'), 'is missing', 'ratio, langmuir']],
    ['as a text', law('ratio'), [LAW, '{law: ratio, ratio: 2}', "got 'ratio'"]],
    ['as a list', law('[ratio]'), [LAW, '{law: ratio, ratio: 2}', 'got ["ratio"]']],
    ['nothing', law(''), ['14:19 trains.extraction.equilibrium.copper', 'expected a law', 'got nothing']],
    [
      'of an unknown solute',
      law('{law: ratio, ratio: 3}, coper: {law: ratio, ratio: 3}'),
      ['14:51 trains.extraction.equilibrium.coper', 'unknown solute', "did you mean 'copper'?"],
    ],
    [
      'of a species',
      law('{law: ratio, ratio: 3}, acid: {law: ratio, ratio: 3}'),
      ['14:51 trains.extraction.equilibrium.acid', "unknown solute 'acid'"],
    ],
    ['ratio of zero', law('{law: ratio, ratio: 0}'), [at(47, 'ratio'), 'greater than 0, got 0']],
    [
      'ratio with a unit',
      law('{law: ratio, ratio: 3 g/L}'),
      [at(47, 'ratio'), 'a plain number', "'3 g/L', a concentration"],
    ],
    [
      'langmuir without units',
      law('{law: langmuir, capacity: 12, affinity: 1.2}'),
      [at(53, 'capacity'), 'bare number 12'],
      [at(67, 'affinity'), "'1.2 L/g'", 'bare number 1.2'],
    ],
    [
      'langmuir with exchanged units',
      law('{law: langmuir, capacity: 12 L/g, affinity: 1.2 g/L}'),
      [at(53, 'capacity'), 'an affinity'],
      [at(71, 'affinity'), 'a concentration'],
    ],
    [
      'freundlich with a wild exponent',
      law('{law: freundlich, coefficient: 2, exponent: 21}'),
      [at(71, 'exponent'), 'between 0 and 20, neither of them included, got 21'],
    ],
    [
      'freundlich with half its settings',
      law('{law: freundlich, exponent: 1}'),
      [at(27, 'coefficient'), 'is missing', 'a plain number'],
    ],
    [
      'exchange with an unknown acid',
      law('{law: exchange, constant: 16, extractant: 10 g/L, acid: acidd}'),
      [at(83, 'acid'), "unknown species 'acidd'", "did you mean 'acid'?"],
    ],
    [
      'exchange that releases an unknown',
      law('{law: exchange, constant: 16, extractant: 10 g/L, releases: {water: 1}}'),
      [at(88, 'releases.water'), "unknown species 'water'", 'acid'],
    ],
    [
      'exchange that releases less than nothing',
      law('{law: exchange, constant: 16, extractant: 10 g/L, releases: {acid: -1}}'),
      [at(94, 'releases.acid'), 'not be negative, got -1'],
    ],
    [
      'exchange that releases a list',
      law('{law: exchange, constant: 16, extractant: 10 g/L, releases: [acid]}'),
      [at(87, 'releases'), 'by species', '["acid"]'],
    ],
    [
      'exchange without species',
      instead(
        'species: [acid]\n',
        '',
        ', acid: 1.8 g/L',
        '',
        '{law: ratio, ratio: 3}',
        '{law: exchange, constant: 16, extractant: 10 g/L}',
      ),
      ['13:27 trains.extraction.equilibrium.copper', 'needs a species that competes', 'species: [acid]'],
    ],
    [
      'exchange with two species to choose from',
      instead(
        'species: [acid]',
        'species: [salt, base]',
        ', acid: 1.8 g/L',
        '',
        '{law: ratio, ratio: 3}',
        '{law: exchange, constant: 16, extractant: 10 g/L}',
      ),
      [LAW, 'name the species that competes', 'acid: salt'],
    ],
    [
      'trains that do not agree on what is released',
      instead(
        '{law: ratio, ratio: 3}}',
        '{law: exchange, constant: 16, extractant: 10 g/L, releases: {acid: 1.5}}}\n  strip: {stages: 1, aqueous: water -> rich, organic: loaded -> stripped, mixer: {volume: 9 m^3, ka: 0.1 1/s}, settler: {aqueous_volume: 9 m^3, organic_volume: 9 m^3}, equilibrium: {copper: {law: exchange, constant: 16, extractant: 10 g/L, releases: {acid: 1.6}}}}',
        '  lean:',
        '  water: {phase: aqueous, flow: 9 m^3/h, acid: 180 g/L}\n  lean:',
      ),
      ['16:258 trains.strip.equilibrium.copper.releases.acid', 'another train states 1.5, this one 1.6'],
    ],
  ]);

  it.each(['exchange', 'formula', 'langmuir', 'table'])('%s with nothing else', (name) => {
    const missing: Record<string, Complaint[]> = {
      exchange: [
        [at(27, 'constant'), 'is missing'],
        [at(27, 'extractant'), 'is missing'],
      ],
      formula: [[at(27, 'organic'), 'a formula such as']],
      langmuir: [
        [at(27, 'capacity'), 'is missing'],
        [at(27, 'affinity'), 'is missing'],
      ],
      table: [
        [at(27, 'aqueous'), 'list of numbers'],
        [at(27, 'organic'), 'list of numbers'],
      ],
    };
    expectRefusal(law(`{law: ${name}}`), missing[name]);
  });
});

describe('isotherms in the file', () => {
  const table = (text: string): string => law(`{law: table, ${text}}`);
  refuses([
    [
      'of unequal columns',
      table('unit: g/L, aqueous: [0, 1, 2], organic: [0, 3]'),
      [at(80, 'organic'), 'differ in length', '3 aqueous, 2 organic'],
    ],
    [
      'of one point',
      table('unit: g/L, aqueous: [0], organic: [0]'),
      [LAW, 'at least one point besides 0, 0'],
    ],
    ['of no point', table('unit: g/L, aqueous: [], organic: []'), [LAW, 'at least one point']],
    [
      'that turn back',
      table('unit: g/L, aqueous: [0, 1, 2, 1.5], organic: [0, 3, 5, 6]'),
      [LAW, 'must rise', 'point 4 (1.5, 6 g/L)', '(2, 5 g/L)'],
    ],
    [
      'that are level',
      table('unit: g/L, aqueous: [1, 2], organic: [3, 3]'),
      [LAW, 'must rise', 'point 2 (2, 3 g/L)', '(1, 3 g/L)'],
    ],
    [
      'that begin below zero',
      table('unit: g/L, aqueous: [-1, 1], organic: [0, 3]'),
      [LAW, 'starts at 0, 0', 'got -1, 0 g/L'],
    ],
    [
      'that begin above zero on one side',
      table('unit: g/L, aqueous: [0, 1], organic: [1, 3]'),
      [LAW, 'starts at 0, 0', 'got 0, 1 g/L'],
    ],
    ['without unit', table('aqueous: [0, 1], organic: [0, 3]'), [LAW, 'need a unit', 'unit: g/L']],
    [
      'in an unknown unit',
      table('unit: furlong, aqueous: [0, 1], organic: [0, 3]'),
      [at(46, 'unit'), 'unit of concentration', "'furlong'"],
    ],
    [
      'in a unit of flow',
      table('unit: m^3/h, aqueous: [0, 1], organic: [0, 3]'),
      [at(46, 'unit'), 'unit of concentration', "'m^3/h'"],
    ],
    [
      'in mol without molar mass',
      table('unit: mol/L, aqueous: [0, 1, 2], organic: [0, 3, 4]'),
      [at(62, 'aqueous'), 'molar_masses.copper'],
    ],
    [
      'with a word',
      table('unit: g/L, aqueous: [0, one], organic: [0, 3]'),
      [at(64, 'aqueous.1'), 'a number', "'one'"],
    ],
    [
      'with .nan',
      table('unit: g/L, aqueous: [0, .nan], organic: [0, 3]'),
      [at(64, 'aqueous.1'), 'a number', 'NaN'],
    ],
    [
      'with .inf',
      table('unit: g/L, aqueous: [0, 1], organic: [0, .inf]'),
      [at(81, 'organic.1'), 'a number', 'Infinity'],
    ],
    [
      'with a number beyond plants',
      table('unit: g/L, aqueous: [0, 1], organic: [0, 1e300]'),
      [at(81, 'organic.1'), '1e+300 is too large'],
    ],
    [
      'with nothing',
      table('unit: g/L, aqueous: [0, ~], organic: [0, 3]'),
      [at(64, 'aqueous.1'), 'a number', 'nothing'],
    ],
    [
      'as one number',
      table('unit: g/L, aqueous: 1, organic: [3]'),
      [at(60, 'aqueous'), 'list of numbers', 'column', 'got 1'],
    ],
    ['of named columns without file', table('aqueous: a, organic: b'), [LAW, 'file: isotherm.csv']],
  ]);
});

import { describe, expect, it } from 'vitest';
import { answer, closed, instead, refuses, sound } from './wrong.ts';

/** The sound plant with more keys at its end; they begin in line 21. */
const also = (text: string): string => `${sound}${text}\n`;
const procedure = (text: string): string => also(`procedures:\n  first: {${text}}`);
const move = (text: string): string => procedure(`moves: [{change: liquor.flow, ${text}}]`);

describe('samples', () => {
  refuses([
    [
      'without a gap',
      also('samples: {repeatability: 2 %}'),
      ['21:10 samples.gap', 'is missing', "'12 h 40 min'"],
    ],
    [
      'with a bare number',
      also('samples: {repeatability: 2, gap: 1 h}'),
      ['21:26 samples.repeatability', 'bare number 2'],
    ],
    [
      'of nothing',
      also('samples: {repeatability: 0 %, gap: 1 h}'),
      ['21:26 samples.repeatability', 'between 0 and 100 %'],
    ],
    [
      'with an unknown key',
      also('samples: {repeatability: 2 %, gap: 1 h, gab: 1 h}'),
      ['21:41 samples.gab', "did you mean 'gap'?"],
    ],
  ]);
});

describe('prices', () => {
  const prices = (text: string): string => also(`prices: {${text}}`);
  refuses([
    [
      'of an unknown thing',
      prices('coper: 9 USD/kg'),
      ['21:10 prices.coper', 'no feed, outlet or solute', "did you mean 'copper'?"],
    ],
    [
      'of an inner stream',
      `${closed}prices: {lean: 9 USD/m^3}\n`,
      ['22:10 prices.lean', 'no feed, outlet or solute'],
    ],
    ['without a currency', prices('copper: 9 /kg'), ['21:18 prices.copper', "'9 AUD/kg'", "'9 /kg'"]],
    [
      'per another measure',
      prices('copper: 9 USD/m^3'),
      ['21:18 prices.copper', 'a price per mass', "'9 USD/m^3'"],
    ],
    ['that are a number', prices('copper: 9'), ['21:18 prices.copper', 'a price per mass', "'9'"]],
    ['with a comma', prices('copper: "9,5 USD/kg"'), ['21:18 prices.copper', 'decimal point']],
    [
      'in two currencies',
      prices('copper: 9 USD/kg, lean: 2 AUD/m^3'),
      ['21:34 prices.lean', "'AUD' stands beside 'USD'"],
    ],
    ['with a power that is none', prices('power: 120 kWh'), ['21:17 prices.power', "'120 kW'", "'120 kWh'"]],
  ]);
  it('of feeds, outlets, solutes, energy and power are taken', () => {
    expect(
      answer(
        prices(
          'liquor: 0.1 EUR/m^3, raffinate: 2 EUR/m3, copper: 9 EUR per kg, energy: 90 EUR/MWh, power: 0.2 MW',
        ),
      ),
    ).toEqual([]);
  });
});

describe('procedures', () => {
  refuses([
    ['that say nothing', procedure(''), ['22:10 procedures.first', 'says nothing']],
    [
      'from an unknown start',
      procedure('from: baren'),
      ['22:17 procedures.first.from', "did you mean 'barren'?"],
    ],
    [
      'from a state that is not there',
      procedure('from: {saved: no.json}'),
      ['22:25 procedures.first.from.saved', 'cannot read no.json'],
    ],
    [
      'from empty, in full vessels',
      procedure('from: empty'),
      ['22:17 procedures.first.from', 'hydraulics: weirs'],
    ],
    [
      'with an unknown key',
      procedure('form: barren'),
      ['22:11 procedures.first.form', "did you mean 'from'?"],
    ],
    [
      'that change an unknown quantity',
      procedure('moves: [{change: liquor.flwo, by: 5 %}]'),
      ['22:28 procedures.first.moves.0.change', "did you mean 'liquor.flow'?"],
    ],
    [
      'that change a result',
      procedure('moves: [{change: raffinate.copper, by: 5 %}]'),
      ['22:28 procedures.first.moves.0.change', 'is a result'],
    ],
    ['with a bare change', move('by: 5'), ['22:45 procedures.first.moves.0.by', 'two ways', "'5 m^3/h'"]],
    ['before the start', move('at: -1 h, by: 5 %'), ['22:45 procedures.first.moves.0.at', 'not be negative']],
    [
      'of a speed without an impeller',
      procedure('moves: [{change: extraction.1.mixer.speed, by: 5 %}]'),
      ['22:18 procedures.first.moves', 'has an impeller'],
    ],
    [
      'that fill an unknown vessel',
      procedure('initial: {extractoin: {aqueous: as entering}}'),
      ['22:21 procedures.first.initial.extractoin', "did you mean 'extraction'?"],
    ],
    [
      'that fill a train like a tank',
      procedure('initial: {extraction: {copper: 2 g/L}}'),
      ['22:34 procedures.first.initial.extraction.copper', 'is for tanks'],
    ],
    [
      'that fill a tank beyond its brim',
      `${closed}procedures:\n  first: {initial: {tank: {filled: 120 %}}}\n`,
      ['23:36 procedures.first.initial.tank.filled', 'cannot hold more', "'120 %'"],
    ],
    [
      'that fill a tank like a train',
      `${closed}procedures:\n  first: {initial: {tank: {organic: as entering}}}\n`,
      ['23:28 procedures.first.initial.tank.organic', 'is for trains'],
    ],
    [
      'with acid in an organic',
      procedure('initial: {extraction: {organic: {acid: 2 g/L}}}'),
      ['22:44 procedures.first.initial.extraction.organic.acid', 'stays in the aqueous'],
    ],
  ]);
  it('may begin later than the horizon, and swap in a feed that waits', () => {
    expect(answer(move('at: 20 h, by: 5 %'))).toEqual([]);
    const spare = '  lean: {phase: organic, flow: 430 m^3/h, copper: 2 g/L}\n';
    const waits = instead(spare, `${spare}  water: {phase: aqueous, flow: 300 m^3/h}\n`);
    expect(
      answer(`${waits}procedures:\n  first: {moves: [{change: liquor, to: water, for: 1 h}]}\n`),
    ).toEqual([]);
  });
});

describe('uncertain inputs', () => {
  const range = (text: string): string => also(`uncertain: {${text}}`);
  refuses([
    [
      'that are unknown',
      range('extraction.mixer.kb: ±5 %'),
      ['21:13 uncertain.extraction.mixer.kb', "did you mean 'extraction.mixer.ka'?"],
    ],
    ['that are zero anyhow', range('lean.acid: ±5 %'), ['21:13 uncertain.lean.acid', 'unknown input']],
    ['without a range', range('liquor.flow: 5'), ['21:26 uncertain.liquor.flow', "'±20 %'", 'got 5']],
    ['with an absolute range', range('liquor.flow: ±5 m^3/h'), ['21:26 uncertain.liquor.flow', "'±20 %'"]],
    [
      'that could vanish',
      range('liquor.flow: ±100 %'),
      ['21:26 uncertain.liquor.flow', 'between 0 and 100 %'],
    ],
  ]);
  it('take a range in several writings', () => {
    for (const text of ['±5 %', '+-5 %', '+/-5 %', '5 %'])
      expect(answer(range(`liquor.flow: ${text}`))).toEqual([]);
  });
});

describe('plant data', () => {
  refuses([
    [
      'from a file that is not there',
      also('compare: {file: no.csv, columns: {raffinate.copper: x}}'),
      ['21:17 compare.file', 'cannot read no.csv'],
    ],
    [
      'of an unknown quantity',
      also('compare: {file: wattle-broth.csv, columns: {raffnate.copper: "broth acid g/L"}}'),
      ['21:45 compare.columns.raffnate.copper', "did you mean 'raffinate.copper'?"],
    ],
    [
      'from an unknown column',
      also('compare: {file: wattle-broth.csv, columns: {raffinate.copper: "broth"}}'),
      ['21:63 compare.columns.raffinate.copper', "no column 'broth'"],
    ],
    [
      'in another unit',
      also('compare: {file: wattle-broth.csv, columns: {raffinate.flow: "broth acid g/L"}}'),
      ['21:61 compare.columns.raffinate.flow', 'must end in a unit for a flow by volume'],
    ],
    [
      'of no column',
      also('compare: {file: wattle-broth.csv, columns: {}}'),
      ['21:44 compare.columns', 'at least one column'],
    ],
  ]);
});

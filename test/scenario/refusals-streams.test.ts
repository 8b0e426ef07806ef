import { describe } from 'vitest';
import { closed, exchange, instead, refuses } from './wrong.ts';

describe('arrows', () => {
  const arrow = (text: string): string => instead('liquor -> raffinate', text);
  const PLACE = '10:14 trains.extraction.aqueous';
  refuses([
    ['none', arrow('liquor'), [PLACE, "'stream in -> stream out'", "'liquor'"]],
    ['two', arrow('liquor -> raffinate -> pond'), [PLACE, "'liquor -> raffinate -> pond'"]],
    ['to nothing', arrow('"liquor ->"'), [PLACE, "'liquor ->'"]],
    ['of another kind', arrow('liquor → raffinate'), [PLACE, "'liquor → raffinate'"]],
    ['a list', arrow('[liquor, raffinate]'), [PLACE, '["liquor","raffinate"]']],
  ]);
});

describe('streams that do not join up', () => {
  const twoTrains = (strip: string): string =>
    instead(
      'horizon',
      `  strip: {stages: 1, ${strip}, mixer: {volume: 9 m^3, ka: 0.1 1/s}, settler: {aqueous_volume: 9 m^3, organic_volume: 9 m^3}}\nhorizon`,
    );
  refuses([
    [
      'an inlet that nobody makes',
      instead('aqueous: liquor', 'aqueous: liqor'),
      ['5:11 feeds.liquor', "nobody takes the feed 'liquor'", "did you mean 'liqor'?"],
      ['10:14 trains.extraction.aqueous', "nobody makes the stream 'liqor'", "did you mean 'liquor'?"],
    ],
    [
      'a feed that nobody takes',
      instead('  lean:', '  wash: {phase: aqueous, flow: 1 m^3/h}\n  lean:'),
      ['6:9 feeds.wash', "nobody takes the feed 'wash'"],
    ],
    [
      'two makers',
      instead('-> raffinate', '-> out', '-> loaded', '-> out', 'keep: raffinate', 'keep: out'),
      [
        '11:14 trains.extraction.organic',
        "'out' has two makers",
        'train extraction (aqueous) and train extraction (organic)',
      ],
    ],
    [
      'a feed that is an outlet',
      instead('-> raffinate', '-> liquor', 'keep: raffinate', 'keep: liquor'),
      ['10:14 trains.extraction.aqueous', "'liquor' has two makers", 'feed liquor'],
    ],
    [
      'two takers',
      twoTrains('aqueous: liquor -> x, organic: loaded -> y'),
      [
        '15:31 trains.strip.aqueous',
        "'liquor' has two takers",
        'train extraction (aqueous) and train strip (aqueous)',
      ],
    ],
    [
      'the wrong phase',
      instead('aqueous: liquor', 'aqueous: lean', 'organic: lean', 'organic: liquor'),
      ['10:14 trains.extraction.aqueous', "'lean' is organic (feed lean)", 'takes it as aqueous'],
      ['11:14 trains.extraction.organic', "'liquor' is aqueous (feed liquor)", 'takes it as organic'],
    ],
    [
      'a tank of the wrong phase',
      exchange(closed, 'phase: organic', 'phase: aqueous'),
      ['7:32 tanks.tank.from', "'loaded' is organic", 'tank tank takes it as aqueous'],
      ['12:14 trains.extraction.organic', "'lean' is aqueous (tank tank)", 'takes it as organic'],
    ],
    [
      'a species in an organic feed',
      instead('copper: 2 g/L', 'copper: 2 g/L, acid: 2 g/L'),
      ['6:58 feeds.lean.acid', "'acid' stays in the aqueous"],
    ],
  ]);
});

describe('loops', () => {
  const second = (from: string, to: string, flow: string): string =>
    `  tank 2: {phase: organic, from: ${from}, to: ${to}, volume: 100 m^3${flow}}\ntrains:`;
  refuses([
    [
      'without a pump',
      exchange(closed, ', flow: 430 m^3/h}', '}'),
      ['7:44 tanks.tank.to', 'organic loop', "'lean'", 'no pump', 'give a tank in it a flow'],
    ],
    [
      'without a tank',
      instead(
        'lean -> loaded',
        'loaded -> loaded',
        '  lean: {phase: organic, flow: 430 m^3/h, copper: 2 g/L}\n',
        '',
      ),
      ['10:14 trains.extraction.organic', 'organic loop', "'loaded'", 'no pump'],
    ],
    [
      'with two pumps into one stream',
      exchange(closed, 'trains:', second('wash', 'lean', ', flow: 1 m^3/h')),
      ['8:34 tanks.tank 2.from', "nobody makes the stream 'wash'"],
      ['8:44 tanks.tank 2.to', "'lean' has two makers", 'tank tank and tank tank 2', 'exactly one pump'],
    ],
    [
      'a tank that fills itself',
      exchange(closed, 'from: loaded, to: lean', 'from: lean, to: lean'),
      ['12:14 trains.extraction.organic', "'lean' has two takers", 'tank tank'],
    ],
    [
      'two without a pump are both named',
      exchange(
        closed,
        ', flow: 430 m^3/h}',
        '}',
        'horizon',
        '  wash: {stages: 1, aqueous: round -> square, organic: lean 2 -> loaded 2, mixer: {volume: 1 m^3, ka: 1 1/s}, settler: {aqueous_volume: 1 m^3, organic_volume: 1 m^3}}\nhorizon',
        'trains:',
        '  tank 2: {phase: aqueous, from: square, to: round, volume: 1 m^3}\n  tank 3: {phase: organic, from: loaded 2, to: lean 2, volume: 1 m^3, flow: 1 m^3/h}\ntrains:',
      ),
      ['7:44 tanks.tank.to', 'organic loop', 'no pump'],
      ['8:46 tanks.tank 2.to', 'aqueous loop', 'no pump'],
    ],
  ]);
});

import { describe } from 'vitest';
import { type Case, type Complaint, exchange, refuses } from './wrong.ts';

/** A plant whose streams divide and run together. The lines are counted below. */
const plant = `title: Plain plant
solutes: [copper, iron]
species: [acid]
feeds:
  liquor: {phase: aqueous, flow: 420 m^3/h, copper: 5.2 g/L, acid: 1.8 g/L}
  second: {phase: aqueous, flow: 20 m^3/h, copper: 1 g/L}
  lean: {phase: organic, flow: 430 m^3/h, copper: 2 g/L}
splits:
  raffinate: {pond: 10 %, out: rest}
blends:
  fed: [liquor, second]
trains:
  extraction:
    stages: 3
    aqueous: fed -> raffinate
    organic: lean -> loaded
    mixer: {volume: 42 m^3, stage_efficiency: 94 %}
    settler: {aqueous_volume: 60 m^3, organic_volume: 60 m^3}
    equilibrium: {copper: {law: ratio, ratio: 3}}
horizon: 10 h
limits:
  - {keep: out.copper, below: 0.6 g/L}
`;
const SETTLER = 'settler: {aqueous_volume: 60 m^3, organic_volume: 60 m^3}';
const one = (what: string, from: string, to: string, ...complaints: Complaint[]): Case => [
  what,
  exchange(plant, from, to),
  ...complaints,
];

describe('what is sound', () => {
  refuses([
    ['the plant as it is', plant],
    one('cells with back-flow', SETTLER, 'settler: none\n    back_flow: {aqueous: 150 %}'),
    one(
      'shares of a fresh phase',
      'stages: 3',
      'stages: 3\n    arrangement: cross-current\n    shares: [50 %, 30 %, 20 %]',
    ),
    [
      'a batch alone',
      'title: x\nsolutes: [a]\nbatches: {b: {mixer: {volume: 1 L, organic_share: 50 %, ka: 1 1/s}}}\nhorizon: 1 h\n',
    ],
  ]);
});

describe('splits and blends', () => {
  const SPLIT = '9:14 splits.raffinate';
  refuses([
    one('no rest', 'out: rest', 'out: 20 %', [SPLIT, 'one with the rest', '0 of them']),
    one('two rests', 'pond: 10 %', 'pond: rest', [SPLIT, '2 of them']),
    one('nothing but the rest', 'pond: 10 %, ', '', [SPLIT, 'got 1 branches']),
    one('more than all', 'pond: 10 %', 'pond: 60 %, bog: 50 %', [SPLIT, 'come to 110 %', 'leaves no rest']),
    one('a share of all', 'pond: 10 %', 'pond: 100 %', ['9:21 splits.raffinate.pond', 'less than 100 %']),
    one('another unit', 'pond: 10 %', 'pond: 10 g/L', [
      '9:21 splits.raffinate.pond',
      "'10 g/L'",
      'a concentration',
    ]),
    one('no unit', 'pond: 10 %', 'pond: 10', ['9:21 splits.raffinate.pond', 'bare number 10']),
    one('of a stream that nobody makes', '  raffinate: {', '  rafinate: {', [
      '9:13 splits.rafinate',
      "did you mean 'raffinate'?",
    ]),
    one('more than flows', 'pond: 10 %', 'pond: 500 m^3/h', [
      '9:21 splits.raffinate.pond',
      'takes 500 m^3/h of a stream of 440 m^3/h',
    ]),
    one('a name with a dot', 'pond: 10 %', 'po.nd: 10 %', [
      '9:15 splits.raffinate.po.nd',
      "must not hold '.'",
    ]),
    one(
      'one stream does not blend',
      '[liquor, second]',
      '[liquor]',
      ['6:11 feeds.second'],
      ['11:8 blends.fed', 'two streams or more'],
    ),
    one(
      'the same twice',
      '[liquor, second]',
      '[liquor, liquor]',
      ['6:11 feeds.second'],
      ['11:8 blends.fed', 'two takers'],
    ),
    one('of two phases', '[liquor, second]', '[liquor, second, loaded]', [
      '11:8 blends.fed',
      "'loaded' is organic",
      'takes it as aqueous',
    ]),
    one('in no list', 'fed: [liquor, second]', 'fed: {liquor: 1}', ['11:8 blends.fed', 'a list of streams']),
    [
      'round a loop without a tank',
      exchange(plant, 'pond: 10 %', 'back: 10 %', '[liquor, second]', '[liquor, second, back]'),
      ['15:14 trains.extraction.aqueous', 'aqueous loop', 'has no pump'],
    ],
  ]);
});

describe('side feeds and draws', () => {
  const stage = (what: string, settings: string, ...complaints: Complaint[]): Case =>
    one(what, '    equilibrium', `    ${settings}\n    equilibrium`, ...complaints);
  refuses([
    stage('takes no name', 'stage 2: {takes: 3}', [
      '19:22 trains.extraction.stage 2.takes',
      'a stream or a list',
    ]),
    stage('taken twice', 'stage 2: {takes: second}', [
      '11:8 blends.fed',
      'two takers',
      'stage 2 of extraction',
    ]),
    stage('of a stage that is not there', 'stage 7: {draws: {mid: {phase: aqueous, take: 10 %}}}', [
      '19:5 trains.extraction.stage 7',
      'stages 1 to 3',
    ]),
    stage('too much', 'stage 2: {draws: {mid: {phase: aqueous, take: 900 m^3/h}}}', [
      '19:28 trains.extraction.stage 2.draws.mid',
      'takes 900 m^3/h of a stream of 440 m^3/h',
    ]),
    stage('no phase', 'stage 2: {draws: {mid: {phase: watery, take: 9 m^3/h}}}', [
      '19:36 trains.extraction.stage 2.draws.mid.phase',
      "'watery'",
    ]),
    stage('no amount', 'stage 2: {draws: {mid: {phase: aqueous}}}', [
      '19:28 trains.extraction.stage 2.draws.mid.take',
      'is missing',
    ]),
    stage('a name that is taken', 'stage 2: {draws: {loaded: {phase: aqueous, take: 9 m^3/h}}}', [
      '19:31 trains.extraction.stage 2.draws.loaded',
      'two makers',
    ]),
  ]);
});

describe('arrangements', () => {
  const cross = 'stages: 3\n    arrangement: cross-current\n    shares: ';
  refuses([
    one('an unknown one', 'stages: 3', 'stages: 3\n    arrangement: crosscurrent', [
      '15:18 trains.extraction.arrangement',
      "did you mean 'cross-current'?",
    ]),
    one('too few shares', 'stages: 3', `${cross}[50 %, 50 %]`, [
      '16:13 trains.extraction.shares',
      '2 shares for 3 stages',
    ]),
    one('shares of more than all', 'stages: 3', `${cross}[50 %, 30 %, 30 %]`, [
      '16:13 trains.extraction.shares',
      'come to 110 %',
    ]),
    one('shares without a fresh phase', 'stages: 3', 'stages: 3\n    shares: [50 %, 30 %, 20 %]', [
      '15:13 trains.extraction.shares',
      'belongs to arrangement: cross-current',
    ]),
    one('back-flow between settlers', 'stages: 3', 'stages: 3\n    back_flow: {aqueous: 20 %}', [
      '15:16 trains.extraction.back_flow',
      'settler: none',
    ]),
    one(
      'back-flow across',
      SETTLER,
      'settler: none\n    arrangement: cross-current\n    back_flow: {aqueous: 20 %}',
      ['20:16 trains.extraction.back_flow', 'no neighbour'],
    ),
    one('less than no back-flow', SETTLER, 'settler: none\n    back_flow: {aqueous: -20 %}', [
      '19:26 trains.extraction.back_flow.aqueous',
      'must not be negative',
    ]),
    one('neither settings nor none', SETTLER, 'settler: nun', [
      '18:14 trains.extraction.settler',
      'or none',
      "'nun'",
    ]),
    one('recycle from no settler', SETTLER, 'settler: none\n    recycle: {hold: 1}', [
      '19:14 trains.extraction.recycle',
      'needs settlers',
    ]),
    one('a settler in one stage alone', SETTLER, 'settler: none\n    stage 2: {settler: {area: 3 m^2}}', [
      '19:24 trains.extraction.stage 2.settler',
      'have no settlers',
    ]),
    one(
      'a share that the flows decide',
      'stage_efficiency: 94 %',
      'stage_efficiency: 94 %, organic_share: 20 %',
      ['17:68 trains.extraction.mixer.organic_share', 'follows from the flows'],
    ),
  ]);
});

describe('base and removal', () => {
  const tank = (more: string): string =>
    `tanks:\n  t: {phase: aqueous, from: out, to: sent, volume: 9 m^3, flow: 3 m^3/h, ${more}}\ntrains:`;
  const removal = (what: string, more: string, ...complaints: Complaint[]): Case => [
    what,
    exchange(plant, 'trains:', tank(more), 'keep: out.copper', 'keep: pond.copper'),
    ...complaints,
  ];
  refuses([
    one('an unknown species', 'copper: 1 g/L}', 'copper: 1 g/L, neutralises: {acit: 9 g/L}}', [
      '6:73 feeds.second.neutralises.acit',
      "did you mean 'acid'?",
    ]),
    one('brought and used up', 'copper: 1 g/L}', 'acid: 1 g/L, neutralises: {acid: 9 g/L}}', [
      '6:77 feeds.second.neutralises.acid',
      'not both',
    ]),
    one('in an organic', 'copper: 2 g/L}', 'copper: 2 g/L, neutralises: {acid: 9 g/L}}', [
      '7:71 feeds.lean.neutralises',
      'only an aqueous',
    ]),
    removal('of an unknown solute', 'removes: {coper: 3 kg/h}', [
      '13:84 tanks.t.removes.coper',
      "did you mean 'copper'?",
    ]),
    removal('in another unit', 'removes: {copper: 3 g/L}', [
      '13:92 tanks.t.removes.copper',
      'a flow by mass',
      'a concentration',
    ]),
    removal('of more than all', 'removes: {copper: 120 %}', [
      '13:92 tanks.t.removes.copper',
      'less than 100 %',
    ]),
    removal('returns of what is not removed', 'removes: {copper: 9 %}, returns: {iron: {acid: 1}}', [
      '13:83 tanks.t.removes.iron',
      "returns says what 'iron'",
    ]),
    removal('returns of an unknown species', 'removes: {copper: 9 %}, returns: {copper: {axid: 1}}', [
      '13:117 tanks.t.returns.copper.axid',
      "did you mean 'acid'?",
    ]),
  ]);
});

describe('limits and changes', () => {
  const limit = (what: string, to: string, ...complaints: Complaint[]): Case =>
    one(what, 'out.copper, below: 0.6 g/L', to, ...complaints);
  const change = (what: string, to: string, ...complaints: Complaint[]): Case => [
    what,
    `${plant}upsets:\n  - {at: 1 h, change: ${to}}\n`,
    ...complaints,
  ];
  refuses([
    limit('the purity of nobody', 'out.purity of coper, above: 99 %', [
      '22:12 limits.0.keep',
      "did you mean 'out.purity of copper'?",
    ]),
    limit('a purity in g/L', 'out.purity of copper, above: 0.6 g/L', [
      '22:41 limits.0.above',
      'a percentage',
    ]),
    limit('a ratio of unlike things', 'out.copper / loaded.flow, below: 0.6', [
      '22:12 limits.0.keep',
      'two like quantities',
    ]),
    limit('a ratio to nothing', 'out.copper / loaded.cpper, below: 0.6', [
      '22:12 limits.0.keep',
      "did you mean 'loaded.copper'?",
    ]),
    limit('a ratio in g/L', 'out.copper / loaded.copper, below: 0.6 g/L', [
      '22:47 limits.0.below',
      'a plain number',
    ]),
    limit('from after the end', 'out.copper, below: 0.6 g/L, from: 12 h', [
      '22:46 limits.0.from',
      'the run ends at 10 h',
    ]),
    change('a share of more than all', 'pond.share, to: 120 %', [
      '24:39 upsets.0.to',
      'must not exceed 100 %',
    ]),
    change('the flow of a share', 'pond.flow, to: 3 m^3/h', ['24:23 upsets.0.change', "change 'pond.share'"]),
    change('a share by a bare number', 'pond.share, by: 5', ['24:39 upsets.0.by', 'two ways']),
    change('the rest', 'out.share, to: 5 %', ['24:23 upsets.0.change', "did you mean 'pond.share'?"]),
  ]);
});

describe('what must be there', () => {
  const batch = (settings: string): string =>
    `title: x\nsolutes: [a]\nbatches: {b: ${settings}}\nhorizon: 1 h\n`;
  refuses([
    ['feeds', 'title: x\nsolutes: [a]\ntrains: {}\nhorizon: 1 h\n', ['1:1 feeds', 'is missing']],
    ['trains', 'title: x\nsolutes: [a]\nfeeds: {}\nhorizon: 1 h\n', ['1:1 trains', 'is missing']],
    [
      'the ratio of a batch',
      batch('{mixer: {volume: 1 L, ka: 1 1/s}}'),
      ['3:22 batches.b.mixer', 'organic_share'],
    ],
    [
      'a rate of a batch',
      batch('{mixer: {volume: 1 L, organic_share: 5 %, stage_efficiency: 90 %}}'),
      ['3:74 batches.b.mixer.stage_efficiency', 'a flow through a stage'],
    ],
    ['the mixer of a batch', batch('{aqueous: {a: 3 g/L}}'), ['3:14 batches.b.mixer', 'is missing']],
  ]);
});

import { describe, expect, it } from 'vitest';
import { answer, closed, exchange, expectRefusal, instead, refuses } from './wrong.ts';

const q = (name: string): string => JSON.stringify(name);

describe('names that cannot be used', () => {
  const names: readonly (readonly [name: string, ...words: string[]])[] = [
    ['a.b', "must not hold '.'"],
    ['a,b', "must not hold ','"],
    ['a:b', "must not hold ':'"],
    ['a#b', "must not hold '#'"],
    ['a"b', "must not hold '\"'"],
    ['a\nb', "must not hold '\\u000a'"],
    ['a\tb', "must not hold '\\u0009'"],
    ['a\u001bb', "must not hold '\\u001b'"],
    ['a\u202eb', "must not hold '\\u202e'"],
    ['a\u200bb', "must not hold '\\u200b'"],
    ['', 'must not be empty'],
    [' ', 'must not be empty'],
    [' a', 'begin or end with a space'],
    ['a ', 'begin or end with a space'],
    ['-', 'begin with a letter or a digit', "'-'"],
    ['=1+1', 'begin with a letter or a digit'],
    ['x'.repeat(81), '80 characters', 'has 81'],
    ['constructor', "'constructor' cannot be a name"],
    ['toString', "'toString' cannot be a name"],
    ['hasOwnProperty', "'hasOwnProperty' cannot be a name"],
  ];
  it.each(names.map(([name, ...words]) => ({ name, words })))('$name', ({ name, words }) => {
    expectRefusal(instead('solutes: [copper]', `solutes: [copper, ${q(name)}]`), [
      ['2:19 solutes.1', ...words],
    ]);
    const [train, ...more] = answer(instead('  extraction:', `  ${q(name)}:`));
    expect(more).toEqual([]);
    expect(train).toMatch(/^wrong\.yaml:8:3 trains\./);
    for (const word of words) expect(train).toContain(word);
  });

  it.each(['a.b', 'a#b', '-', 'valueOf'])('%s, at the end of an arrow', (name) => {
    const text = instead('-> raffinate', `-> ${name}`, 'keep: raffinate', 'keep: loaded');
    expectRefusal(text.replace(/aqueous: (.*)/, 'aqueous: "$1"'), [
      ['10:14 trains.extraction.aqueous', 'name'],
    ]);
  });

  it('of feeds and tanks', () => {
    expectRefusal(instead('  lean:', '  toString:', 'organic: lean', 'organic: toString'), [
      ['6:3 feeds.toString', 'cannot be a name'],
    ]);
    expectRefusal(exchange(closed, '  tank:', '  ta,nk:'), [['7:3 tanks.ta,nk', "must not hold ','"]]);
    expectRefusal(exchange(closed, 'to: lean', 'to: le#an', 'organic: lean', 'organic: le#an'), [
      ['7:44 tanks.tank.to', "must not hold '#'"],
    ]);
  });

  refuses([
    [
      '__proto__ as a solute',
      instead('solutes: [copper]', 'solutes: [copper, __proto__]'),
      ['2:19 solutes.1', 'begin with a letter', "'__proto__'"],
    ],
    [
      '__proto__ as a train',
      instead('  extraction:', '  __proto__:', 'keep: raffinate', 'keep: liquor'),
      ['8:3 trains.__proto__', 'cannot be a key'],
      ['8:3 trains', 'at least one train'],
    ],
    [
      'an arrow in a train',
      instead('  extraction:', '  a -> b:'),
      ['8:3 trains.a -> b', "must not hold '->'"],
    ],
  ]);
});

describe('names that stand for two things', () => {
  refuses([
    ['solutes', instead('[copper]', '[copper, copper]'), ['2:19 solutes.1', "'copper' is named twice"]],
    [
      'a solute and a species',
      instead('species: [acid]', 'species: [acid, copper]'),
      ['3:17 species.1', "'copper' is named twice"],
      ['6:43 feeds.lean.copper', 'stays in the aqueous'],
    ],
    ...['flow', 'phase', 'volume', 'pump', 'stage 2'].map(
      (name) =>
        [
          `a solute and the setting ${name}`,
          instead('[copper]', `[copper, ${name}]`),
          ['2:19 solutes.1', `'${name}' has another meaning`],
        ] as const,
    ),
    [
      'a train and a stream',
      instead('-> raffinate', '-> extraction', 'keep: raffinate', 'keep: extraction'),
      ['8:3 trains.extraction', 'also a stream', 'give the train another name'],
    ],
    [
      'a tank and a stream',
      exchange(closed, '  tank:', '  lean:'),
      ['7:3 tanks.lean', 'also a stream', 'give the tank another name'],
    ],
    [
      'a train and a tank',
      exchange(closed, '  extraction:', '  tank:'),
      ['9:3 trains.tank', 'also a stream or a tank', 'give the train another name'],
    ],
    [
      'a stream and what a tank spills',
      exchange(closed, '-> raffinate', '-> tank overflow', 'keep: raffinate', 'keep: tank overflow'),
      ['11:14 trains.extraction.aqueous', 'what its tank spills'],
    ],
  ]);
});

describe('lists of names', () => {
  refuses([
    ['none', instead('[copper]', '[]'), ['2:10 solutes', 'at least one solute']],
    [
      'a text',
      instead('solutes: [copper]', 'solutes: copper'),
      ['2:10 solutes', 'list of names', "'copper'"],
    ],
    ['a number among them', instead('[copper]', '[copper, 12]'), ['2:19 solutes.1', 'text', 'got 12']],
    ['nothing among them', instead('[copper]', '[copper, ~]'), ['2:19 solutes.1', 'text', 'got nothing']],
    ['a list among them', instead('[copper]', '[copper, [a]]'), ['2:19 solutes.1', 'text', '["a"]']],
    ['settings', instead('[acid]', '{acid: 1}'), ['3:10 species', 'list of names', '{"acid":1}']],
  ]);
});

describe('names that are taken', () => {
  it.each([
    'Säure',
    '銅',
    'Кислота',
    'acid 2',
    '2-ethyl (lean)',
    "d'or",
    'a/b',
    'y',
    'no',
    'on',
    'null value',
    'aqueous',
    'law',
  ])('%s', (name) => {
    expect(answer(instead('[copper]', `[copper, ${q(name)}]`))).toEqual([]);
    const renamed = instead(
      '  liquor:',
      `  ${q(name)}:`,
      'aqueous: liquor -> raffinate',
      `aqueous: ${q(`${name} -> raffinate`)}`,
      'change: liquor.copper',
      `change: ${q(`${name}.copper`)}`,
    );
    expect(answer(renamed)).toEqual([]);
  });

  it('one letter written in two ways is one letter', () => {
    const text = instead(
      '[copper]',
      '[copper, S\u00e4ure]',
      'acid: 1.8 g/L',
      'acid: 1.8 g/L, Sa\u0308ure: 1 g/L',
    );
    expect(answer(text)).toEqual([]);
  });
});

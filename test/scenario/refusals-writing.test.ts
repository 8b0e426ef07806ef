import { describe, expect, it } from 'vitest';
import { answer, expectRefusal, instead, refuses, sound } from './wrong.ts';

const EMPTY = 'the file is empty';

describe('a file that is no scenario at all', () => {
  refuses([
    ['nothing', '', ['1:1', EMPTY, 'title, solutes, feeds, trains, horizon']],
    ['blanks', ' \n\n', ['1:1', EMPTY]],
    ['a mark of byte order alone', '\uFEFF', ['1:1', EMPTY]],
    ['comments only', '# a plant\n# to come\n', ['1:1', EMPTY]],
    ['the start of a document', '---\n', ['1:1', EMPTY]],
    ['null', 'null\n', ['1:1', EMPTY]],
    ['a list', '- a\n- b\n', ['1:1', 'expected settings by name', '["a","b"]']],
    ['a text', 'hello\n', ['1:1', 'expected settings by name', "got 'hello'"]],
    ['a number', '12\n', ['1:1', 'expected settings by name', 'got 12']],
    ['bytes of a picture', '\uFFFDPNG\0\u0001', ['1:1', 'not text in UTF-8']],
    ['a zero byte further on', 'title: T\nabout: a\0b\n', ['2:9', 'not text in UTF-8']],
    ['another encoding', 'title: S\uFFFDure\n', ['1:9', 'not text in UTF-8']],
    ['a very long file', `title: ${'x'.repeat(1_000_000)}`, ['1:1', '1000007 characters', '1000000']],
  ]);
});

describe('writing that is not YAML 1.2', () => {
  refuses([
    ['tabs as indent', 'title: T\nfeeds:\n\tliquor: x\n', ['3:1', 'not YAML', 'spaces', 'tabs']],
    ['an open bracket', 'title: T\nsolutes: [copper\nfeeds: 1\n', ['3:1', 'not YAML']],
    ['an open quotation', 'title: "T\nsolutes: [copper]\n', ['3:1', 'not YAML', 'closing "quote']],
    ['a colon within a text', 'title: A plant: the first\n', ['1:8', 'not YAML', 'second colon', 'quotes']],
    ['uneven indent', 'title: T\n about: x\n', ['1:8', 'not YAML']],
    ['two documents', `${sound}---\ntitle: B\n`, ['21:1', 'one plant a file', 'second YAML document']],
    ['YAML 1.1', `%YAML 1.1\n---\n${sound}`, ['1:1', 'YAML 1.2', '%YAML']],
    ['an unknown YAML', `%YAML 1.3\n---\n${sound}`, ['1:7', 'Unsupported YAML version 1.3']],
    ['an unknown directive', `%PLANT x\n---\n${sound}`, ['1:1', 'directive', '%PLANT']],
    ['a key beyond its length', `${'x'.repeat(2000)}: 1\n`, ['1:1', 'not YAML', '1024']],
  ]);
});

describe('YAML that says more than a scenario holds', () => {
  refuses([
    ['a tag', instead('title: T'.slice(0, 6), 'title: !name'), ['1:8', 'no tags']],
    ['a tag that runs code', instead('title: Plain plant', 'title: !!js/function "f"'), ['1:8', 'no tags']],
    ['bytes', instead('title: Plain plant', 'title: !!binary aGVsbG8='), ['1:8', 'no tags']],
    [
      'an alias for nothing',
      instead('copper: 5.2 g/L', 'copper: *grade'),
      ['5:53 feeds.liquor.copper', '*grade stands for nothing', '&grade'],
    ],
    [
      'an alias before its anchor',
      instead('title: Plain plant', 'title: *t\nabout: &t x'),
      ['1:8 title', '*t stands for nothing'],
    ],
    [
      'an alias for what holds it',
      'title: T\nfeeds: &f\n  a: *f\n',
      ['3:6 feeds.a', '*f stands for something that holds it'],
    ],
    [
      'aliases that unfold without end',
      [...'bcdefghij'].reduce(
        (text, key, i) => `${text}${key}: &${key} [${Array(9).fill(`*${'abcdefghij'[i]}`)}]\n`,
        'title: T\na: &a [1, 2, 3, 4, 5, 6, 7, 8, 9]\n',
      ),
      ['1:1', 'aliases', 'unfold'],
    ],
    [
      'merged settings',
      instead('lean: {phase: organic', 'lean: {<<: *l, phase: organic', 'liquor: {', 'liquor: &l {'),
      ['6:10 feeds.lean.<<', 'does not merge', 'YAML 1.2'],
    ],
    ['a list as key', instead('horizon', '? [a, b]\n: 3\nhorizon'), ['15:3', 'a key is a text']],
    ['nothing as key', instead('horizon', ': 3\nhorizon'), ['15:3', 'a key is a text']],
    [
      'a number as name',
      instead('  liquor:', '  12:', 'aqueous: liquor', 'aqueous: 12', 'change: liquor', 'change: 12'),
      ['5:3 feeds', "write '12' in quotes"],
    ],
    [
      'the key that all objects have',
      instead('phase: organic', '__proto__: {a: 1}, phase: organic'),
      ['6:10 feeds.lean.__proto__', "'__proto__' cannot be a key"],
    ],
  ]);

  it.each([
    ['brackets', (n: number) => `title: ${'['.repeat(n)}${']'.repeat(n)}`],
    ['braces', (n: number) => `title: ${'{a: '.repeat(n)}1${'}'.repeat(n)}`],
    ['dashes', (n: number) => `${'- '.repeat(n)}a`],
    ['indents', (n: number) => Array.from({ length: n }, (_, i) => `${' '.repeat(i)}a:`).join('\n')],
  ])('bottomless nesting of %s', (_, nest) => {
    for (const depth of [50, 1000]) {
      const [first, ...more] = answer(nest(depth));
      expect(first).toMatch(
        /nested (too deeply; look for brackets that are not closed|more than 40 levels deep)/,
      );
      expect(more).toEqual([]);
    }
  });
});

describe('keys', () => {
  refuses([
    ['twice at the top', instead('horizon: 10 h', 'horizon: 10 h\nhorizon: 11 h'), ['16:1 horizon', 'twice']],
    [
      'twice in one feed',
      instead('acid: 1.8 g/L', 'acid: 1.8 g/L, acid: 1.9 g/L'),
      ['5:77 feeds.liquor.acid', "the key 'acid' stands here twice"],
    ],
    [
      'a feed that stands twice',
      instead('  lean:', '  liquor: {phase: aqueous, flow: 1 m^3/h}\n  lean:'),
      ['6:3 feeds.liquor', "'liquor'", 'twice'],
    ],
    [
      'unknown at the top',
      instead('horizon: 10 h', 'horizon: 10 h\nrecord_evry: 2 h'),
      ['16:1 record_evry', 'unknown key', "'record_every'"],
    ],
    [
      'in another case',
      instead('title:', 'Title:'),
      ['1:1 title', 'is missing'],
      ['1:1 Title', 'unknown key', "did you mean 'title'?"],
    ],
    ['of a feed', instead('acid: 1.8', 'acidd: 1.8'), ['5:62 feeds.liquor.acidd', "did you mean 'acid'?"]],
    [
      'of a feed, near nothing',
      instead('acid: 1.8', 'temperature: 1.8'),
      ['5:62 feeds.liquor.temperature', 'known here', 'phase, flow', 'solutes or species'],
    ],
    [
      'of a train',
      instead('stages: 3', 'stages: 3\n    settlers: {}'),
      ['10:5 trains.extraction.settlers', "did you mean 'settler'?"],
    ],
    [
      'of a mixer',
      instead('stage_efficiency: 94 %', 'stage_efficiency: 94 %, volme: 3 m^3'),
      ['12:53 trains.extraction.mixer.volme', "did you mean 'volume'?"],
    ],
    [
      'of a settler',
      instead('area: 180 m^2', 'area: 180 m^2, aria: 1 m^2'),
      ['13:30 trains.extraction.settler.aria', "did you mean 'area'?"],
    ],
    [
      'of a law',
      instead('ratio: 3', 'ratio: 3, ration: 3'),
      ['14:50 trains.extraction.equilibrium.copper.ration', "did you mean 'ratio'?"],
    ],
    [
      'of an upset',
      instead('by: +35 %', 'by: +35 %, form: 3 h'),
      ['18:49 upsets.0.form', 'unknown key', "'form'", "did you mean 'for'?"],
    ],
    [
      'of a limit',
      instead('below: 0.6 g/L', 'below: 0.6 g/L, abov: 0.1 g/L'),
      ['20:46 limits.0.abov', "did you mean 'above'?"],
    ],
    [
      'that every object answers to',
      instead('horizon', 'constructor: 1\ntoString: 2\nhorizon'),
      ['15:1 constructor', 'unknown key'],
      ['16:1 toString', 'unknown key'],
    ],
    [
      'that are the rest of a figure',
      instead('copper: 5.2 g/L', 'copper: 5,2 g/L'),
      ['5:53 feeds.liquor.copper', 'the bare number 5'],
      ['5:55 feeds.liquor.2 g/L', 'unknown key', 'decimal point', 'comma'],
    ],
  ]);

  it('many wrong ones are not all listed', () => {
    const lines = answer(sound + Array.from({ length: 200 }, (_, i) => `zz${i}: 1\n`).join(''));
    expect(lines).toHaveLength(51);
    expect(lines[0]).toBe("wrong.yaml:21:1 zz0: unknown key 'zz0'");
    expect(lines[50]).toBe('… and 150 more');
  });
});

describe('settings that are missing or empty', () => {
  const without = (line: string): string => instead(`${line}\n`, '');
  const emptied = (line: string): string => instead(line, `${line.split(':')[0]}:`);
  refuses([
    ['no title', without('title: Plain plant'), ['1:1 title', 'is missing', 'a text']],
    ['no horizon', without('horizon: 10 h'), ['1:1 horizon', 'is missing', "'12 h 40 min'"]],
    ['no solutes', without('solutes: [copper]'), ['1:1 solutes', 'is missing', '[copper]']],
    ['no stages', without('    stages: 3'), ['9:5 trains.extraction.stages', 'from 1 to 5000']],
    [
      'no mixer',
      without('    mixer: {volume: 42 m^3, stage_efficiency: 94 %}'),
      ['9:5 trains.extraction.mixer', 'its volume', "'volume: 42 m^3'"],
      ['9:5 trains.extraction.mixer', 'ka', 'stage_efficiency', 'got neither'],
    ],
    [
      'no settler',
      without('    settler: {area: 180 m^2, aqueous_depth: 0.35 m, organic_depth: 0.30 m}'),
      ['9:5 trains.extraction.settler', 'aqueous layer', 'aqueous_volume', 'got neither'],
      ['9:5 trains.extraction.settler', 'organic layer', 'organic_volume', 'got neither'],
    ],
    ['empty title', emptied('title: Plain plant'), ['1:1 title', 'expected a text, got nothing']],
    ['blank title', instead('Plain plant', '"  "'), ['1:8 title', 'must not be empty']],
    ['empty horizon', emptied('horizon: 10 h'), ['15:1 horizon', 'expected a time', 'got nothing']],
    ['empty solutes', emptied('solutes: [copper]'), ['2:1 solutes', 'list of names', 'got nothing']],
    ['empty species', emptied('species: [acid]'), ['3:1 species', 'list of names', 'got nothing']],
    ['empty stages', emptied('    stages: 3'), ['9:5 trains.extraction.stages', 'got nothing']],
    [
      'empty mixer',
      emptied('    mixer: {volume: 42 m^3, stage_efficiency: 94 %}'),
      ['12:5 trains.extraction.mixer', 'settings by name', 'got nothing'],
    ],
    [
      'empty equilibrium',
      emptied('    equilibrium: {copper: {law: ratio, ratio: 3}}'),
      ['14:5 trains.extraction.equilibrium', 'a law for each solute', 'got nothing'],
    ],
    [
      'empty feed',
      instead(' {phase: organic, flow: 430 m^3/h, copper: 2 g/L}', ''),
      ['6:3 feeds.lean', 'settings by name', 'got nothing'],
    ],
    [
      'empty upset',
      instead('{at: 2 h, change: liquor.copper, by: +35 %}', ''),
      ['18:5 upsets.0', 'settings by name', 'got nothing'],
    ],
  ]);

  it('no feeds or no trains', () => {
    const feeds = sound.slice(sound.indexOf('feeds:'), sound.indexOf('trains:'));
    const trains = sound.slice(sound.indexOf('trains:'), sound.indexOf('horizon:'));
    expectRefusal(instead(feeds, 'feeds:\n'), [['4:1 feeds', 'expected feeds by name', 'got nothing']]);
    expectRefusal(instead(trains, 'trains:\n'), [['7:1 trains', 'expected trains by name', 'got nothing']]);
    expectRefusal(instead(trains, 'trains: {}\n', 'raffinate.copper', 'liquor.copper'), [
      ['7:9 trains', 'at least one train'],
    ]);
    expectRefusal(instead(feeds, ''), [['1:1 feeds', 'is missing', 'feeds by name']]);
    expectRefusal(instead(trains, ''), [['1:1 trains', 'is missing', 'trains by name']]);
    expectRefusal(instead(feeds, 'feeds: [a, b]\n'), [['4:8 feeds', 'feeds by name', '["a","b"]']]);
  });
});

import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, it } from 'vitest';
import { type Complaint, expectRefusal, instead } from './wrong.ts';

const law = (text: string): string => instead('{law: ratio, ratio: 3}', text);
const LAW = '14:27 trains.extraction.equilibrium.copper';
/** A setting of the law, at its column. */
const at = (column: number, path: string): string =>
  `14:${column} trains.extraction.equilibrium.copper.${path}`;

describe('data files', () => {
  const folder = mkdtempSync(join(tmpdir(), 'upsettle-'));
  afterAll(() => rmSync(folder, { recursive: true }));

  const isotherm = (
    content: string | Uint8Array,
    complaints: Complaint[],
    settings = 'file: t.csv, aqueous: "aq [g/L]", organic: "org [g/L]"',
  ): void => {
    writeFileSync(join(folder, 't.csv'), content);
    expectRefusal(law(`{law: table, ${settings}}`), complaints, folder);
  };
  const FILE = at(46, 'file');
  const AQ = at(62, 'aqueous');
  const ORG = at(83, 'organic');
  const head = 'aq [g/L],org [g/L]\n';

  it('are read with comma, semicolon or tab, any line end, and a mark of byte order', () => {
    isotherm(`${head}1,2\n2,3\n`, []);
    isotherm('aq [g/L];org [g/L]\r\n1;2\r\n2;3\r\n', []);
    isotherm('aq [g/L]\torg [g/L]\r1\t2\r2\t3', []);
    isotherm(`\uFEFF${head}\n1,2\n\n2,3\n\n`, []);
    isotherm('"aq [g/L]","org [g/L]",note\n1,2,"two\nlines"\n2,3,\n', []);
  });

  const wrong: readonly (readonly [what: string, content: string, ...complaints: Complaint[]])[] = [
    ['empty', '', [FILE, 't.csv:1: no rows']],
    ['a header alone', head, [FILE, 't.csv:1: no rows']],
    ['a short row', `${head}1,2\n2\n`, [FILE, 't.csv:3: expected 2 cells', 'got 1']],
    ['a long row', `${head}1,2\n2,3,4\n`, [FILE, 't.csv:3: expected 2 cells', 'got 3']],
    ['a word', `${head}1,2\n2,high\n`, [ORG, 't.csv:3:', 'a number', "'org [g/L]'", "'high'"]],
    ['an empty cell', `${head}1,2\n,3\n`, [AQ, 't.csv:3:', 'a number', "''"]],
    ['a decimal comma', 'aq [g/L];org [g/L]\n1,5;2\n', [AQ, 't.csv:2:', "'1,5'", 'decimal point']],
    ['a number in another notation', `${head}0x1,2\n`, [AQ, 't.csv:2:', "'0x1'"]],
    ['a number beyond numbers', `${head}1,2\n2,1e999\n`, [ORG, 't.csv:3:', "'1e999'"]],
    ['a row after blank lines', `${head}\n1,2\n\n2,x\n`, [ORG, 't.csv:5:', "'x'"]],
    [
      'a row after a cell of two lines',
      'aq [g/L],org [g/L],n\n1,2,"two\nlines"\n2,x,3\n',
      [ORG, 't.csv:4:', "'x'"],
    ],
    [
      'a missing column',
      'aq [g/L],orgg [g/L]\n1,2\n',
      [ORG, "t.csv:1: no column 'org [g/L]'", "did you mean 'orgg [g/L]'?"],
    ],
    [
      'a column that stands twice',
      'aq [g/L],aq [g/L],org [g/L]\n1,2,3\n',
      [AQ, 't.csv:1: two columns', "'aq [g/L]'"],
    ],
    [
      'points that turn back',
      `${head}1,2\n3,4\n2,5\n`,
      [LAW, 't.csv:4:', 'must rise', '(2, 5 g/L)', '(3, 4 g/L)'],
    ],
    ['a point below zero', `${head}-1,2\n3,4\n`, [LAW, 't.csv:2:', 'starts at 0, 0', '-1, 2']],
    ['an open quotation', `${head}1,"2\n2,3\n`, [FILE, 't.csv:2:', 'quotation mark']],
    ['another encoding', 'aq [g/L],org [g/L]\n1,2\n\uFFFD,3\n', [FILE, 't.csv:3:', 'not text in UTF-8']],
    ['zero bytes', 'a\0q,b\0\n', [FILE, 't.csv:1:', 'not text in UTF-8']],
  ];
  it.each(wrong.map(([what, content, ...complaints]) => ({ what, content, complaints })))(
    'with $what',
    (c) => {
      isotherm(c.content, c.complaints);
    },
  );

  it('that are none', () => {
    const named = (file: string): string => `file: ${file}, aqueous: a, organic: b`;
    isotherm('', [[FILE, 'cannot read nope.csv', 'beside the scenario']], named('nope.csv'));
    isotherm('', [[FILE, '. is not a file']], named('"."'));
    isotherm('', [[FILE, 'not a file']], named('/dev/null'));
    isotherm('', [[FILE, 'must not be empty']], named('""'));
    isotherm('', [[at(40, 'file'), 'expected a text, got nothing']], named(''));
    isotherm(
      Uint8Array.from([0x89, 0x50, 0x4e, 0x47, 0xff, 0xfe]),
      [[FILE, 't.csv:1:', 'UTF-8']],
      named('t.csv'),
    );
  });

  it('whose headers say no unit of concentration', () => {
    isotherm(
      'aq,org\n1,2\n',
      [
        [at(62, 'aqueous'), 't.csv:1:', "'aq'", 'must end in a unit', "'Cu [g/L]'"],
        [at(75, 'organic'), 't.csv:1:', "'org'"],
      ],
      'file: t.csv, aqueous: aq, organic: org',
    );
    isotherm(
      'aq [h],org [g/L]\n1,2\n',
      [[at(62, 'aqueous'), "'aq [h]'", 'a concentration']],
      'file: t.csv, aqueous: "aq [h]", organic: "org [g/L]"',
    );
  });

  it('that are used in two ways at once', () => {
    isotherm(
      `${head}1,2\n`,
      [[at(46, 'unit'), 'units in their headers']],
      'unit: mg/L, file: t.csv, aqueous: "aq [g/L]", organic: "org [g/L]"',
    );
    isotherm(
      `${head}1,2\n`,
      [[LAW, 'with a file, aqueous and organic name its columns']],
      'file: t.csv, aqueous: [0, 1], organic: "org [g/L]"',
    );
  });

  const follow = (content: string, complaints: Complaint[], column = 'column: "Cu g/L"'): void => {
    writeFileSync(join(folder, 'f.csv'), content);
    expectRefusal(instead('by: +35 %', `follow: {file: f.csv, ${column}}`), complaints, folder);
  };
  const FOLLOW = '18:46 upsets.0.follow';

  it('are followed in elapsed time or by time stamps', () => {
    follow('time [h],Cu g/L\n0,5\n1.5,6\n', []);
    follow('time min;Cu (g/L)\n0;5\n20;6\n', [], 'column: "Cu (g/L)"');
    follow('time,Cu g/L\n2026-03-01 06:00,5\n2026-03-01 07:00:30,6\n', []);
    follow('when,Cu g/L\n2026-03-01T06:00+10:00,5\n2026-03-01T06:30+10:00,6\n', []);
    follow('day,Cu g/L\n2026-03-01,5\n2026-03-02,6\n', []);
    follow('Cu g/L,t [min]\n5,0\n6,20\n', [], 'column: "Cu g/L", time: "t [min]"');
  });

  const course: readonly (readonly [what: string, content: string, ...words: string[]])[] = [
    [
      'time that turns back',
      'time [h],Cu g/L\n0,5\n2,6\n1,6\n',
      'f.csv:4:',
      'time must rise',
      "'1' after '2'",
    ],
    [
      'time that stands still',
      'time [h],Cu g/L\n0,5\n2,6\n2,6\n',
      'f.csv:4:',
      'time must rise',
      "'2' after '2'",
    ],
    ['time without unit', 'time,Cu g/L\n0,5\n2,6\n', 'f.csv:1:', "'time'", 'a time', "'time [h]'"],
    [
      'a day that is none',
      'time,Cu g/L\n2026-03-01 06:00,5\n2026-13-41 07:00,6\n',
      'f.csv:3:',
      'time stamp',
      "'2026-13-41 07:00'",
    ],
    ['stamps, then hours', 'time,Cu g/L\n2026-03-01 06:00,5\n3,6\n', 'f.csv:3:', 'time stamp', "'3'"],
    ['a word for a time', 'time [h],Cu g/L\n0,5\nlate,6\n', 'f.csv:3:', 'a number', "'late'"],
    ['less than nothing', 'time [h],Cu g/L\n0,5\n1,-6\n', 'f.csv:3:', 'not be negative', '-6'],
    ['one row', 'time [h],Cu g/L\n0,5\n', 'f.csv:2:', 'the only row'],
    ['no rows', 'time [h],Cu g/L\n', 'f.csv:1:', 'no rows'],
    [
      'another column',
      'time [h],Fe g/L\n0,5\n1,6\n',
      'f.csv:1:',
      "no column 'Cu g/L'",
      "did you mean 'Fe g/L'?",
    ],
  ];
  it.each(course.map(([what, content, ...words]) => ({ what, content, words })))(
    'with $what to follow',
    (c) => {
      follow(c.content, [[FOLLOW, ...c.words]]);
    },
  );

  it('are refused for a quantity of another kind', () => {
    follow(
      'time [h],Q m^3/h\n0,5\n1,6\n',
      [[FOLLOW, 'f.csv:1:', "'Q m^3/h'", 'a concentration']],
      'column: "Q m^3/h"',
    );
    follow(
      'time [h],Cu g/L\n0,5\n1,6\n',
      [[FOLLOW, 'f.csv:1:', "no column 't'"]],
      'column: "Cu g/L", time: t',
    );
  });
});

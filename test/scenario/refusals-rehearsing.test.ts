import { describe, expect, it } from 'vitest';
import { answer, closed, instead, refuses, sound } from './wrong.ts';

/** The sound plant with more keys at its end; they begin in line 21. */
const also = (text: string): string => `${sound}${text}\n`;
const one = (text: string): string => also(`answers:\n  more: {${text}}`);
const MOVES = 'moves: [{change: liquor.flow, by: -10 %}]';
const instrument = (text: string): string => also(`analysers:\n  AT-1: {${text}}`);
const variation = (text: string): string => also(`variation:\n  - {${text}}`);

describe('what is sound', () => {
  it.each([
    one(`start: 40 min after upset, ${MOVES}`),
    one(`start: 10 min before upset, ${MOVES}`),
    one(`start: after upset 1, ends: 1 h after upset, ${MOVES}`),
    one(`start: 3 h, ends: 2 h after start, ${MOVES}`),
    one(`when: raffinate.copper above 0.5 g/L, ${MOVES}`),
    `${instrument('of: raffinate.copper, every: 10 min')}answers: {more: {when: 'AT-1 above 500 mg/L, then after 5 min', ${MOVES}}}\n`,
    also(
      `answers:\n  a: {start: after upset, ${MOVES}}\n  b: {start: after upset, ${MOVES}}\n  c: {sequence: [a, b], between: 5 min}`,
    ),
    instrument(
      'of: liquor.copper, warn: 5.5 g/L, every: 10 min, delay: 5 min, noise: 2 % of reading, takes: composite',
    ),
    variation('change: liquor.copper, deviation: 3 %, correlation_time: 2 h'),
    variation('change: liquor.flow, deviation: 10 m^3/h, correlation_time: 2 h, every: 5 min, seed: 7'),
    also('time_zero: 2026-03-01 06:00'),
  ])('%s', (text) => {
    expect(answer(text)).toEqual([]);
  });
});

describe('answers', () => {
  refuses([
    ['that say nothing', one('start: after upset'), ['22:9 answers.more', 'says nothing']],
    ['without a start', one(MOVES), ['22:9 answers.more', 'one of start and when, got neither']],
    [
      'with a start and a condition',
      one(`start: after upset, when: raffinate.copper above 1 g/L, ${MOVES}`),
      ['22:9 answers.more', 'got both'],
    ],
    [
      'with a start that is none',
      one(`start: soon, ${MOVES}`),
      ['22:17 answers.more.start', "expected a start such as '40 min after upset', got 'soon'"],
    ],
    [
      'after an upset that is not there',
      one(`start: 5 min after upset 3, ${MOVES}`),
      ['22:17 answers.more.start', 'there is no upset 3: the scenario has 1'],
    ],
    [
      'that end before they begin to last',
      one(`start: after upset, ends: 0 s after start, ${MOVES}`),
      ['22:36 answers.more.ends', 'must last longer'],
    ],
    [
      'with an end that is none',
      one(`start: after upset, ends: later, ${MOVES}`),
      ['22:36 answers.more.ends', "expected an end such as '4 h after start'"],
    ],
    [
      'with a condition on something unknown',
      one(`when: AT-7 above 1 g/L, ${MOVES}`),
      ['22:16 answers.more.when', "unknown analyser or quantity 'AT-7'"],
    ],
    [
      'with a condition in a wrong unit',
      one(`when: raffinate.copper above 1 m^3, ${MOVES}`),
      ['22:16 answers.more.when', 'a volume'],
    ],
    [
      'with a condition that is none',
      one(`when: it gets worse, ${MOVES}`),
      ['22:16 answers.more.when', 'expected a condition'],
    ],
    [
      'that change a result',
      one('start: after upset, moves: [{change: raffinate.flow, by: +5 %}]'),
      ['22:47 answers.more.moves.0.change', 'is a result and cannot be changed'],
    ],
    [
      'that change something unknown',
      one('start: after upset, moves: [{change: liqour.flow, by: +5 %}]'),
      ['22:47 answers.more.moves.0.change', "did you mean 'liquor.flow'?"],
    ],
    [
      'by a bare number',
      one('start: after upset, moves: [{change: liquor.flow, by: 5}]'),
      ['22:64 answers.more.moves.0.by', "write '5 %' or give a unit"],
    ],
    [
      'with an unknown key',
      one(`start: after upset, end: 1 h after start, ${MOVES}`),
      ['22:30 answers.more.end', "did you mean 'ends'?"],
    ],
    [
      'in a sequence with one that is not there',
      also(`answers:\n  a: {start: after upset, ${MOVES}}\n  c: {sequence: [a, bb]}`),
      ['23:21 answers.c.sequence.1', "unknown answer 'bb'"],
    ],
    [
      'in a sequence of one, with a start of its own',
      also(`answers:\n  a: {start: after upset, ${MOVES}}\n  c: {sequence: [a], start: after upset}`),
      ['23:17 answers.c.sequence', 'two or more'],
      ['23:22 answers.c.start', 'a sequence takes it from the answers'],
    ],
    [
      'called nothing',
      also(`answers:\n  nothing: {start: after upset, ${MOVES}}`),
      ['22:3 answers.nothing', "'nothing' is"],
    ],
    [
      'without an upset to count from',
      `${instead('upsets:\n  - {at: 2 h, change: liquor.copper, by: +35 %}\n', '')}answers:\n  more: {start: after upset, ${MOVES}}\n`,
      ['20:17 answers.more.start', 'there is no upset to count from'],
    ],
    [
      'on what a closed circuit does not have',
      `${closed}answers:\n  more: {start: after upset, moves: [{change: organic.flow, by: 5 %}]}\n`,
      ['23:47 answers.more.moves.0.change', 'unknown quantity'],
    ],
  ]);
});

describe('analysers', () => {
  refuses([
    [
      'of something unknown',
      instrument('of: rafinate.copper, every: 10 min'),
      ['22:14 analysers.AT-1.of', "did you mean 'raffinate.copper'?"],
    ],
    [
      'of a flow',
      instrument('of: raffinate.flow, every: 10 min'),
      ['22:14 analysers.AT-1.of', 'an analyser measures a concentration'],
    ],
    ['without an interval', instrument('of: raffinate.copper'), ['22:9 analysers.AT-1.every', 'is missing']],
    [
      'that warn in a wrong unit',
      instrument('of: raffinate.copper, warn: 5 %, every: 10 min'),
      ['22:38 analysers.AT-1.warn', 'a percentage'],
    ],
    [
      'with a noise of nothing',
      instrument('of: raffinate.copper, every: 10 min, noise: 2 %'),
      ['22:54 analysers.AT-1.noise', 'is of what?'],
    ],
  ]);
});

describe('variations', () => {
  refuses([
    [
      'of something unknown',
      variation('change: liquor.coper, deviation: 3 %, correlation_time: 2 h'),
      ['22:14 variation.0.change', "did you mean 'liquor.copper'?"],
    ],
    [
      'of a mixer',
      variation('change: extraction.1.mixer, deviation: 3 %, correlation_time: 2 h'),
      ['22:14 variation.0.change', 'only flows and concentrations of feeds vary'],
    ],
    [
      'of no size',
      variation('change: liquor.copper, deviation: 0 %, correlation_time: 2 h'),
      ['22:40 variation.0.deviation', 'must be greater than 0'],
    ],
    [
      'with corners beyond number',
      variation('change: liquor.copper, deviation: 3 %, correlation_time: 2 h, every: 1 s'),
      ['22:75 variation.0.every', 'corners over the run'],
    ],
  ]);
});

describe('the clock', () => {
  refuses([
    [
      'that is none',
      also('time_zero: tomorrow'),
      ['21:12 time_zero', "expected a clock time such as '2026-03-01 06:00'"],
    ],
    [
      'on a day that is none',
      also('time_zero: 2026-02-30 06:00'),
      ['21:12 time_zero', 'expected a clock time'],
    ],
  ]);
});

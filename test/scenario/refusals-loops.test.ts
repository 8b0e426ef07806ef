import { describe, expect, it } from 'vitest';
import { answer, exchange, refuses, sound } from './wrong.ts';

/** The sound plant with one loop at its end; `loops` stands in line 21, the loop in 22, its keys in 23 to 26. */
const looped = `${sound}loops:
  AIC-1:
    measure: {of: raffinate.copper, analyser: {every: 10 min, delay: 6 min}, range: 0 to 2 g/L}
    move: {ratio: lean.flow / liquor.flow, low: 0.7, high: 1.5, slew: 0.01 per min, flow_lag: 20 s}
    keep_at: 0.5 g/L
    controller: {action: direct, gain: 0.4 per g/L, integral_time: 45 min}
`;
const instead = (...pieces: readonly string[]): string => exchange(looped, ...pieces);
const second = (move: string): string => `${looped}  AIC-2:
    measure: {of: loaded.copper, analyser: {every: 10 min}}
    move: {${move}}
    keep_at: 5 g/L
    controller: {action: direct, gain: 0.4 per g/L, integral_time: 45 min}
`;
const upset = (text: string): string =>
  instead('  - {at: 2 h, change: liquor.copper, by: +35 %}', `  - {at: 2 h, ${text}}`);

describe('a loop', () => {
  it('as it should be is taken', () => {
    expect(answer(looped)).toEqual([]);
    expect(answer(upset('change: AIC-1.set point, to: 0.4 g/L'))).toEqual([]);
    expect(answer(upset('change: AIC-1.mode, to: manual'))).toEqual([]);
    expect(answer(upset('change: lean.flow, by: +10 %, put: AIC-1 in manual'))).toEqual([]);
  });
  refuses([
    [
      'on a stream that does not exist',
      instead('of: raffinate.copper', 'of: rafinate.copper'),
      ['23:19 loops.AIC-1.measure.of', "did you mean 'raffinate.copper'?"],
    ],
    [
      'on a flow',
      instead('of: raffinate.copper', 'of: raffinate.flow'),
      ['23:19 loops.AIC-1.measure.of', 'measures a concentration'],
    ],
    [
      'without limits of its output',
      instead('low: 0.7, high: 1.5, ', ''),
      ['24:11 loops.AIC-1.move', 'needs low'],
      ['24:11 loops.AIC-1.move', 'needs high'],
    ],
    [
      'with limits the wrong way round',
      instead('low: 0.7, high: 1.5', 'low: 1.7, high: 1.5'),
      ['24:11 loops.AIC-1.move', 'is not below high'],
    ],
    [
      'that moves a result',
      instead('ratio: lean.flow / liquor.flow', 'ratio: raffinate.flow / liquor.flow'),
      ['24:19 loops.AIC-1.move.ratio', 'is a result', 'lean.flow'],
    ],
    [
      'with a gain below zero',
      instead('gain: 0.4 per g/L', 'gain: -0.4 per g/L'),
      ['26:40 loops.AIC-1.controller.gain', 'direct or reverse'],
    ],
    [
      'with a gain without its unit',
      instead('gain: 0.4 per g/L', 'gain: 0.4'),
      ['26:40 loops.AIC-1.controller.gain', "'0.4 per g/L'"],
    ],
    [
      'with an action that is none',
      instead('action: direct', 'action: inverse'),
      ['26:26 loops.AIC-1.controller.action', 'direct, reverse'],
    ],
    [
      'with a slew that is no rate',
      instead('slew: 0.01 per min', 'slew: 0.01'),
      ['24:71 loops.AIC-1.move.slew', "'0.01 per min'"],
    ],
    [
      'on a scan as slow as its analyser',
      instead('integral_time: 45 min', 'integral_time: 45 min, runs: every 5 min'),
      ['26:82 loops.AIC-1.controller.runs', 'a tenth at most'],
    ],
    [
      'with a range the wrong way round',
      instead('range: 0 to 2 g/L', 'range: 3 to 2 g/L'),
      ['23:85 loops.AIC-1.measure.range', 'begins where it ends'],
    ],
    [
      'that shares its move',
      second('flow: lean.flow, low: 300 m^3/h, high: 600 m^3/h'),
      ['24:11 loops.AIC-1.move', 'AIC-2', 'one owner'],
      ['29:11 loops.AIC-2.move', 'AIC-1', 'one owner'],
      ['31:40 loops.AIC-2.controller.gain', 'm^3/h'],
    ],
    [
      'that leads one that is not there',
      second('set_point: AIC-3, low: 0.1 g/L, high: 1 g/L'),
      ['29:23 loops.AIC-2.move.set_point', "'AIC-3'", "did you mean 'AIC-1'?"],
    ],
    [
      'whose move an upset changes without asking',
      upset('change: lean.flow, by: +10 %'),
      ['18:23 upsets.0.change', 'put: AIC-1 in manual'],
      ['24:11 loops.AIC-1.move', 'which an upset changes'],
    ],
    [
      'that is put where it cannot be',
      upset('change: lean.flow, by: +10 %, put: AIC-2 in manual'),
      ['18:50 upsets.0.put', "'AIC-1 in manual'"],
    ],
    [
      'in a mode that is none',
      upset('change: AIC-1.mode, to: automatic'),
      ['18:39 upsets.0.to', 'a loop is put in', "did you mean 'auto'?"],
    ],
    [
      'with an unknown key',
      instead('keep_at: 0.5 g/L', 'keep_at: 0.5 g/L\n    setpoint: 1'),
      ['26:5 loops.AIC-1.setpoint', 'unknown key'],
    ],
  ]);
});

describe('what a loop owns', () => {
  const answers = (move: string): string =>
    `${looped}answers: {one: {start: after upset, moves: [{${move}}]}}\n`;
  const procedure = (move: string): string => `${looped}procedures: {one: {moves: [{${move}}]}}\n`;

  it('may be changed through the loop, or with the loop in manual', () => {
    for (const make of [answers, procedure]) {
      expect(answer(make('change: AIC-1.set point, to: 0.4 g/L'))).toEqual([]);
      expect(answer(make('change: AIC-1.high, by: +10 %'))).toEqual([]);
      expect(answer(make('change: lean.flow, by: +10 %, put: AIC-1 in manual'))).toEqual([]);
    }
  });
  refuses([
    [
      'by an answer that says nothing of the loop',
      answers('change: lean.flow, by: +10 %'),
      ['24:11 loops.AIC-1.move', "answer 'one' changes as well"],
      ['27:54 answers.one.moves.0.change', 'put: AIC-1 in manual', "'AIC-1.set point'"],
    ],
    [
      'by a procedure that says nothing of the loop',
      procedure('change: lean.flow, by: +10 %'),
      ['24:11 loops.AIC-1.move', "procedure 'one' changes as well"],
      ['27:37 procedures.one.moves.0.change', 'put: AIC-1 in manual'],
    ],
    [
      'by another loop put in manual',
      answers('change: lean.flow, by: +10 %, put: AIC-2 in manual'),
      ['27:81 answers.one.moves.0.put', "expected 'AIC-1 in manual'"],
    ],
    [
      'put beside what no loop moves',
      answers('change: liquor.flow, by: +10 %, put: AIC-1 in manual'),
      ['27:83 answers.one.moves.0.put', 'no loop moves'],
    ],
    [
      'a limit changed by a ramp',
      answers('change: AIC-1.high, to: 1.8, over: 10 min'),
      ['27:81 answers.one.moves.0.over', 'at once'],
    ],
    [
      'limits of its flow the wrong way round',
      instead('flow_lag: 20 s', 'flow_low: 500 m^3/h, flow_high: 300 m^3/h'),
      ['24:11 loops.AIC-1.move', 'is not below flow_high'],
    ],
    [
      'limits of its flow beside a flow',
      instead(
        'ratio: lean.flow / liquor.flow, low: 0.7, high: 1.5, slew: 0.01 per min',
        'flow: lean.flow, low: 100 m^3/h, high: 500 m^3/h',
        'flow_lag: 20 s',
        'flow_high: 300 m^3/h',
        'gain: 0.4 per g/L',
        'gain: 80 m^3/h per g/L',
      ),
      ['24:73 loops.AIC-1.move.flow_high', 'belongs to a ratio'],
    ],
  ]);
});

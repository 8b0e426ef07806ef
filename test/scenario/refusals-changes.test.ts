import { describe, expect, it } from 'vitest';
import { answer, closed, exchange, expectRefusal, instead, refuses } from './wrong.ts';

describe('upsets', () => {
  const upset = (text: string): string => instead('{at: 2 h, change: liquor.copper, by: +35 %}', text);
  const copper = (text: string): string => upset(`{at: 2 h, change: liquor.copper, ${text}}`);
  const BY = '18:42 upsets.0.by';
  const TO = '18:42 upsets.0.to';
  refuses([
    [
      'without a change',
      upset('{at: 2 h, change: liquor.copper}'),
      ['18:5 upsets.0', 'exactly one of to, by, follow', 'got none'],
    ],
    ['by and to', copper('by: +35 %, to: 3 g/L'), ['18:5 upsets.0', 'exactly one of', 'got to and by']],
    [
      'by, to and follow',
      copper('by: 3 %, to: 3 g/L, follow: {file: a, column: b}'),
      ['18:5 upsets.0', 'got to and by and follow'],
    ],
    ['by 5', copper('by: 5'), [BY, 'two ways', "'5 %'", "'5 g/L'"]],
    ['by -0.5, as a text', copper('by: "-0.5"'), [BY, 'two ways', "'-0.5 %'", "'-0.5 g/L'"]],
    [
      'by 5, of a flow',
      upset('{at: 2 h, change: liquor.flow, by: 5}'),
      ['18:40 upsets.0.by', "'5 %'", "'5 m^3/h'"],
    ],
    ['by a unit of something else', copper('by: 3 m^3/h'), [BY, "'94 %'", "'3 m^3/h', a flow by volume"]],
    ['by an unknown unit', copper('by: 35 pct'), [BY, "unknown unit 'pct'"]],
    ['by a mass fraction', copper('by: 1 wt%'), [BY, 'depends on where it starts', "'1 wt%'"]],
    ['by a list', copper('by: [1]'), [BY, "'+35 %'", 'got [1]']],
    ['to less than nothing', copper('to: -1 g/L'), [TO, 'not be negative', "'-1 g/L'"]],
    ['to a number', copper('to: 8'), [TO, 'bare number 8']],
    ['to a share', copper('to: 35 %'), [TO, 'a mass fraction needs densities.aqueous']],
    ['to nothing', copper('to: '), ['18:38 upsets.0.to', "'8 g/L'", 'got nothing']],
    ['that follow a text', copper('follow: a.csv'), ['18:46 upsets.0.follow', 'settings by name', "'a.csv'"]],
    [
      'that follow no column',
      copper('follow: {file: a.csv}'),
      ['18:46 upsets.0.follow.column', 'is missing'],
    ],
    [
      'that last less than their ramp',
      copper('by: 5 %, over: 2 h, for: 1 h'),
      ['18:63 upsets.0.for', 'lasts 1 h', 'ramp over 2 h'],
    ],
    ['that last no time', copper('by: 5 %, for: 0 h'), ['18:52 upsets.0.for', 'greater than 0']],
    ['with a ramp backwards', copper('by: 5 %, over: -1 h'), ['18:53 upsets.0.over', 'not be negative']],
    [
      'before the start',
      upset('{at: -2 h, change: liquor.copper, by: 5 %}'),
      ['18:10 upsets.0.at', 'not be negative', "'-2 h'"],
    ],
    [
      'after the end',
      upset('{at: 20 h, change: liquor.copper, by: 5 %}'),
      ['18:10 upsets.0.at', 'begins at 20 h', 'ends at 10 h'],
    ],
    [
      'at the end',
      upset('{at: 600 min, change: liquor.copper, by: 5 %}'),
      ['18:10 upsets.0.at', 'begins at 600 min', 'ends at 10 h'],
    ],
    ['at a number', upset('{at: 2, change: liquor.copper, by: 5 %}'), ['18:10 upsets.0.at', 'bare number 2']],
    [
      'at a clock time',
      upset('{at: 12:30, change: liquor.copper, by: 5 %}'),
      ['18:10 upsets.0.at', "'12:30'"],
    ],
    ['at no time', upset('{change: liquor.copper, by: 5 %}'), ['18:5 upsets.0.at', 'is missing', 'a time']],
    ['of nothing', upset('{at: 2 h, by: 5 %}'), ['18:5 upsets.0.change', 'is missing']],
    ['of a number', upset('{at: 2 h, change: 12, by: 5 %}'), ['18:23 upsets.0.change', 'got 12']],
    [
      'of an unknown feed',
      upset('{at: 2 h, change: liqor.copper, by: 5 %}'),
      ['18:23 upsets.0.change', "'liqor.copper'", "did you mean 'liquor.copper'?"],
    ],
    [
      'of an outlet',
      upset('{at: 2 h, change: raffinate.copper, by: 5 %}'),
      ['18:23 upsets.0.change', "'raffinate.copper' is a result", 'change a feed'],
    ],
    [
      'of something near nothing',
      upset('{at: 2 h, change: weather, by: 5 %}'),
      ['18:23 upsets.0.change', "'weather'", 'known here: liquor.flow', 'extraction.1.mixer'],
    ],
    ['that are a text', upset('more copper'), ['18:5 upsets.0', 'settings by name', "'more copper'"]],
  ]);

  const mixer = (stage: string, text: string): string =>
    upset(`{at: 2 h, change: extraction.${stage}.mixer, ${text}}`);
  refuses([
    [
      'of a mixer by a share',
      mixer('1', 'by: 5 %'),
      ['18:47 upsets.0.by', "'stopped' or 'running'", "'5 %'"],
    ],
    ['of a mixer to a number', mixer('1', 'to: 0'), ['18:47 upsets.0.to', "'stopped' or 'running'", 'got 0']],
    ['of a mixer to a near word', mixer('1', 'to: stoped'), ['18:47 upsets.0.to', "did you mean 'stopped'?"]],
    [
      'of stage 9 of 3',
      mixer('9', 'to: stopped'),
      ['18:23 upsets.0.change', "no stage '9'", 'extraction has stages 1 to 3'],
    ],
    ['of stage 0', mixer('0', 'to: stopped'), ['18:23 upsets.0.change', "no stage '0'", 'stages 1 to 3']],
    ['of stage 1.5', mixer('1.5', 'to: stopped'), ['18:23 upsets.0.change', 'unknown quantity']],
    ['of stage three', mixer('three', 'to: stopped'), ['18:23 upsets.0.change', "no stage 'three'"]],
  ]);

  refuses([
    [
      'of what a tank holds',
      exchange(closed, 'change: liquor.copper', 'change: tank.copper'),
      ['19:23 upsets.0.change', "'tank.copper' is a result"],
    ],
    [
      'of the pump of a tank without one',
      exchange(closed, ', flow: 430 m^3/h}', '}', 'change: liquor.copper', 'change: tank.flow'),
      ['7:44 tanks.tank.to', 'no pump'],
      ['19:23 upsets.0.change', 'unknown quantity', "'tank.flow'"],
    ],
  ]);

  it.each([
    'to: 0 g/L',
    'by: -120 %',
    'by: -1 g/L',
    'by: 1e3 %',
    'to: 8 g/L, over: 0 s',
    'to: 8 g/L, over: 1 h, for: 1 h',
  ])('are taken: %s', (text) => {
    expect(answer(copper(text))).toEqual([]);
  });
});

describe('limits', () => {
  const limit = (text: string): string => instead('{keep: raffinate.copper, below: 0.6 g/L}', text);
  const below = (text: string): string => limit(`{keep: raffinate.copper, below: ${text}}`);
  const BELOW = '20:37 limits.0.below';
  refuses([
    [
      'on both sides',
      limit('{keep: raffinate.copper, below: 0.6 g/L, above: 0.1 g/L}'),
      ['20:5 limits.0', 'one of below and above', 'got both'],
    ],
    [
      'on no side',
      limit('{keep: raffinate.copper}'),
      ['20:5 limits.0', 'one of below and above', 'got neither'],
    ],
    ['below zero', below('-0.6 g/L'), [BELOW, 'greater than 0', "'-0.6 g/L'"]],
    ['at zero', below('0 g/L'), [BELOW, 'greater than 0', "'0 g/L'"]],
    ['in a unit of something else', below('3 h'), [BELOW, 'a concentration', "'3 h', a time"]],
    ['as a number', below('0.6'), [BELOW, 'bare number 0.6']],
    ['as a list', below('[0.6 g/L]'), [BELOW, "'0.6 g/L'", 'got ["0.6 g/L"]']],
    ['as a share of several', below('1 %'), [BELOW, 'several dissolved components', 'g/L or kg/kg']],
    [
      'on a flow by mass',
      limit('{keep: raffinate.flow, below: 3 t/h}'),
      ['20:35 limits.0.below', 'a flow by volume', "'3 t/h', a flow by mass"],
    ],
    [
      'on an unknown outlet',
      limit('{keep: raffinat.copper, below: 1 g/L}'),
      ['20:12 limits.0.keep', "did you mean 'raffinate.copper'?"],
    ],
    [
      'on a stage',
      limit('{keep: extraction.1.settler, below: 1 g/L}'),
      ['20:12 limits.0.keep', 'unknown quantity', 'raffinate.copper, raffinate.acid'],
    ],
    ['on nothing', limit('{below: 1 g/L}'), ['20:5 limits.0.keep', 'is missing']],
    [
      'on a species in the organic',
      limit('{keep: loaded.acid, below: 1 g/L}'),
      ['20:12 limits.0.keep', "'loaded.acid'"],
    ],
    ['that are a text', limit('raffinate.copper below 1 g/L'), ['20:5 limits.0', 'settings by name']],
    [
      'on the level of a tank, as a share',
      exchange(closed, 'raffinate.copper, below: 0.6 g/L', 'tank.volume, below: 90 %'),
      ['21:32 limits.0.below', 'a volume', "'90 %', a percentage"],
    ],
  ]);

  it.each([
    '{keep: raffinate.flow, above: 100 m^3/h}',
    '{keep: loaded.copper, above: 1 g/L}',
    '{keep: liquor.acid, below: 5 g/L}',
  ])('are taken: %s', (text) => {
    expect(answer(limit(text))).toEqual([]);
    expectRefusal(limit(text.replace('keep', 'keeps')), [
      ['20:5 limits.0.keep', 'is missing'],
      ['20:6 limits.0.keeps', "did you mean 'keep'?"],
    ]);
  });
});

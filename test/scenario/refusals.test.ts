import { describe, expect, it } from 'vitest';
import { readScenario, ScenarioError } from '../../src/scenario/read.ts';
import { Refusal } from '../../src/scenario/refusal.ts';
import { answer, expectRefusal, instead, sound } from './wrong.ts';

describe('several things wrong at once', () => {
  it('are all said, in the order of their lines', () => {
    const text = instead(
      'title: Plain plant',
      'titel: Plain plant',
      'copper: 5.2 g/L',
      'copper: 5.2',
      'organic: lean',
      'organic: leen',
      '94 %',
      '0 %',
      '{law: ratio, ratio: 3}',
      '{law: table, unit: g/L, aqueous: [0, 1, 1], organic: [0, 1, 2]}',
      'horizon: 10 h',
      'horizon: 10 h\nhorizon: 10',
      'change: liquor.copper, by: +35 %}',
      'change: liqor.copper, by: +35 %}\n  - {at: 1, change: liquor.flow, by: 5}\n  - {at: 1 h, change: liquor.flow, by: 5}',
      'below: 0.6 g/L',
      'below: 0.6 g/L, above: 1 g/L',
    );
    expectRefusal(text, [
      ['1:1 title', 'is missing'],
      ['1:1 titel', "did you mean 'title'?"],
      ['5:53 feeds.liquor.copper', 'bare number 5.2'],
      ['6:9 feeds.lean', 'nobody takes'],
      ['11:14 trains.extraction.organic', 'nobody makes'],
      ['12:47 trains.extraction.mixer.stage_efficiency', 'between 0 and 100 %'],
      ['14:27 trains.extraction.equilibrium.copper', 'must rise'],
      ['16:1 horizon', 'twice'],
      ['16:10 horizon', 'bare number 10'],
      ['19:23 upsets.0.change', "did you mean 'liquor.copper'?"],
      ['20:10 upsets.1.at', 'bare number 1'],
      ['21:40 upsets.2.by', 'two ways'],
      ['23:5 limits.0', 'got both'],
    ]);
  });

  it('a wrong feed hides nothing in its own line or elsewhere', () => {
    const text = instead(
      '{phase: organic, flow: 430 m^3/h, copper: 2 g/L}',
      '{phase: organic, flow: 0 m^3/h, copper: -2 g/L, acid: 1 g/L}',
      'by: +35 %',
      'by: 5',
    );
    expectRefusal(text, [
      ['6:32 feeds.lean.flow', 'greater than 0'],
      ['6:49 feeds.lean.copper', 'not be negative'],
      ['18:42 upsets.0.by', 'two ways'],
    ]);
  });

  it('what only follows from another fault is not said', () => {
    // Without its volume a mixer would be called incomplete, without its factors a figure would want them.
    expectRefusal(instead('volume: 42 m^3', 'volume: 42'), [
      ['12:21 trains.extraction.mixer.volume', 'bare number 42'],
    ]);
    expectRefusal(
      instead(
        '5.2 g/L',
        '0.1 mol/L',
        '1.8 g/L',
        '1 %',
        'horizon',
        'molar_masses: {copper: 63}\ndensities: {aqueous: 1000}\nhorizon',
      ),
      [
        ['15:24 molar_masses.copper', 'bare number 63'],
        ['16:22 densities.aqueous', 'bare number 1000'],
      ],
    );
    expectRefusal(instead('solutes: [copper]', 'solutes: copper'), [['2:10 solutes', 'list of names']]);
    expectRefusal(
      instead('{law: ratio, ratio: 3}', '{law: formula, organic: k*c_a, constants: {k: 3 g/L}}'),
      [['14:73 trains.extraction.equilibrium.copper.constants.k', 'a plain number']],
    );
  });

  it('what an alias repeats is said once, where it is written', () => {
    const text = instead(
      'mixer: {volume',
      'mixer: &m {volme: 2 m^3, volume',
      '  lean:',
      '  water: {phase: aqueous, flow: 9 m^3/h}\n  lean:',
      'horizon',
      '  strip: {stages: 1, aqueous: water -> rich, organic: loaded -> stripped, mixer: *m, settler: {aqueous_volume: 9 m^3, organic_volume: 9 m^3}}\nhorizon',
    );
    expectRefusal(text, [['13:16 trains.extraction.mixer.volme', "did you mean 'volume'?"]]);
  });
});

describe('places', () => {
  it('do not depend on line ends or a mark of byte order', () => {
    const wrong = instead('5.2 g/L', '5.2 V', 'at: 2 h', 'at: 20 h');
    const lines = answer(wrong);
    expect(lines).toHaveLength(2);
    for (const same of [
      wrong.replaceAll('\n', '\r\n'),
      wrong.replaceAll('\n', '\r'),
      `\uFEFF${wrong}`,
      `${wrong}...\n`,
    ])
      expect(answer(same)).toEqual(lines);
  });

  it('a later refusal by the plant is traced to its line', () => {
    const read = readScenario(sound, { file: 'sound.yaml', folder: '.' });
    const refusal = new Refusal([
      { path: ['trains', 'extraction', 'settler', 'area'], message: 'too small' },
      { path: ['feeds', 'liquor', 'flow'], message: 'too large' },
      { path: ['feeds', 'liquor', 'colour', 'hue'], message: 'green' },
      { path: ['trains', 'extraction', 'stages'], message: 'at its key', atKey: true },
    ]);
    const error = read.refuse(refusal);
    expect(error).toBeInstanceOf(ScenarioError);
    expect(error.message.split('\n')).toEqual([
      'sound.yaml:5:11 feeds.liquor.colour.hue: green',
      'sound.yaml:5:34 feeds.liquor.flow: too large',
      'sound.yaml:9:5 trains.extraction.stages: at its key',
      'sound.yaml:13:21 trains.extraction.settler.area: too small',
    ]);
  });

  it('a message moves no cursor and runs over no page', () => {
    const [line] = answer(instead('5.2 g/L', `"\\e[2J${'x'.repeat(5000)}"`));
    expect(line).toContain("'\\u001b[2Jxxx");
    expect(line.length).toBeLessThan(250);
    const [long] = answer(instead('acid: 1.8', `${'y'.repeat(900)}: 1.8`));
    expect(long.length).toBeLessThan(350);
  });
});

import { describe, expect, test } from 'vitest';
import { assemble } from '../../src/plant/assemble.ts';
import type { Problem } from '../../src/scenario/refusal.ts';
import { Refusal } from '../../src/scenario/refusal.ts';
import type { Scenario } from '../../src/scenario/scenario.ts';
import { run, usual } from '../../src/study/run.ts';
import { fromText } from '../support/plants.ts';

function refused(s: Scenario): readonly Problem[] {
  try {
    assemble(s);
  } catch (e) {
    if (e instanceof Refusal) return e.problems;
    throw e;
  }
  return [];
}

interface Sketch {
  readonly law?: string;
  readonly upsets?: string;
  readonly settler?: string;
  readonly more?: string;
  readonly solvent?: string;
}

/** A train of two stages: 10 m³/h of 5 g/L against 10 m³/h; mixers of 2 m³, so one m³ of each phase. */
const plant = (p: Sketch): Scenario =>
  fromText(`
title: suitable
solutes: [metal, guest]
species: [acid]
feeds:
  liquor: {phase: aqueous, flow: 10 m^3/h, metal: 5 g/L, guest: 1 g/L, acid: 4 g/L}
  ${p.solvent ?? 'solvent: {phase: organic, flow: 10 m^3/h}'}
${p.more ?? ''}
trains:
  train:
    stages: 2
    aqueous: liquor -> raffinate
    organic: solvent -> extract
    mixer: {volume: 2 m^3, stage_efficiency: 90 %}
    settler: {${p.settler ?? 'aqueous_volume: 3 m^3, organic_volume: 3 m^3'}}
    equilibrium:
      metal: ${p.law ?? '{law: ratio, ratio: 2}'}
      guest: {law: exchange, constant: 2, extractant: 9 g/L}
upsets: [${p.upsets ?? ''}]
horizon: 24 h
`);
const formula = (text: string, constants = '{}'): string =>
  `{law: formula, organic: "${text}", constants: ${constants}}`;

describe('a formula', () => {
  const path = ['trains', 'train', 'equilibrium', 'metal', 'organic'];

  test.each([
    '2*c_a',
    '18*c_a/(1 + 0.9*c_a)',
    '6*tanh(c_a/4)',
    '5*c_a/(1 + 0.2*acid + guest)',
    'log(1 + c_a)',
    'c_a + 0.5*c_a^2',
    // Turns over, but only beyond twice the feed: at 12.5 g/L.
    '5*c_a - 0.2*c_a^2',
  ])('that rises from zero is taken: %s', (text) => {
    expect(refused(plant({ law: formula(text) }))).toEqual([]);
  });

  test.each([
    { text: '0.4*c_a + 0.1', why: /gives 0\.1 g\/L at c_a = 0/ },
    { text: 'exp(c_a) - 0.999', why: /at c_a = 0/ },
    { text: 'log(c_a)', why: /gives -Infinity g\/L at c_a = 0/ },
    { text: 'c_a/c_a - 1', why: /gives NaN g\/L at c_a = 0/ },
    { text: '7', why: /gives 7 g\/L at c_a = 0/ },
    { text: 'c_a^2', why: /slope of the formula is 0 at c_a = 0 g\/L/ },
    { text: 'sqrt(c_a)', why: /slope of the formula is Infinity at c_a = 0 g\/L/ },
    { text: '-c_a', why: /slope of the formula is -1 at c_a = 0 g\/L/ },
    { text: 'min(3*c_a, 12)', why: /slope of the formula is 0 at c_a = 4\./ },
    // 5 − 0.8·c_a vanishes at 6.25 g/L, short of twice the feed of 5 g/L.
    {
      text: '5*c_a - 0.4*c_a^2',
      why: /twice the largest feed\), but the slope of the formula is -[\d.e-]+ at c_a = 6\.[23]/,
    },
  ])('that does not is refused with its place: $text', ({ text, why }) => {
    const problems = refused(plant({ law: formula(text) }));
    expect(problems.map((p) => p.path)).toEqual([path]);
    expect(problems[0].message).toMatch(why);
  });

  test('rounding at zero is no offset', () => {
    expect(refused(plant({ law: formula('0.1*c_a + 0.3 - 0.1 - 0.2') }))).toEqual([]);
    expect(refused(plant({ law: formula('c_a + k', '{k: 1e-7}') }))).toHaveLength(1);
  });

  test('is looked at up to twice what an upset makes of the feed', () => {
    // Turns over at 12.5 g/L; 5 + 2 = 7 g/L makes the range 14.
    const law = formula('5*c_a - 0.2*c_a^2');
    const upset = (by: string): string => `{at: 1 h, change: liquor.metal, by: ${by}, for: 2 h}`;
    expect(refused(plant({ law, upsets: upset('+1 g/L') }))).toEqual([]);
    expect(refused(plant({ law, upsets: upset('+2 g/L') }))).toHaveLength(1);
    expect(refused(plant({ law, upsets: upset('+40 %') }))).toHaveLength(1);
    // A fall leaves the feed itself the largest.
    expect(refused(plant({ law, upsets: upset('-50 %') }))).toEqual([]);
  });

  test('with other components in it is looked at where they are as they enter', () => {
    // Slopes 5 − 0.1·acid·c_a and 5 − 0.15·acid·c_a with 4 g/L of acid vanish at 12.5 and at 8.3 g/L.
    expect(refused(plant({ law: formula('5*c_a - 0.05*acid*c_a^2') }))).toEqual([]);
    expect(refused(plant({ law: formula('5*c_a - 0.075*acid*c_a^2') }))).toHaveLength(1);
    expect(refused(plant({ law: formula('(acid - 3)*c_a') }))).toEqual([]);
    expect(refused(plant({ law: formula('(acid - 5)*c_a') }))).toHaveLength(1);
  });
});

describe('several solutes on one extractant', () => {
  test('must state the same total', () => {
    const law = (extractant: string): string => `{law: exchange, constant: 16, extractant: ${extractant}}`;
    expect(refused(plant({ law: law('9 g/L') }))).toEqual([]);
    const problems = refused(plant({ law: law('10 g/L') }));
    expect(problems.map((p) => p.path)).toEqual([['trains', 'train', 'equilibrium', 'guest', 'extractant']]);
    expect(problems[0].message).toMatch(
      /'metal' and 'guest' share one extractant, but 10 and 9 g\/L are stated/,
    );
  });
});

describe('a settler must hold what its mixer takes up when a flow changes', () => {
  const path = ['trains', 'train', 'settler'];
  const stop = (feed: string): string => `{at: 2 h, change: ${feed}.flow, to: 0 m^3/h, for: 1 h}`;

  test('while flows stay, any settler will do', () => {
    const upsets =
      '{at: 2 h, change: liquor.metal, by: +20 %}, {at: 3 h, change: train.1.mixer, to: stopped, for: 1 h}';
    expect(refused(plant({ settler: 'aqueous_volume: 1 L, organic_volume: 1 L', upsets }))).toEqual([]);
  });

  test.each([
    // Without aqueous the mixer of 2 m³ fills with organic: it takes 1 m³ out of the organic layer.
    { feed: 'liquor', settler: 'aqueous_volume: 0.5 m^3, organic_volume: 1.02 m^3', refuse: false },
    { feed: 'liquor', settler: 'aqueous_volume: 0.5 m^3, organic_volume: 1 m^3', refuse: true },
    { feed: 'solvent', settler: 'aqueous_volume: 1.02 m^3, organic_volume: 0.5 m^3', refuse: false },
    { feed: 'solvent', settler: 'aqueous_volume: 1 m^3, organic_volume: 0.5 m^3', refuse: true },
  ])('$feed stops, $settler: refused is $refuse', ({ feed, settler, refuse }) => {
    const problems = refused(plant({ settler, upsets: stop(feed) }));
    expect(problems.map((p) => p.path)).toEqual(refuse ? [path] : []);
    if (refuse)
      expect(problems[0].message).toMatch(
        /settler of stage 1 is too small: at 0 m\^3\/h of .* takes up 1 m\^3/,
      );
  });

  test('a flow that only falls, or rises, takes as much as its shares say', () => {
    // Aqueous at half: organic share 10/15, the mixer takes 2·(2/3 − 1/2) = 1/3 m³ of organic.
    const half = '{at: 2 h, change: liquor.flow, by: -50 %, over: 1 h}';
    expect(
      refused(plant({ settler: 'aqueous_volume: 1 L, organic_volume: 0.34 m^3', upsets: half })),
    ).toEqual([]);
    expect(
      refused(plant({ settler: 'aqueous_volume: 1 L, organic_volume: 0.33 m^3', upsets: half })),
    ).toHaveLength(1);
    // Aqueous doubled: the same third, of aqueous.
    const twice = '{at: 2 h, change: liquor.flow, by: +100 %}';
    expect(
      refused(plant({ settler: 'aqueous_volume: 0.34 m^3, organic_volume: 1 L', upsets: twice })),
    ).toEqual([]);
    expect(
      refused(plant({ settler: 'aqueous_volume: 0.33 m^3, organic_volume: 1 L', upsets: twice })),
    ).toHaveLength(1);
  });

  test('a tank on a pump of its own can run dry, so its flow counts as one that stops', () => {
    const solvent = 'fresh solvent: {phase: organic, flow: 9 m^3/h}';
    const more = `
tanks:
  organic tank: {phase: organic, from: fresh solvent, to: solvent, volume: 20 m^3, filled: 50 %, flow: 10 m^3/h}`;
    const settler = (aqueous: string): string => `aqueous_volume: ${aqueous}, organic_volume: 1 m^3`;
    expect(refused(plant({ solvent, more, settler: settler('1.02 m^3') }))).toEqual([]);
    const problems = refused(plant({ solvent, more, settler: settler('1 m^3') }));
    expect(problems.map((p) => p.path)).toEqual([path]);
    expect(problems[0].message).toMatch(/at 0 m\^3\/h of organic its mixer takes up 1 m\^3 of aqueous more/);
  });

  test('at the least size that is taken, a run with the stop in it comes to its end and closes', () => {
    const s = plant({ settler: 'aqueous_volume: 0.5 m^3, organic_volume: 1.02 m^3', upsets: stop('liquor') });
    const { complete, closures } = run(s, usual);
    expect(complete).toBe(true);
    for (const c of closures) expect(c.closure).toBeLessThan(1e-9);
  });
});

test('everything that is wrong is said at once', () => {
  const problems = refused(
    plant({
      law: formula('c_a^2'),
      settler: 'aqueous_volume: 3 m^3, organic_volume: 10 L',
      upsets: '{at: 1 h, change: liquor.flow, by: -30 %}',
    }),
  );
  expect(problems.map((p) => p.path[p.path.length - 1])).toEqual(['organic', 'settler']);
});

test('a mixer can be stopped in a train where nothing transfers', () => {
  const s = plant({ upsets: '{at: 1 h, change: train.2.mixer, to: stopped, for: 1 h}' });
  const inert = { ...s, trains: s.trains.map((t) => ({ ...t, equilibrium: [null, null] })) };
  const { complete, courses } = run(inert, usual);
  expect(complete).toBe(true);
  expect(courses.map((c) => c.quantity)).toEqual(['train.2.mixer']);
});

import fc from 'fast-check';
import { assemble } from '../../src/plant/assemble.ts';
import { noProperties, plainMixer, plainTank, plainTrain, usualInversion } from '../../src/scenario/plain.ts';
import { Refusal } from '../../src/scenario/refusal.ts';
import type {
  Band,
  Carry,
  Change,
  Feed,
  Formula,
  Law,
  Mixer,
  Phase,
  Scenario,
  Stage,
  Tank,
  Train,
} from '../../src/scenario/scenario.ts';

/*
 * Random plants that an engineer could have written: vessels of minutes to a quarter of an hour, concentrations of
 * grams per litre, laws that rise, and settlers that hold what their mixers can take.
 */

const HOUR = 3600;
const ACID = 0;

const between = (min: number, max: number): fc.Arbitrary<number> =>
  fc.double({ min, max, noNaN: true, noDefaultInfinity: true });
/** Even over decades. */
const decades = (min: number, max: number): fc.Arbitrary<number> =>
  between(Math.log(min), Math.log(max)).map(Math.exp);

const number = (value: number): Formula => ({ kind: 'number', value });
const name = (n: string): Formula => ({ kind: 'name', name: n });
const apply = (op: string, ...args: Formula[]): Formula => ({ kind: 'apply', op, args });

/** D·c_a/(1 + k·c_a + l·acid): saturates where k > 0, and knows of the acid where l > 0. */
export const bent = (D: number, k: number, l: number): Formula =>
  apply(
    '/',
    apply('*', number(D), name('c_a')),
    apply(
      '+',
      apply('+', number(1), apply('*', number(k), name('c_a'))),
      apply('*', number(l), name('acid')),
    ),
  );

export const anyLaw = (extractant: number): fc.Arbitrary<Law> =>
  fc.oneof(
    fc.record({ law: fc.constant('ratio' as const), ratio: decades(0.1, 30) }),
    fc.record({
      law: fc.constant('langmuir' as const),
      capacity: between(5, 30),
      affinity: decades(0.05, 5),
    }),
    fc.record({
      law: fc.constant('freundlich' as const),
      coefficient: decades(0.3, 10),
      exponent: between(0.4, 1.6),
    }),
    fc.array(fc.tuple(between(0.2, 8), between(0.2, 8)), { minLength: 1, maxLength: 7 }).map((steps): Law => {
      const sums = (k: 0 | 1): number[] => {
        const list = [0];
        for (const q of steps) list.push(list[list.length - 1] + q[k]);
        return list;
      };
      return { law: 'table', aqueous: sums(0), organic: sums(1) };
    }),
    fc.record({
      law: fc.constant('exchange' as const),
      constant: decades(0.5, 50),
      extractant: fc.constant(extractant),
      perSolute: between(0.8, 1.3),
      p: fc.oneof(fc.constantFrom(1, 2, 3), between(0.8, 2.5)),
      q: fc.oneof(fc.constantFrom(1, 2), between(0.5, 2.5)),
      acid: fc.constant(ACID),
    }),
    // A ceiling of at least 5 g/L: no feed brings an organic that is loaded beyond it.
    fc
      .record({
        D: decades(0.2, 20),
        free: fc.oneof(fc.constant(0), between(0, 1)),
        l: fc.oneof(fc.constant(0), decades(0.001, 0.1)),
      })
      .map(({ D, free, l }): Law => ({ law: 'formula', organic: bent(D, (free * D) / 5, l), constants: {} })),
  );

const anyMixer = (volume: number): fc.Arbitrary<Mixer> =>
  fc.record({
    volume: fc.constant(volume),
    continuity: fc.constantFrom<Phase>('aqueous', 'organic'),
    side: fc.constantFrom<Phase>('aqueous', 'organic'),
    pumps: fc.boolean(),
    inversion: fc.constantFrom(null, usualInversion),
    organicShare: fc.constant(null),
    overflow: fc.constant(plainMixer.overflow),
    transfer: fc.oneof(
      fc.record({ given: fc.constant('ka' as const), ka: decades(1e-3, 1), fixed: fc.boolean() }),
      fc.record({ given: fc.constant('efficiency' as const), efficiency: between(0.3, 0.995) }),
    ),
  });

/** A band of millimetres to centimetres at a dispersed flow of about the half of both, m/s. */
const anyBand = (flux: number): fc.Arbitrary<Band> =>
  fc.record({
    thickness: decades(0.001, 0.05),
    at: fc.constant(flux),
    law: fc.oneof(
      between(1.5, 5).map((exponent) => ({ exponent })),
      between(2, 5).map((n) => ({ floodsAt: n * flux })),
    ),
    holdUp: between(0.5, 0.85),
    coalescer: fc.constantFrom(1, 0.5),
    other: fc.constant(null),
  });

const anyCarry: fc.Arbitrary<Carry> = fc.record({
  organicInAqueous: decades(1e-6, 3e-3),
  aqueousInOrganic: decades(1e-6, 3e-3),
  exponent: fc.constantFrom(0, 1, 2),
  other: fc.constantFrom(null, { organicInAqueous: 1e-4, aqueousInOrganic: 1e-4 }),
});

/** Stages for two flows: a mixer of one to six minutes, layers of one to four mixers. */
const anyStage = (both: number): fc.Arbitrary<Stage> =>
  between(60, 360).chain((seconds) =>
    fc.record({
      mixer: anyMixer(seconds * both),
      settler: fc.record({
        aqueous: between(1.1, 4).map((n) => n * seconds * both),
        organic: between(1.1, 4).map((n) => n * seconds * both),
        parts: fc.integer({ min: 1, max: 3 }),
        // A quarter of a metre of each layer, or so.
        area: fc.constant(10 * seconds * both),
        shortCircuit: fc.oneof(fc.constant(0), between(0.01, 0.3)),
        band: fc.oneof({ weight: 2, arbitrary: fc.constant(null) }, anyBand(1 / (20 * seconds))),
        carry: fc.oneof({ weight: 2, arbitrary: fc.constant(null) }, anyCarry),
        weirs: fc.constant(null),
      }),
      takes: fc.constant([]),
      draws: fc.constant([]),
    }),
  );

interface Skeleton {
  readonly solutes: number;
  readonly trains: number;
  readonly aqueous: number;
  readonly organic: number;
  /** The organic: through once, through a tank with a pump of its own, or round a loop through a tank. */
  readonly way: 'once' | 'buffered' | 'loop';
  readonly feedTank: boolean;
}

const skeleton: fc.Arbitrary<Skeleton> = fc.record({
  solutes: fc.integer({ min: 1, max: 2 }),
  trains: fc.integer({ min: 1, max: 2 }),
  aqueous: decades(1e-3, 0.2),
  organic: decades(1e-3, 0.2),
  way: fc.constantFrom('once', 'buffered', 'loop'),
  feedTank: fc.boolean(),
});

/** A tank of half an hour to two hours, anything from a twentieth to all of it filled. */
const anyTank = (
  t: Pick<Tank, 'name' | 'phase' | 'from' | 'to' | 'content'>,
  flow: number,
): fc.Arbitrary<Tank> =>
  fc
    .record({ seconds: between(1800, 7200), filled: between(0.05, 1), pump: between(0.8, 1.25) })
    .map(({ seconds, filled, pump }) => ({
      ...t,
      ...plainTank,
      passes: pump > 1 ? 0.5 : 0,
      volume: seconds * flow,
      held: filled * seconds * flow,
      flow: t.phase === 'organic' && t.from === 'lean' ? flow : flow * pump,
    }));

function anyChange(s: Scenario): fc.Arbitrary<Change> {
  const contents = s.feeds.flatMap((f) =>
    s.solutes.flatMap((q, i) =>
      f.content[i] > 0 ? [{ quantity: `${f.name}.${q}`, base: f.content[i] }] : [],
    ),
  );
  const flows = [
    ...s.feeds.map((f) => ({ quantity: `${f.name}.flow`, base: f.flow })),
    ...s.tanks.map((t) => ({ quantity: `${t.name}.flow`, base: t.flow as number })),
  ];
  const mixers = s.trains.flatMap((t) =>
    t.stages.map((_, j) => ({ quantity: `${t.name}.${j + 1}.mixer`, base: 0 })),
  );
  const how = (base: number, least: number): fc.Arbitrary<Change['how']> =>
    fc.oneof(
      between(least, 2).map((k) => ({ to: k * base })),
      between(least - 1, 0.6).map((by) => ({ by, relative: true })),
      between(least - 1, 0.6).map((k) => ({ by: k * base, relative: false })),
    );
  const one = fc.oneof(
    ...(contents.length > 0
      ? [fc.constantFrom(...contents).chain((q) => fc.tuple(fc.constant(q.quantity), how(q.base, 0)))]
      : []),
    fc
      .constantFrom(...flows)
      .chain((q) =>
        fc.tuple(fc.constant(q.quantity), fc.oneof(how(q.base, 0.2), fc.constant<Change['how']>({ to: 0 }))),
      ),
    fc.constantFrom(...mixers).map((q): [string, Change['how']] => [q.quantity, { to: 0 }]),
  );
  return fc
    .record({
      one,
      at: between(0, 0.8).map((k) => k * s.horizon),
      over: fc.oneof(fc.constant(0), between(60, 3600)),
      lasts: fc.oneof(fc.constant(null), between(60, 4 * HOUR)),
    })
    .map(({ one: [quantity, by], at, over, lasts }) => ({
      at,
      quantity,
      how: by,
      over: quantity.endsWith('.mixer') ? 0 : over,
      lasts,
      words: '',
    }));
}

function anyTrain(k: Skeleton, index: number, extractant: number): fc.Arbitrary<Train> {
  const last = index === k.trains - 1;
  return fc.record({
    name: fc.constant(`train ${index + 1}`),
    aqueous: fc.constant({
      from: index === 0 && k.feedTank ? 'buffered liquor' : `liquor ${index + 1}`,
      to: `raffinate ${index + 1}`,
    }),
    organic: fc.constant({
      from: index > 0 ? `organic ${index}` : k.way === 'once' ? 'solvent' : 'pumped',
      to: last ? (k.way === 'loop' ? 'lean' : 'extract') : `organic ${index + 1}`,
    }),
    stages: fc.array(anyStage(k.aqueous + k.organic), { minLength: 1, maxLength: 6 }),
    equilibrium: fc.array(fc.oneof({ weight: 9, arbitrary: anyLaw(extractant) }, fc.constant(null)), {
      minLength: k.solutes,
      maxLength: k.solutes,
    }),
    hydraulics: fc.constant('full' as const),
    arrangement: fc.constant(plainTrain.arrangement),
    backFlow: fc.constant(plainTrain.backFlow),
    recycle: fc.oneof(
      { weight: 3, arbitrary: fc.constant(null) },
      between(0.5, 2).map((hold) => ({ hold })),
      fc.constantFrom<Phase>('aqueous', 'organic').map((phase) => ({ phase, flow: 0.3 * k.organic })),
    ),
    initial: fc.record({
      aqueous: fc.constantFrom('barren' as const, 'as entering' as const),
      organic: fc.constant('as entering' as const),
    }),
  });
}

/** Only a law that knows of the acid leaves off before the acid is used up. */
const exchanges = (s: Scenario, solute: number): boolean =>
  s.trains.every((t) => t.equilibrium[solute] === null || t.equilibrium[solute]?.law === 'exchange');

/** Plants whose settlers are made for their flows; the others are refused. */
function suits(s: Scenario): boolean {
  try {
    assemble(s);
    return true;
  } catch (e) {
    if (e instanceof Refusal && e.problems.every((p) => p.path.includes('settler'))) return false;
    throw e;
  }
}

/** Whole scenarios; two trains are series in the organic, each with an aqueous of its own. */
export const anyPlant: fc.Arbitrary<Scenario> = fc
  .tuple(skeleton, between(8, 15))
  .chain(([k, extractant]) => {
    const solutes = ['red', 'blue'].slice(0, k.solutes);
    const content = (most: number): fc.Arbitrary<number[]> =>
      fc.tuple(...solutes.map(() => fc.oneof(fc.constant(0), between(0.1, most))), between(0.5, 150));
    const organicOf = (c: number[]): number[] => [...c.slice(0, k.solutes), 0];
    const feeds = fc.tuple(
      ...Array.from({ length: k.trains }, (_, i) =>
        content(9).map(
          (c): Feed => ({ name: `liquor ${i + 1}`, phase: 'aqueous', flow: k.aqueous, content: c }),
        ),
      ),
      ...(k.way === 'loop'
        ? []
        : [
            content(1).map(
              (c): Feed => ({ name: 'solvent', phase: 'organic', flow: k.organic, content: organicOf(c) }),
            ),
          ]),
    );
    const organicTank = content(1).chain((c) =>
      anyTank(
        {
          name: 'organic tank',
          phase: 'organic',
          from: k.way === 'loop' ? 'lean' : 'solvent',
          to: 'pumped',
          content: organicOf(c),
        },
        k.organic,
      ),
    );
    const feedTank = content(9).chain((c) =>
      anyTank(
        { name: 'feed tank', phase: 'aqueous', from: 'liquor 1', to: 'buffered liquor', content: c },
        k.aqueous,
      ),
    );
    const tanks: fc.Arbitrary<Tank[]> = fc.tuple(
      ...(k.way === 'once' ? [] : [organicTank]),
      ...(k.feedTank ? [feedTank] : []),
    );
    return fc
      .record({
        title: fc.constant('any'),
        about: fc.constant(''),
        solutes: fc.constant(solutes),
        species: fc.constant(['acid']),
        feeds,
        tanks,
        splits: fc.constant([]),
        blends: fc.constant([]),
        batches: fc.constant([]),
        trains: fc.tuple(...Array.from({ length: k.trains }, (_, i) => anyTrain(k, i, extractant))),
        releases: fc.array(
          fc.oneof(fc.constant(0), between(0.3, 2)).map((r) => [r]),
          { minLength: k.solutes, maxLength: k.solutes },
        ),
        start: fc.constant('barren' as const),
        properties: fc.constant(noProperties(k.solutes)),
        horizon: between(0.5, 5).map((h) => h * HOUR),
        recordEvery: fc.constant(HOUR),
        upsets: fc.constant([]),
        limits: fc.constant([]),
      })
      .map(
        (s: Scenario): Scenario => ({
          ...s,
          releases: s.releases.map((row, i) => (exchanges(s, i) ? row : [0])),
        }),
      )
      .chain((s) => fc.array(anyChange(s), { maxLength: 5 }).map((upsets): Scenario => ({ ...s, upsets })));
  })
  .filter(suits);

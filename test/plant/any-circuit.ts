import fc from 'fast-check';
import { assemble } from '../../src/plant/assemble.ts';
import { noSettler } from '../../src/scenario/plain.ts';
import { Refusal } from '../../src/scenario/refusal.ts';
import type { Arrangement, Draw, Phase, Scenario, Take, Train } from '../../src/scenario/scenario.ts';
import { anyPlant } from './any-plant.ts';

const between = (min: number, max: number): fc.Arbitrary<number> => fc.double({ min, max, noNaN: true });

/** Half of a stream at most, by share or by flow. */
const anyTake = (flow: number): fc.Arbitrary<Take> =>
  fc.oneof(
    between(0.02, 0.4).map((share) => ({ share })),
    between(0.02, 0.4).map((k) => ({ flow: k * flow })),
  );

const anyArrangement = (stages: number): fc.Arbitrary<Arrangement> =>
  fc.oneof(
    { weight: 2, arbitrary: fc.constant<Arrangement>({ kind: 'counter-current' }) },
    fc.constant<Arrangement>({ kind: 'co-current' }),
    fc
      .record({
        fresh: fc.constantFrom<Phase>('aqueous', 'organic'),
        parts: fc.array(between(0.3, 1), { minLength: stages, maxLength: stages }),
      })
      .map(({ fresh, parts }): Arrangement => {
        const sum = parts.reduce((n, v) => n + v, 0);
        return { kind: 'cross-current', fresh, shares: parts.map((v) => v / sum) };
      }),
  );

/** A train of cells where its settings allow it. */
function asCells(t: Train, back: readonly [number, number]): Train {
  const across = t.arrangement.kind === 'cross-current';
  if (t.recycle !== null || t.stages.some((q) => q.mixer.inversion !== null)) return t;
  return {
    ...t,
    backFlow: across ? t.backFlow : { aqueous: back[0], organic: back[1] },
    stages: t.stages.map((q) => ({ ...q, settler: noSettler })),
  };
}

interface Choices {
  readonly arrangements: readonly Arrangement[];
  readonly cells: boolean;
  readonly back: readonly [number, number];
  /** Split off the first liquor: to a stage from the side, out of the plant, or back to where it came from. */
  readonly side: { readonly take: Take; readonly to: 'stage' | 'out' | 'back' } | null;
  readonly draws: readonly { readonly phase: Phase; readonly take: Take }[];
  readonly stage: number;
  readonly base: number | null;
  readonly removal: number | null;
  readonly bleed: Take | null;
}

function rebuilt(s: Scenario, c: Choices): Scenario {
  const [first] = s.trains;
  const at = Math.floor(c.stage * first.stages.length * 0.999);
  const source = first.aqueous.from;
  const draws = c.draws.map((d, i): Draw => ({ name: `drawn ${i + 1}`, ...d }));
  const takes = [...(c.side?.to === 'stage' ? ['branch'] : []), ...(c.base === null ? [] : ['base'])];
  const divided = c.side !== null;
  const inlet = c.side?.to === 'back' ? 'joined' : divided ? 'main' : source;
  const last = s.trains.length - 1;
  const bleeds = c.bleed !== null;
  const trains = s.trains.map((t, i): Train => {
    const made: Train = {
      ...t,
      arrangement: c.arrangements[i],
      aqueous: i === 0 ? { ...t.aqueous, from: inlet } : t.aqueous,
      organic: i === last && bleeds ? { ...t.organic, to: 'before the bleed' } : t.organic,
    };
    const cells = c.cells ? asCells(made, c.back) : made;
    if (i > 0) return cells;
    return { ...cells, stages: cells.stages.map((q, j) => (j === at ? { ...q, takes, draws } : q)) };
  });
  return {
    ...s,
    feeds: [
      ...s.feeds,
      ...(c.base === null
        ? []
        : [
            {
              name: 'base',
              phase: 'aqueous' as const,
              flow: 0.02 * s.feeds[0].flow,
              content: [...s.solutes.map(() => 0), -c.base],
            },
          ]),
    ],
    tanks: s.tanks.map((t) => ({
      ...t,
      removes: s.solutes.map((_, i) =>
        c.removal === null || i > 0
          ? null
          : {
              how: c.removal < 0.5 ? { share: c.removal } : { rate: c.removal * 1e-3 * (t.flow ?? 0) },
              returns: t.phase === 'aqueous' && c.removal > 0.7 ? [0.5] : null,
            },
      ),
    })),
    splits: [
      ...(c.side
        ? [{ stream: source, branches: [{ name: 'branch', take: c.side.take }], rest: 'main' }]
        : []),
      ...(c.bleed
        ? [
            {
              stream: 'before the bleed',
              branches: [{ name: 'bleed', take: c.bleed }],
              rest: s.trains[last].organic.to,
            },
          ]
        : []),
    ],
    blends: c.side?.to === 'back' ? [{ name: 'joined', of: ['main', 'branch'] }] : [],
    trains,
  };
}

/** Whether the equations are made for it. */
function suits(s: Scenario): boolean {
  try {
    assemble(s);
    return true;
  } catch (e) {
    if (e instanceof Refusal && e.problems.every((p) => p.path.includes('settler'))) return false;
    throw e;
  }
}

/** Whole scenarios whose streams divide, run together and enter from the side, in any arrangement of the stages. */
export const anyCircuit: fc.Arbitrary<Scenario> = anyPlant
  .chain((s) => {
    const [liquor] = s.feeds;
    const organic = s.tanks.find((t) => t.phase === 'organic')?.flow ?? s.feeds[s.feeds.length - 1].flow;
    const flow = (phase: Phase): number => (phase === 'aqueous' ? liquor.flow : organic);
    const choices: fc.Arbitrary<Choices> = fc.record({
      arrangements: fc.tuple(...s.trains.map((t) => anyArrangement(t.stages.length))),
      cells: fc.boolean(),
      back: fc.tuple(between(0, 2), between(0, 1)),
      side: fc.option(
        fc.record({
          take: anyTake(liquor.flow),
          to: fc.constantFrom('stage' as const, 'out' as const, 'back' as const),
        }),
      ),
      draws: fc.array(
        fc.constantFrom<Phase>('aqueous', 'organic').chain((phase) =>
          anyTake((0.3 * flow(phase)) / Math.max(...s.trains.map((t) => t.stages.length))).map((take) => ({
            phase,
            take,
          })),
        ),
        { maxLength: 2 },
      ),
      stage: between(0, 1),
      base: fc.option(between(1, 60)),
      removal: fc.option(between(0.1, 0.9)),
      bleed: fc.option(anyTake(0.1 * organic)),
    });
    return choices.chain((c) => {
      const made = rebuilt(s, c);
      const moves = [
        ...made.splits.flatMap((q) => q.branches),
        ...made.trains.flatMap((t) => t.stages.flatMap((q) => q.draws)),
      ];
      if (moves.length === 0) return fc.constant(made);
      return fc
        .record({
          b: fc.constantFrom(...moves),
          k: between(0, 2.2),
          at: between(0, 0.8),
          change: fc.boolean(),
        })
        .map(({ b, k, at, change }): Scenario => {
          if (!change) return made;
          const [what, value] =
            'share' in b.take ? (['share', b.take.share] as const) : (['flow', b.take.flow] as const);
          const upset = {
            at: at * s.horizon,
            quantity: `${b.name}.${what}`,
            how: { to: k * value },
            over: 600,
            lasts: null,
            words: '',
          };
          return { ...made, upsets: [...made.upsets, upset] };
        });
    });
  })
  .filter(suits);

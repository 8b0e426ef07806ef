import type { Plant } from '../../plant/assemble.ts';
import type { Answer } from '../../scenario/rehearsing.ts';
import type { Change } from '../../scenario/scenario.ts';
import type { Branches } from './branches.ts';
import { Branches as Branch, type Care } from './branches.ts';
import type { Ground } from './ground.ts';
import { tried } from './judge.ts';
import { isScalable, type Plan, plan, type Trigger, type Variant } from './plan.ts';
import { type Kept, keptStretches, spread, type Trial } from './scan.ts';

/** How late, how long and how large an answer must be. Times in s of the run; sizes as factors on what is written. */
export interface Bounds {
  /** Starts with which all limits are kept: the latest one is the end of the first stretch. */
  readonly starts: readonly Kept[];
  /** Moments at which its moves may be taken back; null: it is not kept even when they are not. */
  readonly ends: readonly Kept[] | null;
  /** Sizes with the start as written; null: no move of it has a size. */
  readonly sizes: readonly Kept[] | null;
  /** What ends the first stretch of sizes from above, where something does: an event, or the limit itself (null). */
  readonly above: string | null;
}

/** What the plant absorbs with nobody's help, as factors on what is written: the ends of the stretches from 0. */
export interface Unaided {
  readonly sizes: readonly Kept[] | null;
  readonly durations: readonly Kept[];
}

/** How conditions are looked up in scans, and in what decides. */
export interface Triggers {
  readonly quick: Trigger;
  readonly sure: Trigger;
}

type Planner = (v: Variant, depth?: Depth) => Plan;
type Depth = 'first' | 'looks' | 'peaks';
const trialOf = (excess: (v: number, depth: Depth) => number): Trial => ({
  holds: (v) => !(excess(v, 'first') > 0),
  roughly: (v) => excess(v, 'looks'),
  surely: (v) => excess(v, 'peaks'),
});

/** Points of a scan over times, and steps of one over factors. */
const POINTS = 40;
const FACTORS = 20;
/** s to which starts, ends and durations are settled. */
export const TIME_PRECISION = 10;
/** Factor to which sizes are. */
const SIZE_PRECISION = 1e-3;
/** Factor up to which sizes are scanned. */
const LARGEST = 4;

/**
 * Bounds of one answer.
 *
 * @param nothing the run with the upsets alone.
 * @param earliest s from which on starts are tried.
 */
export function bounds(
  g: Ground,
  answer: Answer,
  nothing: Branches,
  triggers: Triggers,
  earliest: number,
  care: Care,
): Bounds {
  const of: Planner = (v, depth = 'peaks') =>
    plan(answer, g.upsets, g.horizon, depth === 'peaks' ? triggers.sure : triggers.quick, v);
  const changes = (p: Plan): readonly Change[] => [...g.changes, ...p.moves];
  const last = Math.min(nothing.breaks, g.horizon);
  // A start after the limit is broken without it comes too late by definition.
  const starts =
    last > earliest
      ? keptStretches(
          spread(earliest, last, POINTS),
          trialOf((start, depth) => nothing.tries(changes(of({ start }, depth)), start, depth).excess),
          TIME_PRECISION,
        )
      : [];
  const written = of({});
  const begun = written.starts.find((t) => t !== null) ?? null;
  if (begun === null) return { starts, ends: null, sizes: null, above: null };
  const { sizes, above } = sizesOf(answer, of, changes, nothing, begun);
  return { starts, ends: endsOf(g, of, changes, written, care), sizes, above };
}

function endsOf(
  g: Ground,
  of: Planner,
  changes: (p: Plan) => readonly Change[],
  written: Plan,
  care: Care,
): Kept[] | null {
  const without = of({ end: Number.POSITIVE_INFINITY });
  const stays = new Branch(g, changes(without), care);
  if (written.moves.length === 0) return null;
  const from = Math.max(...written.moves.map((m) => m.at));
  if (!(from < g.horizon)) return null;
  const tryEnd = trialOf((end, depth) =>
    end < g.horizon
      ? stays.tries(changes(of({ end }, depth)), end, depth).excess
      : stays.breaks === Infinity
        ? -1
        : 1,
  );
  const list = keptStretches(spread(from, g.horizon, POINTS), tryEnd, TIME_PRECISION);
  return list.length === 0 ? null : list;
}

function sizesOf(
  answer: Answer,
  of: Planner,
  changes: (p: Plan) => readonly Change[],
  nothing: Branches,
  begun: number,
): Pick<Bounds, 'sizes' | 'above'> {
  if (!isScalable(answer)) return { sizes: null, above: null };
  const known = new Set(nothing.events.map((e) => e.name));
  const added = (size: number, depth: Depth): { excess: number; event: string | null } => {
    const v = nothing.tries(changes(of({ size }, depth)), begun, depth);
    return { excess: v.excess, event: v.events.find((e) => !known.has(e.name))?.message ?? null };
  };
  // Beyond the plant's limit there is nothing to be looked for: what floods stays flooded.
  let most = Number.POSITIVE_INFINITY;
  const trySize = trialOf((size, depth) => {
    if (depth === 'first' && size > most) return 1;
    const { excess, event } = added(size, depth);
    if (depth === 'first' && event !== null) most = Math.min(most, size);
    return event === null ? excess : Math.max(excess, 1);
  });
  const sizes = keptStretches(spread(0, LARGEST, FACTORS + 1), trySize, SIZE_PRECISION);
  const over = sizes[0]?.toBracket?.[1];
  return { sizes, above: over === undefined ? null : added(over, 'peaks').event };
}

/** The largest upset, and the longest, that breaks no limit when nobody does anything. */
export function unaided(g: Ground, broken: boolean, care: Care): Unaided {
  const trial = (make: (f: number) => readonly Change[]): Trial =>
    trialOf(
      (f, depth) => tried(g, g.before, make(f), depth === 'peaks' ? care.sure : care.quick, depth).excess,
    );
  const scan = (most: number, make: (f: number) => readonly Change[], precision: number): Kept[] =>
    keptStretches(spread(0, most, FACTORS + 1), trial(make), precision);
  const scalable = g.changes.some((c) => scaled(c, 0, g.plant) !== c);
  const long = longest(g);
  return {
    sizes: scalable
      ? scan(broken ? 1 : LARGEST, (f) => g.changes.map((c) => scaled(c, f, g.plant)), SIZE_PRECISION)
      : null,
    durations:
      long > 0
        ? scan(
            broken ? 1 : Math.max(1, (g.horizon - g.first) / long),
            (f) => g.changes.map((c) => ({ ...c, lasts: f * (c.lasts ?? g.horizon - c.at) })),
            TIME_PRECISION / long,
          )
        : [],
  };
}

/** s: the duration of the longest upset, to which factors on durations refer. */
export const longest = (g: Pick<Ground, 'changes' | 'horizon'>): number =>
  Math.max(0, ...g.changes.map((c) => c.lasts ?? g.horizon - c.at));

/** A change of another size: its departure from the input at time zero times a factor. States of things have no size. */
export function scaled(c: Change, f: number, plant: Plant): Change {
  const { how } = c;
  if ('by' in how) return { ...c, how: { ...how, by: how.by * f } };
  const input = plant.system.inputs.findIndex((i) => i.path === c.quantity);
  if (input < 0 || plant.system.inputs[input].unit === '') return c;
  const base = plant.inputs[input];
  const from = (v: number): number => base + f * (v - base);
  if ('to' in how) return { ...c, how: { to: from(how.to) } };
  return { ...c, how: { follow: { times: how.follow.times, values: how.follow.values.map(from) } } };
}

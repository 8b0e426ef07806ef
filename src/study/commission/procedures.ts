import { type Procedure, withProcedure } from '../../scenario/commissioning.ts';
import { Refusal } from '../../scenario/refusal.ts';
import type { Scenario } from '../../scenario/scenario.ts';
import type { Records } from '../records.ts';
import { type RunSettings, run } from '../run.ts';
import { type Followed, type FollowSettings, follow } from './follow.ts';
import { allCome, comesGood, onSpec, outletsWithin } from './good.ts';
import { Keeper, type Kept } from './kept.ts';
import { type GoodTimes, goodTimes, type Waiting, waiting } from './waiting.ts';

/** One way to start, held against the plain one. */
export interface StartResult {
  readonly name: string;
  /** s until all limits are kept for good; null: not within the run, or (without limits) never asked. */
  readonly onSpec: number | null;
  /** s until every outlet is within 1 % (of the change of the plain start) for good. */
  readonly steady: number | null;
  /** s after which every outlet is good, by its limits or within 5 %. */
  readonly waiting: Waiting;
  /** Outlets that it leaves at other values than the plain start: its moves do not end where that ends. */
  readonly endsElsewhere: readonly { readonly path: string; readonly final: number }[];
  readonly settled: boolean;
}

/** Records over which power is added up. */
const RECORDS = 200;
/** Two final values are one within this share. */
const SAME_END = 1e-3;

/** When the outlets of a followed start are good, and a run that was kept at those times. */
export interface Measured {
  readonly good: GoodTimes;
  /** s to which what never comes good is counted. */
  readonly counted: number;
  readonly kept: ReadonlyMap<number, Kept>;
  readonly records: Records;
}

/** Runs a followed start once more, to the moment at which its outlets are good, and keeps what is counted then. */
export function measure(s: Scenario, f: Followed, settings: RunSettings): Measured {
  const good = goodTimes(f.plant, comesGood(f), onSpec(f));
  const horizon = Math.max(1, allCome(good.map((q) => q.until)) ?? f.ran);
  const keeper = new Keeper([...good.map((q) => q.until ?? f.ran), horizon]);
  // A little beyond, so that the last moment lies inside.
  const short = { ...s, horizon: horizon * (1 + 1e-9), recordEvery: horizon / RECORDS };
  const { records } = run(short, { ...settings, watchers: [keeper] });
  return { good, counted: f.ran, kept: keeper.kept, records };
}

/** Figures of a followed start; `plain` where it is held against that. */
export function startResult(name: string, f: Followed, ran: Measured, plain: Followed | null): StartResult {
  const list = comesGood(f);
  const limits = onSpec(f);
  return {
    name,
    onSpec: limits.length === 0 ? null : allCome(limits.map((l) => l.from)),
    steady: outletsWithin(list, 1),
    waiting: waiting(f.plant, ran.good, ran.counted, ran.kept, ran.records),
    endsElsewhere: plain === null ? [] : elsewhere(f, plain),
    settled: f.settled,
  };
}

function elsewhere(f: Followed, plain: Followed): { path: string; final: number }[] {
  if (!('state' in f.rest) || !('state' in plain.rest)) return [];
  const [own, known] = [f.rest.outputs, plain.rest.outputs];
  const at = new Map(plain.quantities.map((q) => [q.path, q.output]));
  return f.quantities.flatMap((q) => {
    if (q.kind !== 'outlet') return [];
    const [a, b] = [own[q.output], known[at.get(q.path) as number]];
    return Math.abs(a - b) > SAME_END * Math.max(Math.abs(a), Math.abs(b))
      ? [{ path: q.path, final: a }]
      : [];
  });
}

/** The plain start and all procedures, fastest first: on-spec, then at rest, then by what is off-spec meanwhile. */
export function rankStarts(list: readonly StartResult[]): StartResult[] {
  const late = (t: number | null): number => (t === null ? Number.MAX_VALUE : Math.round(t / 60));
  const volume = (q: StartResult): number => q.waiting.outlets.reduce((s, o) => s + o.volume, 0);
  return [...list].sort(
    (a, b) => late(a.onSpec) - late(b.onSpec) || late(a.steady) - late(b.steady) || volume(a) - volume(b),
  );
}

/**
 * Follows a procedure on the bands of the plain start.
 *
 * @throws Refusal at the procedure, where the plant cannot be started like that.
 */
export function followProcedure(
  s: Scenario,
  p: Procedure,
  plain: Followed,
  settings: FollowSettings,
): { scenario: Scenario; followed: Followed } {
  const scenario = withProcedure(s, p);
  const changes = new Map(plain.quantities.map((q, k) => [q.path, plain.changes[k]]));
  try {
    return { scenario, followed: follow(scenario, { ...settings, changes, outletsOnly: true }) };
  } catch (e) {
    if (!(e instanceof Refusal)) throw e;
    throw new Refusal(
      e.problems.map((q) => ({
        message: q.message,
        path: [
          'procedures',
          p.name,
          ...(q.path[0] === 'start' ? ['from', ...q.path.slice(1)] : q.path[0] === 'upsets' ? ['moves'] : []),
        ],
      })),
    );
  }
}

import type { Plant } from '../../plant/assemble.ts';
import { statedChanges, withChanges } from '../../scenario/loop-changes.ts';
import { PLAIN_START } from '../../scenario/read-commissioning.ts';
import type { Change, Scenario } from '../../scenario/scenario.ts';
import type { Watcher } from '../../solve/integrate.ts';
import type { RunResult } from '../result.ts';
import { type RunSettings, run } from '../run.ts';
import { type Comparison, compareWith } from './comparison.ts';
import type { Ensemble } from './ensemble.ts';
import { type Followed, follow } from './follow.ts';
import { allCome, type ComesGood, comesGood, judged, type OnSpec, onSpec, outletsWithin } from './good.ts';
import { Keeper } from './kept.ts';
import { movesEnd } from './moves.ts';
import { followProcedure, measure, rankStarts, type StartResult, startResult } from './procedures.ts';
import { withoutNoise } from './quiet.ts';
import { slowest } from './rest.ts';
import { type SamplePlan, samplePlan } from './sampling.ts';
import { goodTimes } from './waiting.ts';
import { describe, type SlowMode } from './where.ts';

/** Everything that `commission` found; reports need nothing else. SI units throughout. */
export interface CommissionResult {
  readonly plant: Plant;
  readonly followed: Followed;
  /** The start-up as far as it is shown, for pictures. */
  readonly run: RunResult;
  readonly quantities: readonly ComesGood[];
  readonly limits: readonly OnSpec[];
  /** s until every outlet is within 1 % of its change for good; null: not at all. */
  readonly steady: number | null;
  /** s until every outlet is within 1 % of its final value for good; null: not at all. */
  readonly nearFinal: number | null;
  /** s until all limits are kept for good by stream made of plant feed; null: not at all, or no limits. */
  readonly onSpec: number | null;
  readonly modes: readonly SlowMode[];
  /** The quantity that comes good last, and in how many s its deviation was seen to fall by e. */
  readonly tail: { readonly path: string; readonly seen: number } | null;
  readonly samples: SamplePlan | null;
  /** The plain start, by its name among them, and the procedures, fastest first. */
  readonly starts: readonly StartResult[];
  readonly plain: StartResult;
  readonly comparison: Comparison | null;
  readonly ensemble: Ensemble | null;
  /** Upsets that belong to the start because they begin with it, and those that were left out, in words. */
  readonly begun: readonly string[];
  readonly leftOut: readonly string[];
  /** Whether more was run than the scenario asked for. */
  readonly extended: boolean;
}

/** The part that needs no workers, and what an ensemble of it would run. */
export interface StartUp extends Omit<CommissionResult, 'ensemble'> {
  /** The scenario of the start-up proper. */
  readonly proper: Scenario;
  /** The output that a fan shows and its times [s]; null where there is no rest that a time could be told of. */
  readonly fan: { readonly shown: string; readonly times: readonly number[] } | null;
}

export const PLAIN = PLAIN_START;
/** Records over the span that is shown. */
const RECORDS = 600;
/** Modes that are looked for, and told. */
const MODES = 4;
/** Times of a fan, and how far it goes beyond the span of the plain start. */
const FAN = 120;
const WIDER = 1.15;
/** Room beyond the last that comes good, as a share. */
const ROOM = 1.35;

/**
 * The start-up of a scenario: only the inputs of time zero and changes that begin with them; when all comes good, why
 * it takes so long, what it costs, which samples prove it, and which procedure is fastest.
 *
 * @throws Incomplete or Refusal as `follow`.
 */
export function commission(scenario: Scenario, settings: RunSettings): StartUp {
  const { commissioning } = scenario;
  const stated = statedChanges(scenario);
  const moves = stated.filter((u) => u.at === 0);
  const s = withChanges(withoutNoise(scenario), moves);
  const compare = commissioning?.compare ?? null;
  const lastSample = Math.max(0, ...(compare?.columns.flatMap((c) => c.times) ?? []));
  const how = {
    integrator: settings.integrator,
    tolerance: settings.tolerance,
    repeatability: commissioning?.samples?.repeatability ?? null,
    modes: MODES,
  };
  const { progress } = settings;
  const watchers = (): Watcher[] =>
    progress ? [{ step: (step) => progress(Math.min(1, step.t1 / s.horizon)) }] : [];
  const followed = follow(s, { ...how, atLeast: Math.max(s.horizon, lastSample), watchers });
  const quantities = comesGood(followed);
  const limits = onSpec(followed);
  const { plant, rest } = followed;

  const good = goodTimes(plant, quantities, limits);
  const lastGood = allCome(quantities.filter((q) => q.change !== null).map((q) => q.ofChange[3]));
  const { samples } = commissioning ?? {};
  const trusted = quantities.filter((q) => q.quantity.kind === 'outlet' || q.quantity.kind === 'tank');
  const seen = Math.max(
    lastGood ?? followed.ran,
    lastSample,
    samples ? samples.gap + Math.max(0, ...trusted.map((q) => q.repeatable ?? 0)) : 0,
    ...limits.map((l) => l.from ?? 0),
    ...good.map((q) => q.until ?? 0),
  );
  const span = Math.max(1, Math.min(followed.ran, Math.max(ROOM * seen, movesEnd(moves))));
  const keeper = new Keeper([
    ...good.map((q) => q.until ?? span),
    ...(compare?.columns.flatMap((c) => c.times) ?? []),
  ]);
  const shown = run(
    { ...s, horizon: span, recordEvery: span / RECORDS },
    { ...settings, watchers: [keeper] },
  );
  const plain = startResult(
    PLAIN,
    followed,
    { good, counted: span, kept: keeper.kept, records: shown.records },
    null,
  );

  const procedures = (commissioning?.procedures ?? []).map((p) => {
    const { scenario: own, followed: f } = followProcedure(s, p, followed, {
      ...how,
      modes: 1,
      repeatability: null,
    });
    return startResult(p.name, f, measure(own, f, settings), followed);
  });
  const rested = 'state' in rest;
  return {
    plant,
    followed,
    run: shown,
    quantities,
    limits,
    steady: outletsWithin(quantities, 1),
    nearFinal: outletsWithin(quantities, 1, 'ofFinal'),
    onSpec: limits.length === 0 ? null : allCome(limits.map((l) => l.from)),
    modes: rested ? rest.modes.map((m) => describe(plant, m, rest.state)) : [],
    tail: tail(quantities),
    samples:
      commissioning?.samples && rested && followed.settled
        ? samplePlan(
            commissioning.samples,
            quantities.filter(
              (q) => ['outlet', 'tank'].includes(q.quantity.kind) && s.solutes.includes(q.quantity.component),
            ),
            shown.records,
            slowest(rest),
            Math.max(0, ...Array.from(followed.approach.turned).filter(Number.isFinite)),
          )
        : null,
    starts: rankStarts([plain, ...procedures]),
    plain,
    comparison: compare ? compareWith(plant, compare, keeper.kept) : null,
    begun: words(moves),
    leftOut: words(stated.filter((u) => u.at > 0)),
    extended: followed.settled && (lastGood ?? 0) > s.horizon,
    proper: s,
    fan: followed.settled ? fanOf(quantities, s.solutes, span) : null,
  };
}

/** The outlet that comes good last, over a span that leaves room for slower plants than the one stated. */
function fanOf(list: readonly ComesGood[], solutes: readonly string[], span: number): StartUp['fan'] {
  const own = judged(list).filter((q) => solutes.includes(q.quantity.component) && q.change !== null);
  if (own.length === 0) return null;
  const last = own.reduce((a, b) => ((b.ofChange[3] ?? 0) > (a.ofChange[3] ?? 0) ? b : a));
  const times = Array.from({ length: FAN + 1 }, (_, k) => (k * WIDER * span) / FAN);
  return { shown: last.quantity.path, times };
}

/** One upset can stand for changes of several inputs. */
const words = (list: readonly Change[]): string[] => [...new Set(list.map((u) => u.words))];

/** What comes good last of what people sample, and how its deviation was seen to fall. */
function tail(list: readonly ComesGood[]): CommissionResult['tail'] {
  const shown = list.filter((q) => q.quantity.kind !== 'stage' && q.tail !== null);
  if (shown.length === 0) return null;
  const last = shown.reduce((a, b) => ((b.ofChange[3] ?? 0) > (a.ofChange[3] ?? 0) ? b : a));
  return { path: last.quantity.path, seen: last.tail as number };
}

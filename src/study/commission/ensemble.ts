import type { Uncertain } from '../../scenario/commissioning.ts';
import type { Scenario } from '../../scenario/scenario.ts';
import { latinHypercube } from './hypercube.ts';
import type { Compute } from './pool.ts';
import { quantile, rankCorrelation } from './ranks.ts';
import type { Sample, SampleSettings } from './sample.ts';

/** Ten, fifty and ninety of a hundred come no later; s, null: not within the run. */
export interface Spread {
  readonly p10: number | null;
  readonly p50: number | null;
  readonly p90: number | null;
}

/** How sure a start-up time is when its inputs are not. */
export interface Ensemble {
  /** Asked for, and computed: fewer where it was interrupted. */
  readonly asked: number;
  readonly runs: number;
  readonly seed: number;
  readonly inputs: readonly Uncertain[];
  /** Time until every outlet is within 1 % for good. */
  readonly steady: Spread;
  /** Time until all limits are kept for good; null without limits. */
  readonly onSpec: Spread | null;
  /** Runs that came to no rest, and runs that never kept the limits for good. */
  readonly unsettled: number;
  readonly offSpec: number;
  /** Runs in which the plant could not even be started, with the first reason. */
  readonly failed: number;
  readonly reason: string | null;
  /** Rank correlation of each input with the time to steady state, the strongest first. */
  readonly influence: readonly { readonly path: string; readonly correlation: number }[];
  readonly fan: Fan;
}

/** One output over time: 10, 50 and 90 of a hundred runs lie below; s and `unit`. */
export interface Fan {
  readonly path: string;
  readonly times: readonly number[];
  readonly p10: readonly number[];
  readonly p50: readonly number[];
  readonly p90: readonly number[];
}

export interface EnsembleSettings extends SampleSettings {
  readonly runs: number;
  readonly seed: number;
  readonly progress?: (share: number) => void;
  readonly stop?: AbortSignal;
}

/** Relative tolerance of a sample: quantiles of times are told to three digits. */
const TOLERANCE = 1e-5;
/** Samples in one piece of work: few, so that progress is seen and the last worker is not waited for. */
const BATCH = 5;

/**
 * Latin hypercube over the uncertain inputs, each evenly over its range, one start-up each. The results depend on
 * scenario, seed and number of runs alone, not on who computes what.
 */
export async function ensemble(
  s: Scenario,
  uncertain: readonly Uncertain[],
  settings: EnsembleSettings,
  compute: Compute,
): Promise<Ensemble> {
  const { runs, seed, progress, integrator, tolerance, shown, times } = settings;
  const cube = latinHypercube(runs, uncertain.length, seed);
  const factors = cube.map((row) => row.map((u, k) => 1 + uncertain[k].share * (2 * u - 1)));
  const { commissioning: _, ...scenario } = s;
  const paths = uncertain.map((q) => q.path);
  const batches = Array.from({ length: Math.ceil(runs / BATCH) }, (__, b) => ({
    scenario,
    paths,
    factors: factors.slice(b * BATCH, (b + 1) * BATCH),
    settings: { integrator, tolerance: Math.max(tolerance, TOLERANCE), shown, times },
  }));
  const results = new Array<Sample | undefined>(runs);
  let count = 0;
  await compute(
    batches,
    (b, list) => {
      list.forEach((q, i) => {
        results[b * BATCH + i] = q;
      });
      count += list.length;
      progress?.(count / runs);
    },
    settings.stop ?? new AbortController().signal,
  );
  return summarize(s, uncertain, settings, factors, results);
}

function summarize(
  s: Scenario,
  uncertain: readonly Uncertain[],
  { runs, seed, shown, times }: EnsembleSettings,
  factors: readonly (readonly number[])[],
  results: readonly (Sample | undefined)[],
): Ensemble {
  const computed = results.flatMap((q, i) => (q ? [{ q, f: factors[i] }] : []));
  const started = computed.filter(({ q }) => q.failed === null);
  // What does not come at all comes after all that does.
  const late = (t: number | null): number => t ?? Number.POSITIVE_INFINITY;
  const steady = started.map(({ q }) => late(q.steady));
  const onSpec = started.map(({ q }) => late(q.onSpec));
  const influence = uncertain
    .map((u, k) => ({
      path: u.path,
      correlation: rankCorrelation(
        started.map(({ f }) => f[k]),
        steady,
      ),
    }))
    .sort((a, b) => Math.abs(b.correlation) - Math.abs(a.correlation));
  return {
    asked: runs,
    runs: computed.length,
    seed,
    inputs: uncertain,
    steady: spread(steady),
    onSpec: s.limits.length === 0 ? null : spread(onSpec),
    unsettled: steady.filter((t) => t === Number.POSITIVE_INFINITY).length,
    offSpec: s.limits.length === 0 ? 0 : onSpec.filter((t) => t === Number.POSITIVE_INFINITY).length,
    failed: computed.length - started.length,
    reason: computed.find(({ q }) => q.failed !== null)?.q.failed ?? null,
    influence,
    fan: fan(
      shown,
      times,
      started.map(({ q }) => q.series).filter((row) => row.length === times.length),
    ),
  };
}

function spread(times: readonly number[]): Spread {
  const sorted = [...times].sort((a, b) => a - b);
  const at = (share: number): number | null => {
    const q = sorted.length === 0 ? Number.NaN : quantile(sorted, share);
    return Number.isFinite(q) ? q : null;
  };
  return { p10: at(0.1), p50: at(0.5), p90: at(0.9) };
}

function fan(path: string, times: readonly number[], rows: readonly (readonly number[])[]): Fan {
  const at = (share: number): number[] =>
    rows.length === 0
      ? []
      : times.map((_, k) =>
          quantile(
            rows.map((r) => r[k]).sort((a, b) => a - b),
            share,
          ),
        );
  return { path, times, p10: at(0.1), p50: at(0.5), p90: at(0.9) };
}

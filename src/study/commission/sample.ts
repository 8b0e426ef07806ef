import { Refusal } from '../../scenario/refusal.ts';
import type { Scenario } from '../../scenario/scenario.ts';
import { uncertainInputs } from '../../scenario/uncertain.ts';
import type { Watcher } from '../../solve/integrate.ts';
import { Incomplete } from '../run.ts';
import { type FollowSettings, follow } from './follow.ts';
import { allCome, comesGood, onSpec, outletsWithin } from './good.ts';

/** A piece of work for one worker: some samples of an ensemble. Plain data, so that it can be sent. */
export interface Batch {
  readonly scenario: Scenario;
  readonly paths: readonly string[];
  /** By sample: what each input is multiplied by. */
  readonly factors: readonly (readonly number[])[];
  readonly settings: SampleSettings;
}

export interface SampleSettings extends Pick<FollowSettings, 'integrator' | 'tolerance'> {
  /** Output that the fan shows, and its times [s]. */
  readonly shown: string;
  readonly times: readonly number[];
}

/** What one sample came to. Times in s; null: not within the run. */
export interface Sample {
  readonly steady: number | null;
  readonly onSpec: number | null;
  /** The shown output at the times asked for. */
  readonly series: readonly number[];
  /** Why the plant could not be started like that; null where it could. */
  readonly failed: string | null;
}

/** The samples of a batch. Each depends on its own factors alone, whoever computes it and in which order. */
export function samples(batch: Batch): Sample[] {
  return batch.factors.map((f) => sample(batch, f));
}

function sample({ scenario, paths, settings }: Batch, factors: readonly number[]): Sample {
  const inputs = uncertainInputs(scenario);
  const s = paths.reduce((q, path, k) => inputs.get(path)?.(q, factors[k]) ?? q, scenario);
  let series: number[] = [];
  try {
    const followed = follow(s, {
      integrator: settings.integrator,
      tolerance: settings.tolerance,
      atLeast: settings.times[settings.times.length - 1],
      repeatability: null,
      modes: 1,
      outletsOnly: true,
      watchers: (plant) => {
        series = [];
        return [shownAt(plant, settings, series)];
      },
    });
    const limits = onSpec(followed);
    return {
      steady: outletsWithin(comesGood(followed), 1),
      onSpec: limits.length === 0 ? null : allCome(limits.map((l) => l.from)),
      series,
      failed: null,
    };
  } catch (e) {
    if (!(e instanceof Refusal || e instanceof Incomplete)) throw e;
    return { steady: null, onSpec: null, series: [], failed: e.message };
  }
}

/** Reads one output at fixed times, from the dense output. */
function shownAt(
  plant: Parameters<NonNullable<FollowSettings['watchers']>>[0],
  settings: SampleSettings,
  to: number[],
): Watcher {
  const { system, parameters } = plant;
  const output = system.outputs.findIndex((o) => o.path === settings.shown);
  const x = new Float64Array(system.places.length);
  const w = new Float64Array(system.inputs.length);
  const y = new Float64Array(system.outputs.length);
  return {
    step(step, inputs) {
      for (
        let t = settings.times[to.length];
        to.length < settings.times.length && t <= step.t1;
        t = settings.times[to.length]
      ) {
        step.at(t, x);
        inputs.value(t, w);
        system.output(x, w, parameters, y);
        to.push(y[output]);
      }
    },
  };
}

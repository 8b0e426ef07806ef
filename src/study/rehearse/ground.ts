import { assemble, type Plant } from '../../plant/assemble.ts';
import type { Change, Scenario } from '../../scenario/scenario.ts';
import { integrate, type Run, type Watcher } from '../../solve/integrate.ts';
import type { F } from '../../solve/system.ts';
import { movesSchedule } from '../commission/moves.ts';
import { outputsAt } from '../records.ts';
import { Incomplete, optionsOf, type RunSettings, startModes, startState } from '../run.ts';
import { realised } from '../variation.ts';

/** A stated upset: one or several changes under the same words. */
export interface Upset {
  /** s */
  readonly begins: number;
  /** s at which its return is complete; null: it lasts to the end. */
  readonly ends: number | null;
  readonly words: string;
}

/** Where a run goes on: state, what guards had set, and the time. */
export interface Standing {
  readonly time: number;
  readonly state: F;
  readonly modes: ReadonlyMap<number, number>;
}

/** What all runs of a rehearsal have in common: one plant, one start, one course up to the first thing that happens. */
export interface Ground {
  readonly scenario: Scenario;
  readonly plant: Plant;
  readonly upsets: readonly Upset[];
  /** Changes of the upsets, and of feeds that vary at random. */
  readonly changes: readonly Change[];
  readonly background: readonly Change[];
  /** s: the first upset begins. */
  readonly first: number;
  /** The plant just before the first upset or the earliest answer. */
  readonly before: Standing;
  /** All outputs just before. */
  readonly calm: F;
  readonly horizon: number;
  /** Largest relative change per hour of a limited quantity or outlet as the upset begins, and which one. */
  readonly moving: { readonly path: string; readonly perHour: number };
  readonly startStated: boolean;
}

/** Upsets in the order of their times; those that share words and time are one. */
export function upsetsOf(changes: readonly Change[]): Upset[] {
  const distinct = changes.filter(
    (c, i) => changes.findIndex((o) => o.words === c.words && o.at === c.at) === i,
  );
  return distinct
    .map((c) => ({ begins: c.at, ends: c.lasts === null ? null : c.at + c.lasts + c.over, words: c.words }))
    .sort((a, b) => a.begins - b.begins);
}

/**
 * Assembles the plant for everything that upsets and answers may change, and runs it to the first of them.
 *
 * @param options `known`: the standing just before, where it has been computed; `from`: s from which it goes on at the latest.
 * @throws Refusal as `assemble`, or where there is no upset or no limit; Incomplete where a steady start is not found.
 */
export function ground(
  scenario: Scenario,
  settings: Pick<RunSettings, 'integrator' | 'tolerance'>,
  options: { readonly known?: Standing; readonly from?: number } = {},
): Ground {
  const { rehearsing } = scenario;
  const moves = (rehearsing?.answers ?? []).flatMap((a) => a.steps.flatMap((s) => s.moves));
  const background = (rehearsing?.variations ?? []).map((v) => realised(v, scenario.horizon));
  const startStated = rehearsing?.startStated ?? true;
  const s: Scenario = { ...scenario, start: startStated ? scenario.start : 'steady' };
  const plant = assemble({ ...s, upsets: [...s.upsets, ...background, ...moves] });
  const upsets = upsetsOf(s.upsets);
  const first = upsets[0]?.begins ?? 0;
  const starts = (rehearsing?.answers ?? []).map((a) => {
    const begin = a.steps[0]?.begins;
    if (begin === undefined || 'when' in begin) return first;
    return 'at' in begin ? begin.at : (upsets[begin.upset - 1]?.begins ?? first) + begin.after;
  });
  const { known } = options;
  const from = Math.max(0, Math.min(first, options.from ?? first, ...starts));
  const initial: Standing = known ?? {
    time: 0,
    state: startState(plant),
    modes: startModes(plant).modes ?? new Map<number, number>(),
  };
  const g = { scenario: s, plant, upsets, changes: s.upsets, background, horizon: s.horizon };
  const before =
    known === undefined && from > 0 ? runOn({ ...g, before: initial }, background, from, settings) : initial;
  return {
    ...g,
    first,
    before,
    calm: calmOutputs(plant, before, background),
    moving: movement(plant, before),
    startStated,
  };
}

function runOn(
  g: Pick<Ground, 'plant' | 'before'>,
  changes: readonly Change[],
  to: number,
  settings: Pick<RunSettings, 'integrator' | 'tolerance'>,
): Standing {
  let modes: ReadonlyMap<number, number> = new Map();
  const run = integrateFrom(g.plant, g.before, changes, to, settings, [
    {
      end(_, __, ___, inputs) {
        modes = new Map(inputs.modes);
      },
    },
  ]);
  if (run.stop.reason !== 'reached-end')
    throw new Incomplete(
      `the run before the upset came to no end at ${run.time / 3600} h; run the scenario to see why`,
    );
  return { time: to, state: run.state, modes };
}

/** Integrates under changes from a standing to a time. */
export function integrateFrom(
  plant: Plant,
  from: Standing,
  changes: readonly Change[],
  to: number,
  settings: Pick<RunSettings, 'integrator' | 'tolerance'>,
  watchers: readonly Watcher[],
): Run {
  return integrate(
    {
      system: plant.system,
      parameters: plant.parameters,
      schedule: movesSchedule(plant, changes, from.time, to),
      initial: from.state,
      modes: from.modes,
    },
    optionsOf(settings),
    watchers,
  );
}

function calmOutputs(plant: Plant, { time, state, modes }: Standing, background: readonly Change[]): F {
  const schedule = movesSchedule(plant, background, time, time + 1);
  const w = new Float64Array(plant.inputs.length);
  schedule.value(0, time, w);
  for (const [i, v] of modes) w[i] = v;
  return outputsAt(plant, state, w);
}

/** How fast the plant still moves: the relative change of each outlet's solutes by its rates over one minute. */
function movement(plant: Plant, { state, modes }: Standing): Ground['moving'] {
  const { system, parameters, scenario: s } = plant;
  const w = Float64Array.from(plant.inputs);
  for (const [i, v] of modes) w[i] = v;
  const rate = new Float64Array(state.length);
  system.rhs(state, w, parameters, rate);
  const minute = 60;
  const [now, next] = [state, state.map((x, i) => x + minute * rate[i])].map((x) => outputsAt(plant, x, w));
  const names = new Set(
    plant.network.outlets.flatMap(({ name }) => s.solutes.map((solute) => `${name}.${solute}`)),
  );
  const limited = s.limits.map((l) => `${l.stream}.${l.quantity}`);
  return system.outputs.reduce(
    (most, o, i) => {
      if (!names.has(o.path) && !limited.includes(o.path)) return most;
      const size = Math.max(Math.abs(now[i]), 1e-3 * o.scale);
      const perHour = (Math.abs(next[i] - now[i]) / size) * (3600 / minute);
      return perHour > most.perHour ? { path: o.path, perHour } : most;
    },
    { path: '', perHour: 0 },
  );
}

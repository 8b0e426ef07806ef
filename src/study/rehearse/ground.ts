import type { SampledLoop } from '../../control/loop.ts';
import type { Plant } from '../../plant/assemble.ts';
import { isLoopChange, statedChanges, withChanges } from '../../scenario/loop-changes.ts';
import type { Change, Scenario } from '../../scenario/scenario.ts';
import { integrate, type Run, type Watcher } from '../../solve/integrate.ts';
import type { F } from '../../solve/system.ts';
import { movesSchedule } from '../commission/moves.ts';
import { type ControlledPlant, controlled, devicesOf, resumedDevices, retold } from '../control/joined.ts';
import { begin, Incomplete, optionsOf, type RunSettings, startModes, usual } from '../run.ts';
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
  /** The loops as they were then; left out where there are none, or the run has not begun. */
  readonly devices?: readonly SampledLoop[];
}

/** What all runs of a rehearsal have in common: one plant, one start, one course up to the first thing that happens. */
export interface Ground {
  readonly scenario: Scenario;
  /** The plant with its loops, which are told nothing yet. */
  readonly joined: ControlledPlant;
  /** Whether the loops have come to rest as the run begins. */
  readonly atRest: boolean;
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
  const changes = statedChanges(scenario);
  const s: Scenario = {
    ...withChanges(scenario, []),
    upsets: scenario.upsets,
    start: startStated ? scenario.start : 'steady',
  };
  const made = controlled(
    { ...s, upsets: [...s.upsets, ...background, ...moves.filter((c) => !isLoopChange(s.loops, c))] },
    { possible: [...changes, ...moves] },
  );
  const { plant, initial: state, atRest } = begin(made);
  const joined = { ...made, plant };
  const upsets = upsetsOf(changes);
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
    state,
    modes: startModes(plant).modes ?? new Map<number, number>(),
  };
  const g = { scenario: s, joined, atRest, plant, upsets, changes, background, horizon: s.horizon };
  const before =
    known === undefined && from > 0 ? runOn({ ...g, before: initial }, background, from, settings) : initial;
  return {
    ...g,
    first,
    before,
    ...calmly(g, before),
    startStated,
  };
}

type Common = Pick<Ground, 'joined' | 'atRest' | 'plant'>;

function runOn(
  g: Common & Pick<Ground, 'before'>,
  changes: readonly Change[],
  to: number,
  settings: Pick<RunSettings, 'integrator' | 'tolerance'>,
): Standing {
  let modes: ReadonlyMap<number, number> = new Map();
  const devices = devicesUnder(g, g.before, changes);
  const keep: Watcher = {
    end(_, __, ___, inputs) {
      modes = new Map(inputs.modes);
    },
  };
  const run = integrateFrom(g, g.before, changes, to, settings, [keep], devices);
  if (run.stop.reason !== 'reached-end')
    throw new Incomplete(
      `the run before the upset came to no end at ${run.time / 3600} h; run the scenario to see why`,
    );
  return { time: to, state: run.state, modes, ...keptDevices(devices, to) };
}

/** Loops as they stand at `t`, to go on from; nothing where there are none. */
export const keptDevices = (
  devices: readonly SampledLoop[],
  t: number,
): { devices?: readonly SampledLoop[] } =>
  devices.length === 0 ? {} : { devices: devices.map((d) => d.kept(t)) };

/** The loops for a run from a standing, told what the changes say of them. */
export function devicesUnder(g: Common, from: Standing, changes: readonly Change[]): SampledLoop[] {
  const told = retold(g.joined, changes);
  return from.devices ? resumedDevices(told, from.devices, from.time) : devicesOf(told, g.atRest);
}

/** Integrates under changes from a standing to a time. */
export function integrateFrom(
  g: Common,
  from: Standing,
  changes: readonly Change[],
  to: number,
  settings: Pick<RunSettings, 'integrator' | 'tolerance'>,
  watchers: readonly Watcher[],
  devices: readonly SampledLoop[] = devicesUnder(g, from, changes),
): Run {
  const { plant } = g;
  return integrate(
    {
      system: plant.system,
      parameters: plant.parameters,
      schedule: movesSchedule(plant, changes, from.time, to),
      initial: from.state,
      modes: from.modes,
      devices,
    },
    optionsOf(settings),
    watchers,
  );
}

/** s over which the inputs just before the first change, and how fast the plant still moves, are looked at. */
const MOMENT = 1e-3;
const MINUTE = 60;

/** All outputs just before the first change, and how fast outlets still move there: by their rates over one minute. */
function calmly(
  g: Common & Pick<Ground, 'background' | 'horizon'>,
  before: Standing,
): Pick<Ground, 'calm' | 'moving'> {
  const { system, parameters, scenario: s, network } = g.plant;
  const w = inputsAt(g, before, g.background);
  const { state } = before;
  const rate = new Float64Array(state.length);
  system.rhs(state, w, parameters, rate);
  const [calm, next] = [state, state.map((x, i) => x + MINUTE * rate[i])].map((x) => {
    const y = new Float64Array(system.outputs.length);
    system.output(x, w, parameters, y);
    return y;
  });
  const names = new Set(
    network.outlets.flatMap(({ name }) => s.solutes.map((solute) => `${name}.${solute}`)),
  );
  const limited = s.limits.map((l) => `${l.stream}.${l.quantity}`);
  const moving = system.outputs.reduce(
    (most, o, i) => {
      if (!names.has(o.path) && !limited.includes(o.path)) return most;
      const size = Math.max(Math.abs(calm[i]), 1e-3 * o.scale);
      const perHour = (Math.abs(next[i] - calm[i]) / size) * (3600 / MINUTE);
      return perHour > most.perHour ? { path: o.path, perHour } : most;
    },
    { path: '', perHour: 0 },
  );
  return { calm, moving };
}

/** Inputs in force at a standing, with what guards have set and loops drive: those of a run of a moment from there. */
export function inputsAt(g: Common, from: Standing, changes: readonly Change[]): F {
  let w: F = new Float64Array(0);
  const look: Watcher = {
    begin(_, __, now) {
      if (w.length === 0) w = Float64Array.from(now);
    },
  };
  integrateFrom(g, from, changes, from.time + MOMENT, usual, [look]);
  return w;
}

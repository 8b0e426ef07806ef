import type { SampledLoop } from '../../control/loop.ts';
import type { Plant } from '../../plant/assemble.ts';
import type { Change } from '../../scenario/scenario.ts';
import type { Event, Watcher } from '../../solve/integrate.ts';
import type { Stop } from '../../solve/outcome.ts';
import type { F } from '../../solve/system.ts';
import { retold } from '../control/joined.ts';
import { type LoopReport, loopReports } from '../control/report.ts';
import { restUnderLoops } from '../control/rest.ts';
import { type LimitReport, LimitWatch } from '../limit-watch.ts';
import type { RunSettings } from '../run.ts';
import { Courses } from './course.ts';
import { devicesUnder, type Ground, integrateFrom, keptDevices, type Standing } from './ground.ts';
import { WorstWatch } from './worst.ts';

export type How = Pick<RunSettings, 'integrator' | 'tolerance'>;

/** One run of a rehearsal, from just before the first upset to the horizon. */
export interface Judged {
  readonly changes: readonly Change[];
  readonly limits: readonly LimitReport[];
  readonly events: readonly Event[];
  readonly courses: Courses;
  readonly stop: Stop;
  readonly state: F;
  /** Inputs at the end. */
  readonly inputs: F;
  /** What the loops did from just before the first upset on. */
  readonly loops: readonly LoopReport[];
  /** Where the loops would drive the inputs after the end; null: to no rest. */
  readonly ends: F | null;
  readonly steps: number;
}

/** Runs under changes (besides the background) and keeps all that is told of it. */
export function judge(
  g: Ground,
  changes: readonly Change[],
  settings: How,
  outputs: readonly number[],
): Judged {
  const limits = g.scenario.limits.map((l) => new LimitWatch(g.plant, l));
  const courses = new Courses(g.plant, outputs, g.calm);
  let inputs: F = new Float64Array(0);
  const keep: Watcher = {
    end: (_, __, w) => {
      inputs = Float64Array.from(w);
    },
  };
  const all = [...g.background, ...changes];
  const devices = devicesUnder(g, g.before, all);
  const run = integrateFrom(g, g.before, all, g.horizon, settings, [...limits, courses, keep], devices);
  const endsAt = restUnderLoops(retold(g.joined, all), devices, {
    inputs,
    state: run.state,
    time: run.time,
  });
  return {
    changes,
    limits: limits.map((l) => l.report()),
    events: run.events,
    courses,
    stop: run.stop,
    state: run.state,
    inputs,
    loops: loopReports(g.joined, devices, run, g.before.time),
    ends: endsAt?.inputs ?? null,
    steps: run.work.steps,
  };
}

/** Thrown by a watcher to end a run of which the answer is known. */
const ENOUGH = { enough: true } as const;

/** Looks at each step, its end included. */
const LOOKS = 3;

/** The largest excess over any limit, relative to the limit, as far as looks at each step show it. */
class Excess implements Watcher {
  largest = Number.NEGATIVE_INFINITY;
  readonly #plant: Plant;
  readonly #limits: readonly { output: number; sign: number; value: number; from: number }[];
  readonly #until: number;
  readonly #x: F;
  readonly #w: F;
  readonly #y: F;

  /** Ends the run as soon as the excess is above `until`. */
  constructor(plant: Plant, until: number) {
    this.#plant = plant;
    this.#until = until;
    this.#limits = plant.scenario.limits.map((l) => ({
      output: plant.system.outputs.findIndex((o) => o.path === `${l.stream}.${l.quantity}`),
      sign: l.side === 'below' ? 1 : -1,
      value: l.value,
      from: l.from,
    }));
    this.#x = new Float64Array(plant.system.places.length);
    this.#w = new Float64Array(plant.system.inputs.length);
    this.#y = new Float64Array(plant.system.outputs.length);
  }

  begin: NonNullable<Watcher['begin']> = (t, x, w) => {
    this.#plant.system.output(x, w, this.#plant.parameters, this.#y);
    this.#judge(t);
  };

  step: NonNullable<Watcher['step']> = (step, inputs) => {
    const span = step.t1 - step.t0;
    for (let i = 1; i <= LOOKS; i++) {
      const t = i === LOOKS ? step.t1 : step.t0 + (span * i) / LOOKS;
      step.at(t, this.#x);
      inputs.value(t, this.#w);
      this.#plant.system.output(this.#x, this.#w, this.#plant.parameters, this.#y);
      this.#judge(t);
    }
  };

  #judge(t: number): void {
    for (const l of this.#limits) {
      if (t < l.from) continue;
      const excess = (l.sign * (this.#y[l.output] - l.value)) / l.value;
      if (excess > this.largest) this.largest = excess;
    }
    if (this.largest > this.#until) throw ENOUGH;
  }
}

/** What a trial run came to. */
export interface Verdict {
  /** Largest excess over any limit, relative to the limit: above zero where one is broken. */
  readonly excess: number;
  /** What happened in it, as far as it was run. */
  readonly events: readonly Event[];
}

/**
 * A trial from a standing to the horizon. `first`: ends with the first break, which is all that is asked; `looks`: the
 * excess as looks at each step show it; `peaks`: with the peaks between looks, as in `judge`.
 */
export function tried(
  g: Ground,
  from: Standing,
  changes: readonly Change[],
  settings: How,
  depth: 'first' | 'looks' | 'peaks',
): Verdict {
  const all = [...g.background, ...changes];
  const excess = new Excess(g.plant, depth === 'first' ? 0 : Number.POSITIVE_INFINITY);
  const limits = depth === 'peaks' ? g.scenario.limits.map((l) => new WorstWatch(g.plant, l)) : [];
  try {
    const run = integrateFrom(g, from, all, g.horizon, settings, [excess, ...limits]);
    const peaks = limits.map((w, i) => {
      const limit = g.scenario.limits[i];
      return ((limit.side === 'below' ? 1 : -1) * (w.worst - limit.value)) / limit.value;
    });
    // What could not be computed to the end has not been kept.
    const whole = run.stop.reason === 'reached-end' ? [] : [Number.POSITIVE_INFINITY];
    return {
      excess: Math.max(excess.largest, ...peaks.filter((p) => !Number.isNaN(p)), ...whole),
      events: run.events,
    };
  } catch (e) {
    if (e === ENOUGH) return { excess: excess.largest, events: [] };
    throw e;
  }
}

/**
 * Keeps standings of a run at chosen times; with loops at the end of the step that covers a time, up to which they have
 * read and before anything that is due then.
 */
export class Standings implements Watcher {
  readonly kept = new Map<number, Standing>();
  readonly #times: number[];
  readonly #devices: readonly SampledLoop[];

  constructor(times: readonly number[], devices: readonly SampledLoop[]) {
    this.#times = [...new Set(times)].sort((a, b) => a - b);
    this.#devices = devices;
  }

  step: NonNullable<Watcher['step']> = (step, inputs) => {
    if (this.#devices.length > 0) {
      // A step that a guard cut short ends before the guard has acted: no place to go on from.
      if (!(this.#times[0] <= step.t1) || !step.pausable) return;
      while (this.#times[0] <= step.t1) this.#times.shift();
      const state = Float64Array.from(step.x1);
      const modes = new Map(inputs.modes);
      this.kept.set(step.t1, { time: step.t1, state, modes, ...keptDevices(this.#devices, step.t1) });
      return;
    }
    while (this.#times.length > 0 && this.#times[0] <= step.t1) {
      const t = this.#times.shift() as number;
      const state = new Float64Array(step.x1.length);
      step.at(Math.max(t, step.t0), state);
      this.kept.set(t, { time: Math.max(t, step.t0), state, modes: new Map(inputs.modes) });
    }
  };
}

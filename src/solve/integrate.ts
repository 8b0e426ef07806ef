import { crossing } from '../math/roots.ts';
import type { Device } from './device.ts';
import { DeviceClock } from './device-clock.ts';
import { Inputs } from './inputs.ts';
import type { Integrator, MakeIntegrator, Settings, Step } from './integrator.ts';
import { Extrapolation } from './odex.ts';
import type { Stop, Work } from './outcome.ts';
import { Rodas4, Rodas5P } from './rodas-tableaus.ts';
import { Rosenbrock } from './rosenbrock.ts';
import type { F, Guard, Schedule, System } from './system.ts';

export const integrators: Readonly<Record<string, MakeIntegrator>> = {
  rodas5p: (s, p, o) => new Rosenbrock(s, p, o, Rodas5P),
  rodas4: (s, p, o) => new Rosenbrock(s, p, o, Rodas4),
  odex: (s, p, o) => new Extrapolation(s, p, o),
};

/** Guards that switch more often than this in one run chatter. */
const MOST_EVENTS = 10_000;
/** A crossing is located to this fraction of the step, and no finer than the last places of the clock. */
const LOCATED = 1e-10;
const CLOCK = 8 * Number.EPSILON;

/** What a run shows to those who watch it. Times in s; arrays are valid during the call only. */
export interface Watcher {
  /** A stretch begins: after a corner of the inputs or a guard, with the right limits. */
  begin?(t: number, x: F, w: F): void;
  /** A step was accepted; `inputs` gives w anywhere in it. */
  step?(step: Step, inputs: Inputs): void;
  /** The run is over, whatever the reason. */
  end?(t: number, x: F, w: F, inputs: Inputs): void;
}

export interface Event {
  readonly time: number;
  readonly guard: number;
  readonly name: string;
  readonly message: string;
}

export interface Run {
  readonly stop: Stop;
  readonly time: number;
  readonly state: F;
  readonly events: readonly Event[];
  readonly work: Work;
  readonly integrator: string;
  /** Moments at which devices could move an input. */
  readonly moves: number;
}

export interface Problem {
  readonly system: System;
  readonly parameters: F;
  readonly schedule: Schedule;
  readonly initial: F;
  /** Inputs that guards had set when the initial state was kept. */
  readonly modes?: ReadonlyMap<number, number>;
  /** Sampled parts. They are used up by a run. */
  readonly devices?: readonly Device[];
}

export interface Options extends Settings {
  readonly integrator: string;
}

/** How a run in turns shares the process with others. */
export interface Turns {
  /** Asked after each step: is it time to let others have a turn? It changes no figure of the run. */
  readonly due: () => boolean;
  /** Asked after each turn; true ends the run with what has been computed. */
  readonly interrupted: () => boolean;
}

/** Integrates over the whole schedule in one go. */
export function integrate(problem: Problem, options: Options, watchers: readonly Watcher[]): Run {
  const work = integration(problem, options, watchers, () => false);
  for (;;) {
    const turn = work.next(false);
    if (turn.done) return turn.value;
  }
}

/** The same, giving way to the event loop between turns, so that an interrupt from outside is heard. */
export async function integrateInTurns(
  problem: Problem,
  options: Options,
  watchers: readonly Watcher[],
  turns: Turns,
): Promise<Run> {
  const work = integration(problem, options, watchers, turns.due);
  for (let stop = false; ; stop = turns.interrupted()) {
    const turn = work.next(stop);
    if (turn.done) return turn.value;
    await new Promise<void>((resolve) => setImmediate(resolve));
  }
}

/**
 * Integrates over the whole schedule: lands on every corner, restarts there with the right limits, locates
 * guards on dense output, and keeps what was computed whatever happens.
 */
function* integration(
  problem: Problem,
  options: Options,
  watchers: readonly Watcher[],
  due: () => boolean,
): Generator<void, Run, boolean> {
  const { system, parameters, schedule } = problem;
  const integrator: Integrator = integrators[options.integrator](system, parameters, options);
  const x = Float64Array.from(problem.initial);
  const w = new Float64Array(system.inputs.length);
  const inputs = new Inputs(schedule, problem.modes);
  const guards = new GuardWatch(system, parameters, inputs);
  const devices = new DeviceClock(problem.devices ?? [], system, parameters, inputs);
  const events: Event[] = [];
  const times = schedule.times;
  let t = times[0];
  let stop: Stop | null = null;

  try {
    devices.begin(t, x);
    for (let segment = 0; segment + 1 < times.length && !stop; segment++) {
      inputs.segment = segment;
      const end = times[segment + 1];
      let paused = false;
      while (t < end && !stop) {
        if (!paused) {
          devices.due(t, x);
          inputs.value(t, w);
          for (let g = guards.jumped(x, w); g >= 0 && !stop; g = guards.jumped(x, w)) {
            stop = happen(g, t);
            inputs.value(t, w);
          }
          if (stop) break;
          integrator.work.restarts += 1;
          for (const o of watchers) o.begin?.(t, x, w);
        }
        let met = -1;
        const to = devices.until(end);
        const outcome = integrator.advance({ from: t, to, inputs }, x, (step) => {
          const hit = guards.crossed(step);
          met = hit.guard;
          const shown = met >= 0 ? shortened(step, hit.time) : step;
          devices.step(shown);
          for (const o of watchers) o.step?.(shown, inputs);
          if (met >= 0) return hit.time;
          return step.pausable && due() ? step.t1 : Number.NaN;
        });
        if (outcome.ended === 'failed') {
          stop = outcome.stop;
          t = outcome.stop.time;
        } else if (outcome.ended === 'asked') {
          t = outcome.time;
          paused = met < 0;
          if (!paused) stop = happen(met, t);
          else if (yield) stop = { reason: 'interrupted', time: t };
        } else {
          t = to;
          paused = false;
        }
        if (!stop && met >= 0) guards.settled(met);
      }
    }
    inputs.value(t, w);
    for (const o of watchers) o.end?.(t, x, w, inputs);
    return {
      stop: stop ?? { reason: 'reached-end', time: t },
      time: t,
      state: x,
      events,
      work: integrator.work,
      integrator: integrator.name,
      moves: devices.moves,
    };
  } finally {
    integrator.close?.();
  }

  function happen(guard: number, time: number): Stop | null {
    const g: Guard = system.guards[guard];
    if (events.length >= MOST_EVENTS) return { reason: 'too-many-events', time, guard: g.name };
    const report = (): void => {
      events.push({ time, guard, name: g.name, message: g.message });
    };
    if (g.action === 'report') report();
    else if (g.action === 'stop') {
      report();
      return { reason: 'guard', time, guard: g.name, message: g.message };
    } else {
      // A guard that finds its mode already set has nothing to say.
      let changed = false;
      for (const [input, value] of g.action.set) changed = inputs.override(input, value, w[input]) || changed;
      if (changed) report();
    }
    return null;
  }
}

function shortened(step: Step, end: number): Step {
  const x1 = new Float64Array(step.x1.length);
  step.at(end, x1);
  return { t0: step.t0, t1: end, x1, pausable: false, at: (t, x) => step.at(t, x) };
}

/** No guard. */
const NONE = { guard: -1, time: Number.NaN } as const;

/** Which side of zero each guard is on, and when it changes. */
class GuardWatch {
  readonly #system: System;
  readonly #p: F;
  readonly #inputs: Inputs;
  readonly #side: Int8Array;
  readonly #g: F;
  readonly #x: F;
  readonly #w: F;

  constructor(system: System, p: F, inputs: Inputs) {
    this.#system = system;
    this.#p = p;
    this.#inputs = inputs;
    // Taken to be on the side from which it acts, a guard that is past its bound at the start acts there and then.
    this.#side = Int8Array.from(system.guards, (g) => (g.fromStart ? -g.direction : 0));
    this.#g = new Float64Array(system.guards.length);
    this.#x = new Float64Array(system.places.length);
    this.#w = new Float64Array(system.inputs.length);
  }

  /** The next guard that acts at this instant, at the start or because an input jumped, or −1. */
  jumped(x: F, w: F): number {
    const g = this.#g;
    if (g.length === 0) return -1;
    this.#system.guard(x, w, this.#p, g);
    let first = -1;
    for (let i = 0; i < g.length; i++) {
      const side = Math.sign(g[i]);
      const before = this.#side[i];
      const acts = side !== 0 && before !== 0 && side !== before && this.#wanted(i, side);
      // The next one to act has its turn when the first has acted, if it is still there.
      if (acts && first >= 0) continue;
      if (acts) first = i;
      if (side !== 0) this.#side[i] = side;
    }
    return first;
  }

  /** The first guard crossed inside an accepted step. Looked for at the end and at three points inside. */
  crossed(step: Step): { readonly guard: number; readonly time: number } {
    const n = this.#g.length;
    if (n === 0) return NONE;
    let found: { readonly guard: number; readonly time: number } = NONE;
    const span = step.t1 - step.t0;
    let from = step.t0;
    for (const part of [0.25, 0.5, 0.75, 1]) {
      const to = part === 1 ? step.t1 : step.t0 + part * span;
      this.#evaluate(step, to);
      const late = Float64Array.from(this.#g);
      const turned: [number, number][] = [];
      for (let i = 0; i < n; i++) {
        const side = Math.sign(late[i]);
        if (side === 0 || side === this.#side[i]) continue;
        const was = this.#side[i];
        if (was === 0 || !this.#wanted(i, side)) {
          turned.push([i, side]);
          continue;
        }
        const at = crossing(
          (t) => this.#value(step, t, i),
          from,
          to,
          Math.max(LOCATED * span, CLOCK * Math.abs(to)),
        );
        if (found.guard < 0 || at < found.time) found = { guard: i, time: at };
      }
      // Beyond a guard that acts, the other guards have not happened yet.
      if (found.guard >= 0) this.#evaluate(step, found.time);
      for (const [i, side] of turned) if (Math.sign(this.#g[i]) === side) this.#side[i] = side;
      if (found.guard >= 0) break;
      from = to;
    }
    return found;
  }

  /** After a guard has acted it stands on its new side, whatever the last digits say. */
  settled(guard: number): void {
    this.#side[guard] = -this.#side[guard] as 1 | -1;
  }

  #wanted(i: number, side: number): boolean {
    const { direction } = this.#system.guards[i];
    return direction === 0 || direction === side;
  }

  #evaluate(step: Step, t: number): void {
    step.at(t, this.#x);
    this.#inputs.value(t, this.#w);
    this.#system.guard(this.#x, this.#w, this.#p, this.#g);
  }

  #value(step: Step, t: number, i: number): number {
    this.#evaluate(step, t);
    return this.#g[i];
  }
}

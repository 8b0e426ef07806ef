import type { LoopHistory, SampledLoop } from '../../control/loop.ts';
import type { LoopSpec } from '../../control/spec.ts';
import type { Limit } from '../../scenario/scenario.ts';
import { integrate, type Watcher } from '../../solve/integrate.ts';
import type { F, Schedule } from '../../solve/system.ts';
import { type ControlledPlant, devicesOf } from '../control/joined.ts';
import { type LimitReport, LimitWatch } from '../limit-watch.ts';
import { optionsOf } from '../run.ts';

/** Relative tolerance of trials: their figures are read to three digits. */
const TOLERANCE = 1e-4;

/** Steps after which a trial is given up: a loop that drives the plant into what it cannot do has shown enough. */
const MOST_STEPS = 30_000;

/** Where trials begin, and what happens to them. */
export interface Ground {
  readonly joined: ControlledPlant;
  /** Number of the loop that is tuned. */
  readonly loop: number;
  readonly initial: F;
  readonly schedule: Schedule;
  readonly limits: readonly Limit[];
  /** s between looks at the curves. */
  readonly every: number;
}

export interface Trace {
  readonly times: number[];
  readonly measured: number[];
  readonly output: number[];
  readonly setPoint: number[];
  /** Flow that the loop moves, m³/s; of an outer loop the set point that it moves. */
  readonly moved: number[];
}

export interface Trial {
  readonly trace: Trace;
  readonly limits: readonly LimitReport[];
  readonly history: LoopHistory;
  readonly steps: number;
  readonly moves: number;
  readonly complete: boolean;
}

/** One run on the nonlinear plant with the tuned loop as `change` makes it; all else as the scenario has it. */
export function trial(g: Ground, change: (spec: LoopSpec) => LoopSpec): Trial {
  const { plant } = g.joined;
  const joined = {
    ...g.joined,
    loops: g.joined.loops.map((l, i) => (i === g.loop ? { ...l, spec: change(l.spec) } : l)),
  };
  const devices = devicesOf(joined, true);
  const tuned = joined.loops[g.loop];
  const watch = new Tracer(plant, tuned.spec, g.every, tuned.flowPlace);
  const limits = g.limits.map((l) => new LimitWatch(plant, l));
  const run = integrate(
    { system: plant.system, parameters: plant.parameters, schedule: g.schedule, initial: g.initial, devices },
    { ...optionsOf({ integrator: 'rodas5p', tolerance: TOLERANCE }), maximumSteps: MOST_STEPS },
    [watch, ...limits],
  );
  const device = devices.find((d) => d.name === tuned.loop.name) as SampledLoop;
  device.finish(run.time);
  return {
    trace: watch.trace,
    limits: limits.map((l) => l.report()),
    history: device.history,
    steps: run.work.steps,
    moves: run.moves,
    complete: run.stop.reason === 'reached-end',
  };
}

/** Follows measurement, output, set point and flow of a loop, from the dense output. */
class Tracer implements Watcher {
  readonly trace: Trace = { times: [], measured: [], output: [], setPoint: [], moved: [] };
  readonly #plant: ControlledPlant['plant'];
  readonly #spec: LoopSpec;
  readonly #every: number;
  readonly #flowPlace: number;
  readonly #x: F;
  readonly #w: F;
  readonly #y: F;
  #next = 0;

  constructor(plant: ControlledPlant['plant'], spec: LoopSpec, every: number, flowPlace: number) {
    this.#plant = plant;
    this.#spec = spec;
    this.#every = every;
    this.#flowPlace = flowPlace;
    this.#x = new Float64Array(plant.system.places.length);
    this.#w = new Float64Array(plant.system.inputs.length);
    this.#y = new Float64Array(plant.system.outputs.length);
  }

  step: NonNullable<Watcher['step']> = (step, inputs) => {
    for (let t = this.#next * this.#every; t <= step.t1; t = this.#next * this.#every) {
      step.at(t, this.#x);
      inputs.value(t, this.#w);
      this.#add(t);
      this.#next += 1;
    }
  };

  #add(t: number): void {
    const { system, parameters } = this.#plant;
    const { inputs, measured } = this.#spec;
    system.output(this.#x, this.#w, parameters, this.#y);
    const wild = inputs.wild < 0 ? 1 : this.#w[inputs.wild];
    this.trace.times.push(t);
    this.trace.measured.push(this.#y[measured]);
    this.trace.output.push(this.#w[inputs.output]);
    this.trace.setPoint.push(this.#w[inputs.setPoint]);
    this.trace.moved.push(this.#flowPlace >= 0 ? this.#x[this.#flowPlace] : this.#w[inputs.output] * wild);
  }
}

/** ∫|PV − SP| dt by trapezoids, kg/m³·s. */
export function absoluteError({ times, measured, setPoint }: Trace): number {
  let sum = 0;
  for (let k = 1; k < times.length; k++)
    sum +=
      ((times[k] - times[k - 1]) / 2) *
      (Math.abs(measured[k] - setPoint[k]) + Math.abs(measured[k - 1] - setPoint[k - 1]));
  return sum;
}

/** m³ that went through the moved flow. */
export function volumeMoved({ times, moved }: Trace): number {
  let sum = 0;
  for (let k = 1; k < times.length; k++) sum += ((times[k] - times[k - 1]) / 2) * (moved[k] + moved[k - 1]);
  return sum;
}

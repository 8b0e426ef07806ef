import type { Plant } from '../plant/assemble.ts';
import type { Watcher } from '../solve/integrate.ts';
import type { F, System } from '../solve/system.ts';

/** Outputs at the record times, and whatever else was asked to be kept. */
export interface Records {
  /** s */
  readonly times: number[];
  /** One row of outputs a time, in the System's order and units. */
  readonly rows: F[];
}

/** Outputs of a System at a state. */
export function outputsAt(plant: Plant, x: F, w: F): F {
  const y = new Float64Array(plant.system.outputs.length);
  plant.system.output(x, w, plant.parameters, y);
  return y;
}

/**
 * Records outputs every `every` seconds, at the horizon, and at the moments asked for. Values come from the dense
 * output, so recording more or less often changes no step. At a corner of the inputs the value just after it counts.
 */
export class Recorder implements Watcher {
  readonly records: Records = { times: [], rows: [] };
  readonly snapshots = new Map<number, F>();
  readonly #system: System;
  readonly #p: F;
  readonly #every: number;
  readonly #moments: number[];
  readonly #x: F;
  readonly #w: F;
  #next = 0;

  constructor(plant: Plant, every: number, moments: readonly number[] = []) {
    this.#system = plant.system;
    this.#p = plant.parameters;
    this.#every = every;
    this.#moments = [...new Set(moments)].sort((a, b) => a - b);
    this.#x = new Float64Array(plant.system.places.length);
    this.#w = new Float64Array(plant.system.inputs.length);
  }

  step: NonNullable<Watcher['step']> = (step, inputs) => {
    for (let t = this.#next * this.#every; t < step.t1; t = this.#next * this.#every) {
      step.at(t, this.#x);
      inputs.value(t, this.#w);
      this.records.times.push(t);
      this.records.rows.push(this.#row(this.#x));
      this.#next += 1;
    }
    while (this.#moments.length > 0 && this.#moments[0] <= step.t1) {
      const t = this.#moments.shift() as number;
      step.at(t, this.#x);
      inputs.value(t, this.#w);
      this.snapshots.set(t, this.#row(this.#x));
    }
  };

  end: NonNullable<Watcher['end']> = (t, x, w) => {
    this.#w.set(w);
    this.records.times.push(t);
    this.records.rows.push(this.#row(x));
  };

  #row(x: F): F {
    const y = new Float64Array(this.#system.outputs.length);
    this.#system.output(x, this.#w, this.#p, y);
    return y;
  }
}

import type { Plant } from '../plant/assemble.ts';
import type { Watcher } from '../solve/integrate.ts';
import type { F, System } from '../solve/system.ts';

/** Takes records as they come. */
export interface Rows {
  /** One record: its time [s] and all outputs; the array is not used again. */
  row(t: number, y: F): void;
  /** No more will come, however the run has ended. */
  end(): void;
}

/** Outputs at the record times; of a very long run only so many of them, evenly spread. */
export interface Records {
  /** s */
  readonly times: number[];
  /** One row of outputs a time, in the System's order and units. */
  readonly rows: F[];
  /** Records that were made, kept or not. */
  readonly made: number;
}

/** Figures that are kept of a run at most: of more records every second one goes, again and again. */
const MOST_FIGURES = 4e6;
const LEAST_ROWS = 2000;
/** Rows that share one array. */
const BLOCK = 128;

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
  readonly #times: number[] = [];
  readonly #rows: F[] = [];
  readonly #most: number;
  readonly #sink: Rows | null;
  /** Every how many records one is kept. */
  #stride = 1;
  #made = 0;
  readonly snapshots = new Map<number, F>();
  readonly #system: System;
  readonly #p: F;
  readonly #every: number;
  readonly #moments: number[];
  readonly #x: F;
  readonly #w: F;
  #next = 0;
  #block: F = new Float64Array(0);
  #used = 0;

  constructor(plant: Plant, every: number, moments: readonly number[] = [], sink: Rows | null = null) {
    this.#system = plant.system;
    this.#p = plant.parameters;
    this.#every = every;
    this.#sink = sink;
    this.#most = Math.max(LEAST_ROWS, MOST_FIGURES / plant.system.outputs.length);
    this.#moments = [...new Set(moments)].sort((a, b) => a - b);
    this.#x = new Float64Array(plant.system.places.length);
    this.#w = new Float64Array(plant.system.inputs.length);
  }

  step: NonNullable<Watcher['step']> = (step, inputs) => {
    for (let t = this.#next * this.#every; t < step.t1; t = this.#next * this.#every) {
      step.at(t, this.#x);
      inputs.value(t, this.#w);
      this.#take(t, this.#row(this.#x), this.#next);
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
    this.#take(t, this.#row(x), 0);
    this.#sink?.end();
  };

  get records(): Records {
    return { times: this.#times, rows: this.#rows, made: this.#made };
  }

  /** `index`: which record it is; 0 is kept whatever the stride. */
  #take(t: number, y: F, index: number): void {
    this.#made += 1;
    this.#sink?.row(t, y);
    if (this.#rows.length >= this.#most) {
      this.#stride *= 2;
      for (const list of [this.#times, this.#rows]) {
        for (let k = 0; 2 * k < list.length; k++) list[k] = list[2 * k];
        list.length = Math.ceil(list.length / 2);
      }
    }
    if (index % this.#stride !== 0) return;
    this.#times.push(t);
    this.#rows.push(y);
  }

  /** An array of its own for each row would cost more than what stands in it. */
  #fresh(): F {
    const n = this.#system.outputs.length;
    if (this.#used + n > this.#block.length) {
      this.#block = new Float64Array(n * BLOCK);
      this.#used = 0;
    }
    this.#used += n;
    return this.#block.subarray(this.#used - n, this.#used);
  }

  #row(x: F): F {
    const y = this.#fresh();
    this.#system.output(x, this.#w, this.#p, y);
    return y;
  }
}

import type { Watcher } from '../../solve/integrate.ts';
import type { F } from '../../solve/system.ts';

/** A run at one moment. */
export interface Kept {
  readonly state: F;
  readonly inputs: F;
}

/** Keeps the run at chosen times, from the dense output; as it was at its end where a time is not reached. */
export class Keeper implements Watcher {
  readonly kept = new Map<number, Kept>();
  readonly #times: number[];

  constructor(times: readonly number[]) {
    this.#times = [...new Set(times)].sort((a, b) => a - b);
  }

  step: NonNullable<Watcher['step']> = (step, inputs) => {
    while (this.#times.length > 0 && this.#times[0] <= step.t1) {
      const t = this.#times.shift() as number;
      const state = new Float64Array(step.x1.length);
      step.at(Math.max(t, step.t0), state);
      const w: F = new Float64Array(this.#inputs);
      inputs.value(Math.max(t, step.t0), w);
      this.kept.set(t, { state, inputs: w });
    }
  };

  #inputs = 0;

  begin: NonNullable<Watcher['begin']> = (_, __, w) => {
    this.#inputs = w.length;
  };

  end: NonNullable<Watcher['end']> = (_, x, w) => {
    for (const t of this.#times)
      this.kept.set(t, { state: Float64Array.from(x), inputs: Float64Array.from(w) });
    this.#times.length = 0;
  };
}

import type { Plant } from '../../plant/assemble.ts';
import type { Watcher } from '../../solve/integrate.ts';
import type { F } from '../../solve/system.ts';
import { LOOKS, StepCourse } from '../commission/course.ts';

/**
 * Some outputs over a whole run: in each step the polynomial through six looks at it, which follows a dense output of
 * fourth or fifth order to its own accuracy. Values at any time, means and extremes come from it.
 */
export class Courses implements Watcher {
  readonly outputs: readonly number[];
  readonly #plant: Plant;
  readonly #before: F | null;
  readonly #ends: number[] = [];
  #begin = Number.NaN;
  /** By step: looks of the first output, of the second … */
  readonly #looks: Float64Array[] = [];
  readonly #x: F;
  readonly #w: F;
  readonly #y: F;

  /** `before`: all outputs as they were until the run begins, which may begin with a jump. */
  constructor(plant: Plant, outputs: readonly number[], before: F | null = null) {
    this.#plant = plant;
    this.#before = before;
    this.outputs = outputs;
    this.#x = new Float64Array(plant.system.places.length);
    this.#w = new Float64Array(plant.system.inputs.length);
    this.#y = new Float64Array(plant.system.outputs.length);
  }

  step: NonNullable<Watcher['step']> = (step, inputs) => {
    if (Number.isNaN(this.#begin)) this.#begin = step.t0;
    const looks = new Float64Array(LOOKS * this.outputs.length);
    const span = step.t1 - step.t0;
    for (let i = 0; i < LOOKS; i++) {
      const t = i === LOOKS - 1 ? step.t1 : step.t0 + (span * i) / (LOOKS - 1);
      step.at(t, this.#x);
      inputs.value(t, this.#w);
      this.#plant.system.output(this.#x, this.#w, this.#plant.parameters, this.#y);
      this.outputs.forEach((o, k) => {
        looks[k * LOOKS + i] = this.#y[o];
      });
    }
    this.#ends.push(step.t1);
    this.#looks.push(looks);
  };

  get from(): number {
    return this.#begin;
  }

  get to(): number {
    return this.#ends[this.#ends.length - 1];
  }

  /** Values [unit] of an output at a time [s]; as before the run, and at its end, beyond them. At a jump the value before it. */
  value(output: number, t: number): number {
    const k = this.#index(output);
    if (t < this.#begin && this.#before) return this.#before[output];
    const i = this.#stepAt(t);
    const start = i === 0 ? this.#begin : this.#ends[i - 1];
    const share = Math.min(1, Math.max(0, (t - start) / (this.#ends[i] - start)));
    return new StepCourse(this.#looks[i], k * LOOKS).value(share);
  }

  /** Mean of an output between two times, by the quadrature of each step's polynomial. */
  mean(output: number, from: number, to: number): number {
    if (!(to > from)) return this.value(output, to);
    let sum = 0;
    const cuts = [from, ...[this.#begin, ...this.#ends].filter((t) => t > from && t < to), to];
    // Gauss-Legendre with three points is exact for the polynomial of fifth degree.
    const node = Math.sqrt(0.6) / 2;
    for (let i = 1; i < cuts.length; i++) {
      const [a, h] = [cuts[i - 1], cuts[i] - cuts[i - 1]];
      const at = (s: number): number => this.value(output, a + s * h);
      sum += (h * (5 * at(0.5 - node) + 8 * at(0.5) + 5 * at(0.5 + node))) / 18;
    }
    return sum / (to - from);
  }

  /** Times [s] at which it was looked at. */
  looks(): number[] {
    return this.#ends.flatMap((end, i) => {
      const start = i === 0 ? this.#begin : this.#ends[i - 1];
      return Array.from({ length: LOOKS - 1 }, (_, k) => start + ((end - start) * k) / (LOOKS - 1));
    });
  }

  /** Least and greatest of an output over the run, turning points included. */
  extremes(output: number): { least: number; most: number } {
    const k = this.#index(output);
    let [least, most] = [Infinity, -Infinity];
    for (const looks of this.#looks)
      for (const { v } of new StepCourse(looks, k * LOOKS).points()) {
        if (v < least) least = v;
        if (v > most) most = v;
      }
    return { least, most };
  }

  #index(output: number): number {
    const k = this.outputs.indexOf(output);
    if (k < 0) throw new RangeError(`output ${output} was not followed`);
    return k;
  }

  /** The step that holds a time; the one that ends at it. */
  #stepAt(t: number): number {
    let lo = 0;
    let hi = this.#ends.length - 1;
    while (lo < hi) {
      const mid = (lo + hi) >> 1;
      if (this.#ends[mid] >= t) hi = mid;
      else lo = mid + 1;
    }
    return lo;
  }
}

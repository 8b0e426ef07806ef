import type { Plant } from '../../plant/assemble.ts';
import type { Limit } from '../../scenario/scenario.ts';
import type { Watcher } from '../../solve/integrate.ts';
import type { F } from '../../solve/system.ts';
import { LOOKS, StepCourse } from '../commission/course.ts';

/**
 * Worst value of one limited quantity and the time out of its limit, with no more looks at a step than the polynomial
 * through them needs: a map has hundreds of runs.
 */
export class WorstWatch implements Watcher {
  /** NaN before the limit counts. */
  worst = Number.NaN;
  outside = 0;
  readonly #plant: Plant;
  readonly #limit: Limit;
  readonly #output: number;
  readonly #sign: 1 | -1;
  readonly #looks = new Float64Array(LOOKS);
  readonly #x: F;
  readonly #w: F;
  readonly #y: F;

  constructor(plant: Plant, limit: Limit) {
    this.#plant = plant;
    this.#limit = limit;
    this.#output = plant.system.outputs.findIndex((o) => o.path === `${limit.stream}.${limit.quantity}`);
    this.#sign = limit.side === 'below' ? 1 : -1;
    this.#x = new Float64Array(plant.system.places.length);
    this.#w = new Float64Array(plant.system.inputs.length);
    this.#y = new Float64Array(plant.system.outputs.length);
  }

  step: NonNullable<Watcher['step']> = (step, inputs) => {
    if (step.t1 <= this.#limit.from) return;
    const from = Math.max(step.t0, this.#limit.from);
    const span = step.t1 - from;
    for (let i = 0; i < LOOKS; i++) {
      const t = i === LOOKS - 1 ? step.t1 : from + (span * i) / (LOOKS - 1);
      step.at(t, this.#x);
      inputs.value(t, this.#w);
      this.#plant.system.output(this.#x, this.#w, this.#plant.parameters, this.#y);
      this.#looks[i] = this.#y[this.#output];
    }
    const course = new StepCourse(this.#looks);
    const points = course.points();
    const { value } = this.#limit;
    points.forEach(({ s, v }, i) => {
      if (!(this.#sign * v <= this.#sign * this.worst)) this.worst = v;
      if (i === 0) return;
      const before = points[i - 1];
      const [was, is] = [before.v, v].map((q) => this.#sign * (q - value) > 0);
      if (was && is) this.outside += span * (s - before.s);
      else if (was !== is) {
        const at = course.passes(value, before.s, s);
        this.outside += span * (is ? s - at : at - before.s);
      }
    });
  };
}

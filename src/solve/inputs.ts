import type { F, Schedule } from './system.ts';

/** From a moment on an input follows value + slope·(t − from). */
interface Course {
  readonly from: number;
  readonly value: number;
  readonly slope: number;
}

/** The inputs on one segment of a schedule; over them what devices drive, and over all what guards have set. */
export class Inputs {
  readonly #schedule: Schedule;
  readonly #overrides: Map<number, number>;
  /** Courses by input, in the order of time: those of the stretch at hand, for who looks back into it. */
  readonly #driven = new Map<number, Course[]>();
  segment = 0;

  /** `modes` are inputs that guards had set when the state was kept from which a run goes on. */
  constructor(schedule: Schedule, modes: ReadonlyMap<number, number> = new Map()) {
    this.#schedule = schedule;
    this.#overrides = new Map(modes);
  }

  /** What guards have set so far. */
  get modes(): ReadonlyMap<number, number> {
    return this.#overrides;
  }

  /** A guard takes an input over, from now on. Returns whether that changes the value `now` in force. */
  override(input: number, value: number, now: number): boolean {
    this.#overrides.set(input, value);
    return value !== now;
  }

  /** A device sets the course of an input from `from` on. */
  drive(input: number, from: number, value: number, slope: number): void {
    const courses = this.#driven.get(input) ?? [];
    while (courses.length > 0 && courses[courses.length - 1].from >= from) courses.pop();
    courses.push({ from, value, slope });
    this.#driven.set(input, courses);
  }

  /** Nobody looks back beyond `t` any more. */
  forget(t: number): void {
    for (const courses of this.#driven.values())
      while (courses.length > 1 && courses[1].from <= t) courses.shift();
  }

  value(t: number, w: F): void {
    this.#schedule.value(this.segment, t, w);
    if (this.#driven.size > 0) this.#drivenAt(t, w);
    if (this.#overrides.size > 0) for (const [i, v] of this.#overrides) w[i] = v;
  }

  #drivenAt(t: number, w: F): void {
    for (const [i, courses] of this.#driven) {
      let k = courses.length - 1;
      while (k > 0 && courses[k].from > t) k -= 1;
      const { from, value, slope } = courses[k];
      w[i] = slope === 0 ? value : value + slope * (t - from);
    }
  }

  slope(dw: F): void {
    this.#schedule.slope(this.segment, dw);
    for (const [i, courses] of this.#driven) dw[i] = courses[courses.length - 1].slope;
    for (const i of this.#overrides.keys()) dw[i] = 0;
  }
}

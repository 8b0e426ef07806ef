import type { F, Schedule } from './system.ts';

/** The inputs on one segment of a schedule, with what guards have set laid over them. */
export class Inputs {
  readonly #schedule: Schedule;
  readonly #overrides = new Map<number, number>();
  segment = 0;

  constructor(schedule: Schedule) {
    this.#schedule = schedule;
  }

  /** A guard takes an input over, from now on. Returns whether that changes anything. */
  override(input: number, value: number): boolean {
    if (this.#overrides.get(input) === value) return false;
    this.#overrides.set(input, value);
    return true;
  }

  value(t: number, w: F): void {
    this.#schedule.value(this.segment, t, w);
    for (const [i, v] of this.#overrides) w[i] = v;
  }

  slope(dw: F): void {
    this.#schedule.slope(this.segment, dw);
    for (const i of this.#overrides.keys()) dw[i] = 0;
  }
}

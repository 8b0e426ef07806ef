import type { F, Schedule } from './system.ts';

/** The inputs on one segment of a schedule, with what guards have set laid over them. */
export class Inputs {
  readonly #schedule: Schedule;
  readonly #overrides: Map<number, number>;
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

  value(t: number, w: F): void {
    this.#schedule.value(this.segment, t, w);
    for (const [i, v] of this.#overrides) w[i] = v;
  }

  slope(dw: F): void {
    this.#schedule.slope(this.segment, dw);
    for (const i of this.#overrides.keys()) dw[i] = 0;
  }
}

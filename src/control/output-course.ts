import type { MoveSpec } from './spec.ts';

/** Outputs nearer to a limit than this share of their span count as at it. */
const AT_LIMIT = 1e-9;

/** The output of a loop over time: inside its limits, no faster than its slew, straight lines in between. */
export class OutputCourse {
  readonly #m: MoveSpec;
  #from = 0;
  #value = 0;
  #slope = 0;
  /** Where a ramp of the slew leads, and when it is there. */
  #goal: number | null = null;
  rampEnd = Infinity;
  low: number;
  high: number;

  constructor(move: MoveSpec) {
    this.#m = move;
    this.low = move.low;
    this.high = move.high;
  }

  /** The same course, going on by itself. */
  copy(): OutputCourse {
    const own = new OutputCourse(this.#m);
    own.#from = this.#from;
    own.#value = this.#value;
    own.#slope = this.#slope;
    own.#goal = this.#goal;
    own.rampEnd = this.rampEnd;
    own.low = this.low;
    own.high = this.high;
    return own;
  }

  set(t: number, value: number): void {
    this.#from = t;
    this.#value = value;
    this.#slope = 0;
    this.#goal = null;
    this.rampEnd = Infinity;
  }

  /** A straight course that the controller itself follows. */
  course(t: number, value: number, slope: number): void {
    this.set(t, value);
    this.#slope = slope;
  }

  at(t: number): number {
    if (this.#goal !== null && t >= this.rampEnd) return this.#goal;
    return this.#value + this.#slope * (t - this.#from);
  }

  slopeAt(t: number): number {
    return this.#goal !== null && t >= this.rampEnd ? 0 : this.#slope;
  }

  hold(t: number): void {
    this.set(t, this.at(t));
  }

  /** A ramp that is over is a value that stays. */
  settle(t: number): void {
    if (this.#goal !== null && t >= this.rampEnd) this.set(t, this.#goal);
  }

  clamp(value: number): number {
    return Math.min(this.high, Math.max(this.low, value));
  }

  /** What of a demand is reached `h` s later. */
  reach(t: number, demand: number, h: number): number {
    const now = this.at(t);
    const goal = this.clamp(demand);
    const { up, down } = this.#m;
    const most = Number.isFinite(up) ? now + up * h : Infinity;
    const least = Number.isFinite(down) ? now - down * h : -Infinity;
    return Math.min(most, Math.max(least, goal));
  }

  /** Goes to a demand, at once or by a ramp of the slew. */
  toward(t: number, demand: number): void {
    const now = this.at(t);
    const goal = this.clamp(demand);
    const rate = goal >= now ? this.#m.up : -this.#m.down;
    if (!Number.isFinite(rate) || goal === now) {
      this.set(t, goal);
      return;
    }
    this.course(t, now, rate);
    this.#goal = goal;
    this.rampEnd = t + (goal - now) / rate;
  }

  bound(t: number): boolean {
    const slack = AT_LIMIT * (this.high - this.low);
    const now = this.at(t);
    return now <= this.low + slack || now >= this.high - slack;
  }

  slewing(t: number): boolean {
    return this.#goal !== null && t < this.rampEnd;
  }
}

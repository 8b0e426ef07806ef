import type { F } from '../solve/system.ts';
import { Sampler } from './analyser.ts';
import type { FeedforwardSpec } from './spec.ts';

/**
 * Feedforward from a measured disturbance d: added, K·(d_L − d_0) with d_L the lead-lag of d, or multiplied, d_L/d_0. d_0
 * is what is known of d as the loop goes automatic, so that it goes without a bump. The lead-lag
 * (1 + T_lead·s)/(1 + T_lag·s) runs on each result by backward differences.
 */
export class Feedforward {
  readonly sampler: Sampler;
  readonly #spec: FeedforwardSpec;
  #known = 0;
  #shaped = 0;
  #reference = 0;
  #since = 0;

  constructor(
    spec: FeedforwardSpec,
    sampler = new Sampler(spec.analyser, spec.measured, spec.weighedBy, spec.seed),
  ) {
    this.#spec = spec;
    this.sampler = sampler;
  }

  /** The same, going on by itself. */
  copy(): Feedforward {
    const own = new Feedforward(this.#spec, this.sampler.copy());
    own.#known = this.#known;
    own.#shaped = this.#shaped;
    own.#reference = this.#reference;
    own.#since = this.#since;
    return own;
  }

  begin(t: number, y: F): void {
    this.#known = y[this.#spec.measured];
    this.#shaped = this.#known;
    this.#reference = this.#known;
    this.#since = t;
  }

  /** What stands now is the ground from which deviations count. */
  refer(): void {
    this.#reference = this.#shaped;
  }

  /** A result has come; a failed one holds the last. */
  take(t: number): void {
    const { value } = this.sampler.result();
    if (value === null) return;
    const h = t - this.#since;
    const { lead, lag } = this.#spec;
    if (lead === 0 && lag === 0) this.#shaped = value;
    else if (h > 0) this.#shaped = (lag * this.#shaped + (lead + h) * value - lead * this.#known) / (lag + h);
    this.#known = value;
    this.#since = t;
  }

  get added(): number {
    return this.#spec.form === 'add' ? this.#spec.gain * (this.#shaped - this.#reference) : 0;
  }

  get factor(): number {
    if (this.#spec.form === 'add' || !(this.#reference > 0)) return 1;
    return Math.max(0, this.#shaped / this.#reference);
  }
}

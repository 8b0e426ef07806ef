import type { F } from '../solve/system.ts';
import { type Chance, chances } from './noise.ts';

/** An analyser as a loop sees it; times in s, the measurement in SI. */
export interface AnalyserSpec {
  readonly every: number;
  readonly first: number;
  readonly delay: number;
  readonly takes: 'grab' | 'composite';
  readonly noise: { readonly share: number } | { readonly absolute: number };
  readonly bias: number;
  readonly dropout: number;
  readonly onBad: 'hold' | 'manual';
}

export interface Result {
  /** s at which it is known. */
  readonly at: number;
  /** Null: it failed. */
  readonly value: number | null;
}

/** Points of Gauss and Legendre on (0, 1), exact to the fifth power: a composite follows the dense output with them. */
const GAUSS = [
  { at: 0.5 - Math.sqrt(15) / 10, weight: 5 / 18 },
  { at: 0.5, weight: 8 / 18 },
  { at: 0.5 + Math.sqrt(15) / 10, weight: 5 / 18 },
] as const;

/**
 * Samples at first + k·every; each gives its result `delay` later. A composite is the mean since the sample before (the
 * start, for the first one), weighted with the flow of its stream where that is known.
 */
export class Sampler {
  readonly #spec: AnalyserSpec;
  readonly #output: number;
  readonly #flow: number;
  readonly #seed: number;
  readonly #chance: () => Chance;
  readonly #pending: Result[] = [];
  #taken = 0;
  #mass = 0;
  #volume = 0;

  /** `output` is what it measures, `flow` the flow that a composite is weighted with (−1: by time alone). */
  constructor(spec: AnalyserSpec, output: number, flow: number, seed: number) {
    this.#spec = spec;
    this.#output = output;
    this.#flow = flow;
    this.#seed = seed;
    this.#chance = chances(seed);
  }

  /** The same, with what is under way, going on by itself: its next samples meet the same chance. */
  copy(): Sampler {
    const own = new Sampler(this.#spec, this.#output, this.#flow, this.#seed);
    for (let k = 0; k < this.#taken; k++) own.#chance();
    own.#pending.push(...this.#pending);
    own.#taken = this.#taken;
    own.#mass = this.#mass;
    own.#volume = this.#volume;
    return own;
  }

  nextSample(): number {
    return this.#spec.first + this.#taken * this.#spec.every;
  }

  /** s of the next result, of a sample that has been taken or of the next one. */
  nextResult(): number {
    return this.#pending.length > 0 ? this.#pending[0].at : this.nextSample() + this.#spec.delay;
  }

  /** Whether a result has come by `t`. */
  ready(t: number): boolean {
    return this.#pending.length > 0 && this.#pending[0].at <= t;
  }

  get output(): number {
    return this.#output;
  }

  pass(from: number, to: number, at: (t: number) => F): void {
    if (this.#spec.takes !== 'composite') return;
    for (const g of GAUSS) {
      const y = at(from + g.at * (to - from));
      const weight = g.weight * (to - from) * (this.#flow < 0 ? 1 : y[this.#flow]);
      this.#mass += weight * y[this.#output];
      this.#volume += weight;
    }
  }

  sample(y: F): void {
    const s = this.#spec;
    const mean = this.#volume > 0 ? this.#mass / this.#volume : y[this.#output];
    const outlet = s.takes === 'composite' ? mean : y[this.#output];
    this.#mass = 0;
    this.#volume = 0;
    const { normal, uniform } = this.#chance();
    const sigma = 'share' in s.noise ? s.noise.share * Math.abs(outlet) : s.noise.absolute;
    const value = uniform < s.dropout ? null : outlet + s.bias + sigma * normal;
    this.#pending.push({ at: this.nextSample() + s.delay, value });
    this.#taken += 1;
  }

  result(): Result {
    return this.#pending.shift() as Result;
  }
}

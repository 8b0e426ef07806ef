import { randomNumbers } from '../math/random.ts';
import type { Variation } from '../scenario/rehearsing.ts';
import type { Change } from '../scenario/scenario.ts';

/**
 * Standard normal numbers from a seed, two from each pair of even ones: G. E. P. Box and M. E. Muller, Ann. Math. Stat.
 * 29, 610 (1958).
 */
export function normalNumbers(seed: number): () => number {
  const even = randomNumbers(seed);
  let spare: number | null = null;
  return () => {
    if (spare !== null) {
      const z = spare;
      spare = null;
      return z;
    }
    const length = Math.sqrt(-2 * Math.log(even()));
    const angle = 2 * Math.PI * even();
    spare = length * Math.sin(angle);
    return length * Math.cos(angle);
  };
}

/**
 * A feed that varies at random, first-order autoregressive about its base: z(t + h) = φ·z(t) + √(1 − φ²)·ε with
 * φ = e^(−h/T), begun in its stationary distribution, so that each z has the stated standard deviation and two of them
 * t apart have the correlation e^(−t/T). Straight lines between; never below zero.
 *
 * Reference: G. E. P. Box and G. M. Jenkins, Time Series Analysis: Forecasting and Control (1970), ch. 3 (from memory).
 */
export function realised(v: Variation, horizon: number): Change {
  const normal = normalNumbers(v.seed);
  const keeps = Math.exp(-v.every / v.correlation);
  const adds = Math.sqrt(1 - keeps * keeps);
  const times: number[] = [];
  const values: number[] = [];
  let z = normal();
  const last = Math.ceil(horizon / v.every);
  for (let n = 0; n <= last; n++) {
    times.push(n * v.every);
    values.push(Math.max(0, v.base + v.deviation * z));
    z = keeps * z + adds * normal();
  }
  return {
    at: 0,
    quantity: v.quantity,
    how: { follow: { times, values } },
    over: 0,
    lasts: null,
    words: v.words,
  };
}

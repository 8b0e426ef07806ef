import { randomNumbers } from '../math/random.ts';

/** What chance adds to one sample. */
export interface Chance {
  /** A number of the standard normal distribution. */
  readonly normal: number;
  /** Uniform on (0, 1): the result fails where it is below the dropout. */
  readonly uniform: number;
}

/**
 * Chance by sample number: the k-th call gives what the k-th sample meets, whatever was done with those before it, so
 * that all candidates for one loop meet the same noise. Normal numbers by G. E. P. Box and M. E. Muller, Ann. Math.
 * Stat. 29, 610 (1958).
 */
export function chances(seed: number): () => Chance {
  const random = randomNumbers(seed);
  return () => {
    const radius = Math.sqrt(-2 * Math.log(random()));
    const normal = radius * Math.cos(2 * Math.PI * random());
    return { normal, uniform: random() };
  };
}

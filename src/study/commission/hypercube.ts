import { randomNumbers } from '../../math/random.ts';

/**
 * Latin hypercube on (0, 1): `runs` samples of `inputs` numbers, each input once in each of `runs` equal strata, at a
 * random place in it. Rows are samples.
 *
 * Reference: M. D. McKay, R. J. Beckman and W. J. Conover, Technometrics 21, 239 (1979).
 */
export function latinHypercube(runs: number, inputs: number, seed: number): number[][] {
  const random = randomNumbers(seed);
  const columns = Array.from({ length: inputs }, () => {
    const strata = Array.from({ length: runs }, (_, i) => i);
    // R. Durstenfeld's shuffle, Commun. ACM 7, 420 (1964).
    for (let i = runs - 1; i > 0; i--) {
      const j = Math.floor(random() * (i + 1));
      [strata[i], strata[j]] = [strata[j], strata[i]];
    }
    return strata.map((k) => (k + random()) / runs);
  });
  return Array.from({ length: runs }, (_, i) => columns.map((c) => c[i]));
}

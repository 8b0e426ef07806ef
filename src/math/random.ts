/** Modulus 2³¹ − 1 and multiplier: S. K. Park, K. W. Miller and P. K. Stockmeyer, Commun. ACM 36(7), 108 (1993). */
const MODULUS = 2147483647;
const MULTIPLIER = 48271;

/**
 * Numbers in (0, 1) from a seed, the same on every machine: D. H. Lehmer's multiplicative generator (1951). Any whole
 * number is a seed; equal seeds give equal numbers.
 */
export function randomNumbers(seed: number): () => number {
  // Seeds that are near to each other must not begin near to each other: the first numbers are thrown away.
  let state = 1 + (Math.abs(Math.trunc(seed)) % (MODULUS - 2));
  const next = (): number => {
    state = (state * MULTIPLIER) % MODULUS;
    return state / MODULUS;
  };
  for (let k = 0; k < 20; k++) next();
  return next;
}

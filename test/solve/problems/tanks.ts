import type { Equations } from './dense.ts';

/** Equal stirred tanks in series behind a feed whose concentration is the input: xᵢ' = (xᵢ₋₁ − xᵢ)/τ. */
export function tanks(count: number, tau: number): Equations {
  return {
    name: 'tanks',
    size: count,
    inputs: 1,
    rhs: (x, [feed]) => Array.from(x, (v, i) => ((i === 0 ? feed : x[i - 1]) - v) / tau),
    jacobian: (x) =>
      Array.from(x, (_, i) => Array.from(x, (__, j) => (j === i ? -1 : j === i - 1 ? 1 : 0) / tau)),
    byInput: (x) => Array.from(x, (_, i) => [i === 0 ? 1 / tau : 0]),
  };
}

/**
 * Response of tank n to a unit step at t = 0: 1 − e^(−t/τ)·Σᵢ₍ᵢ₌₀ … ₙ₋₁₎ (t/τ)ⁱ/i!.
 *
 * O. Levenspiel, Chemical Reaction Engineering, 3rd ed. (1999), ch. 14; R. B. MacMullin and M. Weber, Trans. AIChE
 * 31, 409 (1935).
 */
export function stepResponse(n: number, tau: number, t: number): number {
  if (t <= 0) return 0;
  let term = 1;
  let sum = 1;
  for (let i = 1; i < n; i++) {
    term *= t / tau / i;
    sum += term;
  }
  return 1 - Math.exp(-t / tau) * sum;
}

import type { Scenario } from '../../../src/scenario/scenario.ts';
import { fromText } from '../../support/plants.ts';

/** s that the aqueous stays in one tank. */
export const STAY = 600;

/**
 * A plant of `count` equal well-mixed tanks in series for a solute that does not transfer: cells with constant hold-ups,
 * 10 m³ of aqueous each, 60 m³/h. Feed 5 g/L.
 */
export const tanksInSeries = (count: number, rest: string): Scenario =>
  fromText(`title: Tanks in series
solutes: [salt]
feeds:
  brine: {phase: aqueous, flow: 60 m^3/h, salt: 5 g/L}
  diluent: {phase: organic, flow: 60 m^3/h}
trains:
  cells:
    stages: ${count}
    aqueous: brine -> outlet
    organic: diluent -> spent diluent
    mixer: {volume: 20 m^3, organic_share: 50 %, ka: 0.01 1/s}
    settler: none
${rest}`);

/** Step response of n equal well-mixed tanks: 1 − e^(−x)·Σ x^k/k!, x = t/τ (Levenspiel, Chemical Reaction Engineering, 3rd ed., eq. 14.5). */
export function filled(n: number, t: number): number {
  if (t <= 0) return 0;
  const x = t / STAY;
  let term = 1;
  let sum = 1;
  for (let k = 1; k < n; k++) {
    term *= x / k;
    sum += term;
  }
  return 1 - Math.exp(-x) * sum;
}

import type { ReferenceProblem } from './reference.ts';

/**
 * Oregonator: a limit cycle of the Belousov-Zhabotinskii reaction, with pulses over five decades.
 *
 * Problem: R. J. Field and R. M. Noyes, J. Chem. Phys. 60, 1877 (1974) (from memory); E. Hairer and G. Wanner,
 * Solving Ordinary Differential Equations II, 2nd ed. (1996), Sec. IV.10. Digits: Test Set for IVP Solvers (CWI
 * Amsterdam, Bari).
 */
export const oregonator: ReferenceProblem = {
  name: 'oregonator',
  size: 3,
  initial: [1, 2, 3],
  firstStep: 1e-4,
  rhs: ([a, b, c]) => [77.27 * (b + a * (1 - 8.375e-6 * a - b)), (c - (1 + a) * b) / 77.27, 0.161 * (a - c)],
  jacobian: ([a, b]) => [
    [77.27 * (1 - 2 * 8.375e-6 * a - b), 77.27 * (1 - a), 0],
    [-b / 77.27, -(1 + a) / 77.27, 1 / 77.27],
    [0.161, 0, -0.161],
  ],
  answers: [{ time: 360, state: [0.1000814870318523e1, 0.1228178521549917e4, 0.1320554942846706e3] }],
};

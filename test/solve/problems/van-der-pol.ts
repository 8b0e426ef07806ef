import type { ReferenceProblem } from './reference.ts';

/**
 * Van der Pol's oscillator with ε = 1e-6: long slow arcs and jumps a millionth of them long.
 *
 * Problem and digits: E. Hairer and G. Wanner, Solving Ordinary Differential Equations II, 2nd ed. (1996),
 * Sec. IV.10 and their stiff test set; t = 2 also in the Test Set for IVP Solvers (CWI Amsterdam, Bari), where the
 * other scaling of the problem gives y₂ a thousand times smaller.
 */
export const vanDerPol: ReferenceProblem = {
  name: 'van-der-pol',
  size: 2,
  initial: [2, 0],
  firstStep: 1e-6,
  rhs: ([a, b]) => [b, ((1 - a * a) * b - a) / 1e-6],
  jacobian: ([a, b]) => [
    [0, 1],
    [(-2 * a * b - 1) / 1e-6, (1 - a * a) / 1e-6],
  ],
  answers: [
    { time: 1, state: [-1.86364625480813, 0.753543086543546] },
    { time: 2, state: [1.706167732170483, -0.8928097010247975] },
  ],
};

import type { ReferenceProblem } from './reference.ts';

/**
 * HIRES: light response of a plant pigment, eight species.
 *
 * Problem: E. Schäfer, J. Math. Biol. 2, 41 (1975) (from memory); E. Hairer and G. Wanner, Solving Ordinary
 * Differential Equations II, 2nd ed. (1996), Sec. IV.10. Digits: Test Set for IVP Solvers (CWI Amsterdam, Bari).
 */
export const hires: ReferenceProblem = {
  name: 'hires',
  size: 8,
  scale: new Array(8).fill(1e-3),
  initial: [1, 0, 0, 0, 0, 0, 0, 0.0057],
  firstStep: 1e-4,
  rhs: ([a, b, c, d, e, f, g, h]) => {
    const bound = 280 * f * h;
    return [
      -1.71 * a + 0.43 * b + 8.32 * c + 0.0007,
      1.71 * a - 8.75 * b,
      -10.03 * c + 0.43 * d + 0.035 * e,
      8.32 * b + 1.71 * c - 1.12 * d,
      -1.745 * e + 0.43 * f + 0.43 * g,
      -bound + 0.69 * d + 1.71 * e - 0.43 * f + 0.69 * g,
      bound - 1.81 * g,
      -bound + 1.81 * g,
    ];
  },
  jacobian: ([, , , , , f, , h]) => [
    [-1.71, 0.43, 8.32, 0, 0, 0, 0, 0],
    [1.71, -8.75, 0, 0, 0, 0, 0, 0],
    [0, 0, -10.03, 0.43, 0.035, 0, 0, 0],
    [0, 8.32, 1.71, -1.12, 0, 0, 0, 0],
    [0, 0, 0, 0, -1.745, 0.43, 0.43, 0],
    [0, 0, 0, 0.69, 1.71, -280 * h - 0.43, 0.69, -280 * f],
    [0, 0, 0, 0, 0, 280 * h, -1.81, 280 * f],
    [0, 0, 0, 0, 0, -280 * h, 1.81, -280 * f],
  ],
  answers: [
    {
      time: 321.8122,
      state: [
        0.7371312573325668e-3, 0.1442485726316185e-3, 0.5888729740967575e-4, 0.1175651343283149e-2,
        0.2386356198831331e-2, 0.6238968252742796e-2, 0.2849998395185769e-2, 0.2850001604814231e-2,
      ],
    },
  ],
};

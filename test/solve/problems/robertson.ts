import type { ReferenceProblem } from './reference.ts';

/**
 * Robertson's autocatalytic reaction: rates from 4e-2 to 3e7, followed over eleven decades of time.
 *
 * Problem: H. H. Robertson, in J. Walsh (ed.), Numerical Analysis, an Introduction, Academic Press (1966), p. 178
 * (from memory); E. Hairer and G. Wanner, Solving Ordinary Differential Equations II, 2nd ed. (1996), Sec. IV.1.
 * Digits: t = 1e11 is the end point printed in the Test Set for IVP Solvers (CWI Amsterdam, Bari). The earlier
 * times were computed with SciPy 1.10, Radau, rtol 1e-12; published values of t = 40 agree with them to 1e-11.
 */
export const robertson: ReferenceProblem = {
  name: 'robertson',
  size: 3,
  // The transient species never exceeds 4e-5; at the end 2e-8 and 8e-14 are left of the first two.
  scale: [1e-6, 1e-10, 1],
  initial: [1, 0, 0],
  firstStep: 1e-4,
  rhs: ([a, b, c]) => {
    const slow = 0.04 * a;
    const back = 1e4 * b * c;
    const fast = 3e7 * b * b;
    return [back - slow, slow - back - fast, fast];
  },
  jacobian: ([, b, c]) => [
    [-0.04, 1e4 * c, 1e4 * b],
    [0.04, -1e4 * c - 6e7 * b, -1e4 * b],
    [0, 6e7 * b, 0],
  ],
  answers: [
    { time: 0.4, state: [0.98517211386099, 3.386395378975e-5, 0.01479402218522] },
    { time: 40, state: [0.7158270687194, 9.185534764557e-6, 0.2841637457458] },
    { time: 4e3, state: [0.18320225777767, 8.9423712528e-7, 1 - 0.18320225777767 - 8.9423712528e-7] },
    { time: 4e5, state: [0.00493827452098, 1.984994088e-8, 1 - 0.00493827452098 - 1.984994088e-8] },
    { time: 1e11, state: [2.083340149701255e-8, 8.333360770334713e-14, 0.999999979166505] },
  ],
};

import { makeSchedule } from '../../../src/solve/schedule.ts';
import type { Schedule } from '../../../src/solve/system.ts';
import { type Equations, idle } from './dense.ts';

/** An initial value problem whose solution can be written down. */
export interface ExactProblem extends Equations {
  readonly end: number;
  /** Equal steps in the coarsest solution that an order is read from: few enough to stay above rounding. */
  readonly coarsest: number;
  schedule(): Schedule;
  exact(t: number): readonly number[];
}

type Matrix = readonly (readonly number[])[];

const times = (a: Matrix, b: Matrix): number[][] =>
  a.map((row) => b[0].map((_, j) => row.reduce((s, v, k) => s + v * b[k][j], 0)));

/** e^M by its series for M/2^k, squared k times. */
export function exponential(m: Matrix): Matrix {
  const halvings = 12;
  const small = m.map((row) => row.map((v) => v / 2 ** halvings));
  let term: number[][] = m.map((_, i) => m.map((__, j) => (i === j ? 1 : 0)));
  let sum = term;
  for (let k = 1; k <= 14; k++) {
    term = times(term, small).map((row) => row.map((v) => v / k));
    sum = sum.map((row, i) => row.map((v, j) => v + term[i][j]));
  }
  for (let k = 0; k < halvings; k++) sum = times(sum, sum);
  return sum;
}

/** A matrix far from symmetric, its eigenvalues complex in part: no two of its powers share a pattern. */
const matrix: Matrix = [
  [-2, 1, 0.5, 0],
  [-3, -1, 0, 0.7],
  [0.2, -0.4, -0.5, 1],
  [0, 0.9, -1.3, -1.5],
];
const start = [1, -0.5, 2, 0.3];

/** x' = M·x. */
export const linear: ExactProblem = {
  name: 'linear',
  size: 4,
  end: 2,
  coarsest: 8,
  schedule: () => idle([0, 2]),
  rhs: (x) => matrix.map((row) => row.reduce((s, v, j) => s + v * x[j], 0)),
  jacobian: () => matrix,
  exact: (t) =>
    exponential(matrix.map((row) => row.map((v) => v * t))).map((row) =>
      row.reduce((s, v, j) => s + v * start[j], 0),
    ),
};

/** Onto the unit circle: in polar form r' = r(1 − r²), θ' = 1, so 1/r² − 1 falls as e^(−2t). */
export const circle: ExactProblem = {
  name: 'circle',
  size: 2,
  end: 2,
  coarsest: 32,
  schedule: () => idle([0, 2]),
  rhs: ([a, b]) => [a * (1 - a * a - b * b) - b, b * (1 - a * a - b * b) + a],
  jacobian: ([a, b]) => [
    [1 - 3 * a * a - b * b, -2 * a * b - 1],
    [1 - 2 * a * b, 1 - a * a - 3 * b * b],
  ],
  exact: (t) => {
    const r = 1 / Math.sqrt(1 + 3 * Math.exp(-2 * t));
    return [r * Math.cos(t), r * Math.sin(t)];
  },
};

const RAMP = { from: 0.5, slope: 1.2 };

/**
 * Driven by w = w₀ + st: x₁' = −w·x₁² gives 1/(1 + w₀t + st²/2), and x₂' = w² − x₂ gives w² − 2sw + 2s² plus a
 * decaying part. Both have ∂f/∂t ≠ 0, the first through x and w together, the second with a curvature in w.
 */
export const ramp: ExactProblem = {
  name: 'ramp',
  size: 2,
  end: 2,
  coarsest: 32,
  inputs: 1,
  schedule: () =>
    makeSchedule(
      Float64Array.of(RAMP.from),
      [{ input: 0, times: [0, 2], values: [RAMP.from, RAMP.from + 2 * RAMP.slope] }],
      0,
      2,
    ),
  rhs: ([a, b], [w]) => [-w * a * a, w * w - b],
  jacobian: ([a], [w]) => [
    [-2 * w * a, 0],
    [0, -1],
  ],
  byInput: ([a], [w]) => [[-a * a], [2 * w]],
  exact: (t) => {
    const { from, slope } = RAMP;
    const settled = (w: number): number => w * w - 2 * slope * w + 2 * slope * slope;
    return [
      1 / (1 + from * t + (slope * t * t) / 2),
      settled(from + slope * t) + (1 - settled(from)) * Math.exp(-t),
    ];
  },
};

import type { Stop, Work } from '../../../src/solve/outcome.ts';
import { dense, type Equations, idle, options, solve } from './dense.ts';

/** An initial value problem with the digits that others have found. */
export interface ReferenceProblem extends Equations {
  readonly initial: readonly number[];
  readonly firstStep: number;
  readonly answers: readonly { readonly time: number; readonly state: readonly number[] }[];
}

export interface Outcome {
  readonly stop: Stop;
  readonly work: Work;
  /** By answer reached: the largest error over the places, in units of tolerance·(scale + |x|). */
  readonly errors: readonly number[];
}

/** Integrates over all answers, landing on each, and measures the states there. */
export function against(
  problem: ReferenceProblem,
  integrator: string,
  tolerance: number,
  maximumSteps = 1e5,
): Outcome {
  const { answers } = problem;
  const scale = (i: number): number => problem.scale?.[i] ?? 1;
  const errors: number[] = [];
  const measure = (t: number, x: Float64Array): void => {
    const answer = answers.find((a) => a.time === t);
    if (!answer) return;
    errors.push(
      Math.max(...answer.state.map((v, i) => Math.abs(x[i] - v) / (tolerance * (scale(i) + Math.abs(v))))),
    );
  };
  const { stop, work } = solve(
    dense(problem),
    problem.initial,
    idle([0, ...answers.map((a) => a.time)]),
    { ...options(integrator, tolerance, problem.firstStep), maximumSteps },
    [{ begin: measure, end: measure }],
  );
  return { stop, work, errors };
}

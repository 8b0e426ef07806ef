import { describe, expect, it } from 'vitest';
import { hires } from './problems/hires.ts';
import { oregonator } from './problems/oregonator.ts';
import { against, type ReferenceProblem } from './problems/reference.ts';
import { robertson } from './problems/robertson.ts';
import { vanDerPol } from './problems/van-der-pol.ts';

const stages: Readonly<Record<string, number>> = { rodas5p: 8, rodas4: 6 };
const tolerances = [1e-4, 1e-6, 1e-8];

/** Attempts (steps taken and rejected) allowed at each tolerance: what was measured and a seventh more. */
const attempts: readonly [ReferenceProblem, string, readonly number[]][] = [
  [robertson, 'rodas5p', [150, 325, 850]],
  [robertson, 'rodas4', [175, 515, 1940]],
  [hires, 'rodas5p', [88, 242, 840]],
  [hires, 'rodas4', [126, 420, 2220]],
  [oregonator, 'rodas5p', [476, 980, 3020]],
  [oregonator, 'rodas4', [590, 1610, 7540]],
  [vanDerPol, 'rodas5p', [383, 758, 2450]],
  [vanDerPol, 'rodas4', [540, 1320, 6470]],
];

/** Global error allowed, in units of the tolerance for one step. */
const ALLOWED = 2.5;

describe('published digits', () => {
  const cases = attempts.flatMap(([problem, integrator, limits]) =>
    tolerances.map((tolerance, k) => ({ problem, integrator, tolerance, limit: limits[k] })),
  );

  it.each(cases)(
    '$problem.name by $integrator at $tolerance, with less than $limit attempts',
    ({ problem, integrator, tolerance, limit }) => {
      const { stop, errors, work } = against(problem, integrator, tolerance);
      expect(stop.reason).toBe('reached-end');
      expect(errors).toHaveLength(problem.answers.length);
      for (const e of errors) expect(e).toBeLessThan(ALLOWED);
      const made = work.steps + work.rejectedByError;
      expect(made).toBeLessThan(limit);
      expect(work.rhs).toBe(made * stages[integrator]);
      expect(work.solves).toBe(work.rhs);
      expect(work.factorisations).toBe(made);
      expect(work.jacobians).toBe(work.steps);
      expect(work.rejectedByNonFinite + work.rejectedByNegative + work.rejectedBySingular).toBe(0);
    },
  );
});

it.each(Object.keys(stages))('Robertson to 1e11 in one stretch needs no corner, by %s', (integrator) => {
  const far = { ...robertson, answers: robertson.answers.slice(-1) };
  const { stop, errors, work } = against(far, integrator, 1e-6);
  expect(stop.reason).toBe('reached-end');
  expect(errors[0]).toBeLessThan(ALLOWED);
  expect(work.steps).toBeLessThan(integrator === 'rodas5p' ? 325 : 515);
});

describe('the bounds on work', () => {
  it.each(attempts.map(([problem, integrator, limits]) => ({ problem, integrator, limit: limits[1] })))(
    'tell a Jacobian with one entry wrong by a fiftieth: $problem.name by $integrator',
    ({ problem, integrator, limit }) => {
      const wrong: ReferenceProblem = {
        ...problem,
        jacobian: (x, w) =>
          problem.jacobian(x, w).map((row, i) => row.map((v, j) => (i === 1 && j === 1 ? 0.98 * v : v))),
      };
      const { stop, work } = against(wrong, integrator, 1e-6, limit);
      expect(stop).toMatchObject({ reason: 'too-many-steps', limit });
      expect(stop.time).toBeLessThan(problem.answers[problem.answers.length - 1].time);
      expect(work.steps).toBe(limit);
    },
  );
});

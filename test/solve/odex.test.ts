import { describe, expect, it } from 'vitest';
import type { Run } from '../../src/solve/integrate.ts';
import { makeSchedule } from '../../src/solve/schedule.ts';
import type { F, Schedule, System } from '../../src/solve/system.ts';
import { dense, type Equations, options, solve } from './problems/dense.ts';
import { hires } from './problems/hires.ts';
import { against } from './problems/reference.ts';

interface Point {
  readonly t: number;
  readonly x: F;
}

/** Largest difference, in units of tolerance·(scale + |x|), of odex from the implicit method at far less tolerance. */
function difference(
  system: System,
  schedule: Schedule,
  tolerance: number,
  inside: readonly number[],
): { units: number; run: Run } {
  const start = new Array(system.places.length).fill(0);
  const points: Point[] = [];
  const run = solve(system, start, schedule, options('odex', tolerance, 1), [
    {
      step: (s) => {
        for (const part of inside) {
          const x = new Float64Array(s.x1.length);
          const t = s.t0 + part * (s.t1 - s.t0);
          s.at(t, x);
          points.push({ t, x });
        }
        points.push({ t: s.t1, x: Float64Array.from(s.x1) });
      },
    },
  ]);
  let next = 0;
  let units = 0;
  const exact = new Float64Array(start.length);
  solve(system, start, schedule, options('rodas5p', 1e-11, 1), [
    {
      step: (s) => {
        for (; next < points.length && points[next].t <= s.t1; next++) {
          s.at(points[next].t, exact);
          points[next].x.forEach((v, i) => {
            const own = tolerance * (system.places[i].scale + Math.abs(exact[i]));
            units = Math.max(units, Math.abs(v - exact[i]) / own);
          });
        }
      },
    },
  ]);
  // The last place of the last time may differ.
  expect(next).toBeGreaterThanOrEqual(points.length - 1);
  return { units, run };
}

/** Tanks in series of which the first is small; a reaction of second order in each. */
function series(count: number, first: number, tau: number, rate: number): Equations {
  const own = (i: number): number => (i === 0 ? first : tau);
  return {
    name: 'series',
    size: count,
    inputs: 1,
    rhs: (x, [w]) => Array.from(x, (v, i) => ((i === 0 ? w : x[i - 1]) - v) / own(i) - rate * v * v),
    jacobian: (x) =>
      Array.from(x, (v, i) =>
        Array.from(x, (_, j) => (j === i ? -1 / own(i) - 2 * rate * v : j === i - 1 ? 1 / own(i) : 0)),
      ),
    byInput: (x) => Array.from(x, (_, i) => [i === 0 ? 1 / first : 0]),
  };
}

const wave = (to: number): Schedule =>
  makeSchedule(
    Float64Array.of(0),
    [{ input: 0, times: [0, 0, to / 3, to / 3, to / 2, to], values: [0, 4, 4, 7, 1, 5] }],
    0,
    to,
  );

describe('explicit extrapolation against the implicit method', () => {
  it.each([1e-4, 1e-6, 1e-8])('agrees to the tolerance where nothing is stiff, at %f', (tolerance) => {
    const { units, run } = difference(dense(series(5, 40, 60, 1e-3)), wave(900), tolerance, [0.2, 0.5, 0.8]);
    expect(units).toBeLessThan(3);
    expect(run.work.steps).toBeLessThan(150);
  });

  // One fast place among many: its error would vanish in a mean over all, and it holds the step at stability's edge.
  it.each([1e-4, 1e-6, 1e-8])(
    'agrees to ten tolerances where stability bounds the step, at %f',
    (tolerance) => {
      const { units, run } = difference(
        dense(series(40, 3, 400, 1e-5)),
        wave(9000),
        tolerance,
        [0.25, 0.5, 0.75],
      );
      expect(units).toBeLessThan(10);
      expect(run.work.steps).toBeGreaterThan(9000 / (10 * 3));
    },
  );

  it('finds the published digits of a stiff problem, by force', () => {
    const { stop, errors, work } = against(hires, 'odex', 1e-6);
    expect(stop.reason).toBe('reached-end');
    expect(errors[0]).toBeLessThan(2.5);
    expect(work.rhs).toBeGreaterThan(20_000);
  });
});

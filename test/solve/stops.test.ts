import { describe, expect, it } from 'vitest';
import { integrate, integrateInTurns, integrators, type Watcher } from '../../src/solve/integrate.ts';
import { makeSchedule } from '../../src/solve/schedule.ts';
import type { System } from '../../src/solve/system.ts';
import { dense, type Equations, idle, none, options, solve } from './problems/dense.ts';
import { hires } from './problems/hires.ts';
import { tanks } from './problems/tanks.ts';

const methods = ['rodas5p', 'rodas4', 'odex'];
const implicit = methods.slice(0, 2);

/** One of three has a balance only while the first is below 1; another, listed before it, receives from it. */
const loses: Equations = {
  name: 'loses',
  size: 3,
  rhs: ([a, third, b]) => [1, b - third, Math.sqrt(1 - a) - b],
  jacobian: ([a]) => [
    [0, 0, 0],
    [0, -1, 1],
    [-0.5 / Math.sqrt(1 - a), 0, -1],
  ],
  places: [{ path: 'clock' }, { path: 'receiver' }, { path: 'culprit' }],
};

describe.each(methods)('runs that cannot go on, %s', (method) => {
  it('name time and place where a balance is lost, and keep what was computed', () => {
    const r = solve(dense(loses), [0, 0, 0], idle([0, 5]), options(method, 1e-6));
    expect(r.stop).toMatchObject({ reason: 'not-finite', place: 'culprit' });
    expect(r.stop.time).toBe(r.time);
    expect(Math.abs(r.time - 1)).toBeLessThan(1e-6);
    expect(Math.abs(r.state[0] - r.time)).toBeLessThan(1e-9);
    expect(r.state.every(Number.isFinite)).toBe(true);
  });

  it('are found at the very start', () => {
    const r = solve(dense(loses), [2, 0, 0], idle([0, 5]), options(method, 1e-6));
    expect(r.stop).toEqual({ reason: 'not-finite', time: 0, place: 'culprit' });
    expect([...r.state]).toEqual([2, 0, 0]);
  });

  it('are not given up for a trial state alone: a step that overshoots is tried again, shorter', () => {
    // Towards zero like e^(−t): an explicit step of more than 1 would overshoot, where the balance has no value.
    const decay: Equations = {
      name: 'decay',
      size: 1,
      rhs: ([x]) => [x < 0 ? Number.NaN : -x],
      jacobian: () => [[-1]],
    };
    const r = solve(dense(decay), [1], idle([0, 3]), options(method, 1e-6, 2.9));
    expect(r.stop.reason).toBe('reached-end');
    expect(Math.abs(r.state[0] - Math.exp(-3))).toBeLessThan(1e-5);
  });

  it('end after the steps that are allowed in the whole run', () => {
    const corners = Array.from({ length: 50 }, (_, k) => k);
    const o = { ...options(method, 1e-6, 0.1), maximumSteps: 20 };
    const r = solve(dense(tanks(2, 1)), [0, 0], idle(corners, [1]), o);
    expect(r.stop).toMatchObject({ reason: 'too-many-steps', limit: 20 });
    // odex does not look at its limit before the first and the last step of a stretch.
    expect(r.work.steps).toBeLessThanOrEqual(method === 'odex' ? 21 : 20);
    expect(r.time).toBeGreaterThan(0);
    expect(r.time).toBeLessThan(49);
  });

  it('end their watchers with the last state', () => {
    const ends: [number, number][] = [];
    const r = solve(dense(loses), [0, 0, 0], idle([0, 5]), options(method, 1e-6), [
      { end: (t, x) => ends.push([t, x[0]]) },
    ]);
    expect(ends).toEqual([[r.time, r.state[0]]]);
  });
});

describe.each(implicit)('what only an implicit method meets, %s', (method) => {
  it('a slope without bound names its place', () => {
    const root: Equations = {
      name: 'root',
      size: 2,
      rhs: ([, b]) => [1 - 0.5 * Math.sqrt(b), -Math.sqrt(b)],
      jacobian: ([, b]) => [
        [0, 0],
        [0, -0.5 / Math.sqrt(b)],
      ],
      places: [{ path: 'fine' }, { path: 'steep' }],
    };
    const r = solve(dense(root), [1, 0], idle([0, 5]), options(method, 1e-6));
    expect(r.stop).toEqual({ reason: 'not-finite', time: 0, place: 'steep' });
  });

  it('a vessel drawn below its floor', () => {
    const drawn: Equations = {
      name: 'drawn',
      size: 2,
      rhs: () => [1, -1],
      jacobian: () => [
        [0, 0],
        [0, 0],
      ],
      places: [{ floor: 0 }, { path: 'vessel', floor: 0 }],
    };
    const r = solve(dense(drawn), [0, 1], idle([0, 5]), options(method, 1e-6));
    const cause = 'every trial step makes it negative';
    expect(r.stop).toMatchObject({ reason: 'step-too-small', place: 'vessel', cause });
    expect(r.work.rejectedByNegative).toBeGreaterThan(0);
    // It may go below by ten absolute tolerances.
    expect(Math.abs(r.time - (1 + 1e-5))).toBeLessThan(1e-8);
  });

  it('a blow-up, where no step is short enough', () => {
    // x' = x² from 1 is 1/(1 − t).
    const blowUp: Equations = {
      name: 'blow-up',
      size: 1,
      rhs: ([x]) => [x * x],
      jacobian: ([x]) => [[2 * x]],
    };
    const r = solve(dense(blowUp), [1], idle([0, 2]), options(method, 1e-6));
    const cause = 'no step is small enough for the tolerance';
    expect(r.stop).toMatchObject({ reason: 'step-too-small', place: 'blow-up.1', cause });
    expect(Math.abs(r.time - 1)).toBeLessThan(2e-6);
    expect(r.state[0]).toBeGreaterThan(1e9);
    expect(r.work.steps).toBeLessThan(2000);
  });
});

describe.each(methods)('turns, %s', (method) => {
  const system: System = dense({
    ...tanks(4, 30),
    guards: [{ name: 'half', direction: 1, action: 'report', message: '' }],
    guard: (x) => [x[3] - 0.5],
  });
  const problem = {
    system,
    parameters: none,
    schedule: makeSchedule(
      Float64Array.of(0),
      [{ input: 0, times: [5, 5, 200, 3e5], values: [0, 1, 1, 3] }],
      0,
      3e5,
    ),
    initial: new Float64Array(4),
  };
  const o = options(method, 1e-7, 1);

  function logger(): Watcher & { readonly log: unknown[] } {
    const log: unknown[] = [];
    return {
      log,
      begin: (t, x, w) => log.push(['begin', t, [...x], [...w]]),
      step: (s) => log.push(['step', s.t0, s.t1, [...s.x1]]),
      end: (t, x, w) => log.push(['end', t, [...x], [...w]]),
    };
  }

  it('change no digit and no count, wherever they fall', async () => {
    const whole = logger();
    const plain = integrate(problem, o, [whole]);
    expect(plain.events).toHaveLength(1);
    for (const every of [1, 2]) {
      let asked = 0;
      let given = 0;
      const shared = logger();
      const turns = { due: () => ++asked % every === 0, interrupted: () => ++given < 0 };
      const run = await integrateInTurns(problem, o, [shared], turns);
      expect(run).toEqual(plain);
      expect(shared.log).toEqual(whole.log);
      expect(given).toBeGreaterThan(1);
    }
  });

  it('end with what was computed when interrupted, and let the event loop run', async () => {
    let outside = false;
    setImmediate(() => {
      outside = true;
    });
    let given = 0;
    const shared = logger();
    const run = await integrateInTurns(problem, o, [shared], {
      due: () => true,
      interrupted: () => ++given === 2,
    });
    expect(outside).toBe(true);
    expect(run.stop).toEqual({ reason: 'interrupted', time: run.time });
    expect(run.time).toBeGreaterThan(0);
    expect(run.time).toBeLessThan(3e5);
    expect(given).toBe(2);
    const whole = logger();
    integrate(problem, o, [whole]);
    const steps = shared.log.slice(0, -1);
    expect(whole.log.slice(0, steps.length)).toEqual(steps);
    expect(shared.log.at(-1)).toEqual(['end', run.time, [...run.state], [expect.any(Number)]]);
  });
});

it('every method goes by its own name', () => {
  for (const [name, make] of Object.entries(integrators))
    expect(make(dense(hires), none, options(name, 1e-6)).name).toBe(name);
});

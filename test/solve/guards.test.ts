import { describe, expect, it } from 'vitest';
import type { Run, Watcher } from '../../src/solve/integrate.ts';
import { makeSchedule, type Track } from '../../src/solve/schedule.ts';
import type { F, Guard } from '../../src/solve/system.ts';
import { dense, type Equations, options, solve } from './problems/dense.ts';
import { tanks } from './problems/tanks.ts';

const methods = ['rodas5p', 'rodas4', 'odex'];

const guard = (name: string, direction: Guard['direction'], action: Guard['action'] = 'report'): Guard => ({
  name,
  direction,
  action,
  message: `${name} happened`,
});

/** A vessel filled at the rate of its input: x' = w. Exact for every method, so that only crossings are at stake. */
const vessel = (guards: readonly Guard[], values: (x: F, w: F) => readonly number[]): Equations => ({
  name: 'vessel',
  size: 1,
  inputs: 1,
  rhs: (_, [w]) => [w],
  jacobian: () => [[0]],
  byInput: () => [[1]],
  guards,
  guard: values,
});

interface Course {
  readonly to: number;
  readonly w?: number;
  readonly from?: number;
  readonly tracks?: readonly Track[];
}

function run(method: string, e: Equations, c: Course, watchers: readonly Watcher[] = []): Run {
  const schedule = makeSchedule(Float64Array.of(c.w ?? 1), c.tracks ?? [], 0, c.to);
  return solve(dense(e), [c.from ?? 0], schedule, options(method, 1e-6, 100), watchers);
}

const told = (r: Run): [string, number][] => r.events.map((e) => [e.name, e.time]);

function expectEvents(r: Run, expected: readonly (readonly [string, number])[]): void {
  expect(r.events.map((e) => e.name)).toEqual(expected.map(([name]) => name));
  told(r).forEach(([name, time], i) => {
    expect(Math.abs(time - expected[i][1]), `${name} at ${time}`).toBeLessThan(1e-8 * r.time);
  });
}

describe.each(methods)('guards, %s', (method) => {
  it('are reported at their times, in order, when one step holds several', () => {
    const levels = [0.31, 0.3, 0.3000001, 0.9];
    const r = run(
      method,
      vessel(
        levels.map((l) => guard(`${l}`, 1)),
        ([x]) => levels.map((l) => x - l),
      ),
      { to: 1 },
    );
    expectEvents(r, [
      ['0.3', 0.3],
      ['0.3000001', 0.3000001],
      ['0.31', 0.31],
      ['0.9', 0.9],
    ]);
    expect(r.state[0]).toBeCloseTo(1, 12);
  });

  it('that cross at one instant are all reported', () => {
    const names = ['a', 'b', 'c'];
    const r = run(
      method,
      vessel(
        names.map((n) => guard(n, 0)),
        ([x]) => [x - 0.5, 0.5 - x, 2 * x - 1],
      ),
      { to: 1 },
    );
    expect(r.events.map((e) => e.name).sort()).toEqual(names);
    for (const e of r.events) expect(e.time).toBeCloseTo(0.5, 8);
  });

  it('are found going there and coming back inside one step', () => {
    // x = t − t²/4 rises to 1 at t = 2 and falls again: every method takes it in one step, or nearly so.
    const e = vessel([guard('level', 0)], ([x]) => [x - 0.75]);
    const r = run(method, e, { to: 4, tracks: [{ input: 0, times: [0, 4], values: [1, -1] }] });
    expectEvents(r, [
      ['level', 1],
      ['level', 3],
    ]);
    if (method !== 'odex') expect(r.work.steps).toBe(3);
  });

  it('look at their direction', () => {
    const there = { input: 0, times: [0, 2, 2], values: [1, 1, -1] };
    const e = vessel([guard('up', 1), guard('down', -1), guard('either', 0)], ([x]) => [x - 1, x - 1, x - 1]);
    const r = run(method, e, { to: 4, tracks: [there] });
    const names = r.events.map((v) => v.name);
    expect(names.slice(0, 2).sort()).toEqual(['either', 'up']);
    expect(names.slice(2).sort()).toEqual(['down', 'either']);
    r.events.forEach((v, k) => {
      expect(v.time).toBeCloseTo(k < 2 ? 1 : 3, 8);
    });
  });

  it('are met at the end of a stretch, on a corner and at the horizon', () => {
    const e = vessel([guard('corner', 1), guard('end', 1)], ([x]) => [x - 1, x - 3]);
    const r = run(method, e, { to: 2, tracks: [{ input: 0, times: [0, 1, 1], values: [1, 1, 2] }] });
    expect(told(r).map(([n]) => n)[0]).toBe('corner');
    expect(r.events[0].time).toBeCloseTo(1, 8);
    expect(r.events.filter((v) => v.name === 'corner')).toHaveLength(1);
    expect(r.stop).toEqual({ reason: 'reached-end', time: 2 });
  });

  it('that stand at zero at the start, or are beyond it, have not happened', () => {
    const e = vessel([guard('zero', 0), guard('beyond', 1), guard('touched', 1)], ([x]) => [x, x + 1, x - 1]);
    // The input falls so that x rises to 1/2 and turns.
    const r = run(method, e, { to: 1.9, tracks: [{ input: 0, times: [0, 2], values: [1, -1] }] });
    expect(r.events).toEqual([]);
  });

  it('show watchers a step that ends where the guard acted', () => {
    const seen: [number, number, number][] = [];
    const begun: number[] = [];
    const e = vessel([guard('half', 1, { set: [[0, 0]] })], ([x]) => [x - 0.5]);
    run(method, e, { to: 4 }, [
      { step: (s) => seen.push([s.t0, s.t1, s.x1[0]]), begin: (t, _, w) => begun.push(t, w[0]) },
    ]);
    seen.forEach(([from], k) => {
      expect(from).toBe(k === 0 ? 0 : seen[k - 1][1]);
    });
    expect(begun).toHaveLength(4);
    expect(begun[2]).toBeCloseTo(0.5, 8);
    expect(begun[3]).toBe(0);
    for (const [, to, x] of seen) expect(x).toBeCloseTo(Math.min(to, 0.5), 8);
  });

  it('that latch hold against the schedule', () => {
    const e = vessel([guard('full', 1, { set: [[0, 0]] })], ([x]) => [x - 0.75]);
    const r = run(method, e, {
      to: 9,
      tracks: [{ input: 0, times: [0, 5, 5, 6], values: [0.5, 0.5, 2, 3] }],
    });
    expectEvents(r, [['full', 1.5]]);
    expect(r.state[0]).toBeCloseTo(0.75, 8);
  });

  it('that latch leave no trace of the ramp they hold against', () => {
    const mixer: Equations = {
      ...tanks(1, 20),
      guards: [guard('full', 1, { set: [[0, 0.25]] })],
      guard: ([x]) => [x - 0.5],
    };
    const [steep, flat] = [9, 2].map((last) =>
      run(method, mixer, { to: 100, tracks: [{ input: 0, times: [0, 50, 100], values: [0, 2, last] }] }),
    );
    expect(steep.events).toHaveLength(1);
    expect(steep.time - steep.events[0].time).toBeGreaterThan(50);
    expect(steep.state).toEqual(flat.state);
    expect(steep.work).toEqual(flat.work);
  });

  it('in pairs make an oscillator of exact period', () => {
    const e = vessel([guard('high', 1, { set: [[0, -1]] }), guard('low', -1, { set: [[0, 2]] })], ([x]) => [
      x - 1,
      x,
    ]);
    const r = run(method, e, { to: 9.25, from: 0.5 });
    const expected: [string, number][] = [];
    // Up to 1 in half a second, then 1 s down and half a second up.
    for (let t = 0.5; t < 9.25; t += 1.5) {
      expected.push(['high', t]);
      if (t + 1 < 9.25) expected.push(['low', t + 1]);
    }
    expectEvents(r, expected);
    expect(r.work.restarts).toBe(expected.length + 1);
  });

  it('act at once where an input jumps across', () => {
    const e = vessel([guard('on', 1, { set: [[0, 0.25]] }), guard('off', -1)], (_, [w]) => [
      w - 0.5,
      w - 0.5,
    ]);
    const r = run(method, e, { to: 10, tracks: [{ input: 0, times: [0, 3, 3], values: [0, 0, 1] }] });
    expect(told(r)).toEqual([
      ['on', 3],
      ['off', 3],
    ]);
    expect(r.state[0]).toBeCloseTo(7 * 0.25, 12);
  });

  it('are found on a ramp of an input, although no state moves them', () => {
    const e = vessel([guard('on', 1)], (_, [w]) => [w - 0.5]);
    const r = run(method, e, { to: 10, tracks: [{ input: 0, times: [2, 7], values: [0, 1] }] });
    expectEvents(r, [['on', 4.5]]);
  });

  it('stop the run with state, time and message', () => {
    const e = vessel([guard('dry', -1, 'stop')], ([x]) => [x - 0.25]);
    const r = run(method, e, { to: 10, from: 1, w: -0.5 });
    expect(r.stop).toEqual({ reason: 'guard', time: r.time, guard: 'dry', message: 'dry happened' });
    expect(r.time).toBeCloseTo(1.5, 8);
    expect(r.state[0]).toBeCloseTo(0.25, 8);
    expect(r.events).toHaveLength(1);
  });

  it('stop it at the very jump that sets them off', () => {
    const e = vessel([guard('tripped', 1, 'stop')], (_, [w]) => [w - 5]);
    const r = run(method, e, { to: 10, tracks: [{ input: 0, times: [0, 4, 4], values: [1, 1, 6] }] });
    expect(r.stop).toMatchObject({ reason: 'guard', time: 4 });
    expect(r.state[0]).toBeCloseTo(4, 12);
  });

  it('that switch each other without end are given up, at the instant where they do', () => {
    const e = vessel([guard('on', 1, { set: [[0, 0]] }), guard('off', -1, { set: [[0, 1]] })], (_, [w]) => [
      w - 0.5,
      w - 0.5,
    ]);
    const r = run(method, e, { to: 10, tracks: [{ input: 0, times: [0, 3, 3], values: [0, 0, 1] }] });
    expect(r.stop).toMatchObject({ reason: 'too-many-events', time: 3, guard: 'on' });
    expect(r.events).toHaveLength(10_000);
    expect(r.state[0]).toBe(0);
  });

  it('keep quiet when their mode is set already', () => {
    const e = vessel(
      [guard('first', 1, { set: [[0, 0.5]] }), guard('again', 1, { set: [[0, 0.5]] })],
      ([x]) => [x - 1, x - 2],
    );
    const r = run(method, e, { to: 10 });
    expectEvents(r, [['first', 1]]);
    expect(r.state[0]).toBeCloseTo(1 + 9 * 0.5, 8);
  });
});

it('a crossing is found late in a year to the digits of the clock', () => {
  const year = 3.2e7;
  const e = vessel([guard('late', 1)], ([x]) => [x - (year - 0.125)]);
  const r = run('rodas5p', e, { to: year });
  expect(r.events).toHaveLength(1);
  expect(Math.abs(r.events[0].time - (year - 0.125))).toBeLessThan(1e-2);
});

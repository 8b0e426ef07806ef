import { describe, expect, it } from 'vitest';
import type { Run, Watcher } from '../../src/solve/integrate.ts';
import { makeSchedule, type Track } from '../../src/solve/schedule.ts';
import type { Schedule } from '../../src/solve/system.ts';
import { dense, idle, options, solve } from './problems/dense.ts';
import { stepResponse, tanks } from './problems/tanks.ts';

const methods = ['rodas5p', 'rodas4', 'odex'];
const TOLERANCE = 1e-8;
const TAU = 50;
const plant = dense(tanks(3, TAU));
const barren = [0, 0, 0];

const feed = (horizon: number, times: readonly number[], values: readonly number[], initial = 0): Schedule =>
  makeSchedule(Float64Array.of(initial), [{ input: 0, times, values }], 0, horizon);

const run = (method: string, schedule: Schedule, watchers: readonly Watcher[] = [], firstStep = 1): Run =>
  solve(plant, barren, schedule, options(method, TOLERANCE, firstStep), watchers);

/** Values at the given times, from dense output, each from the first step that reaches it. */
function recorder(times: readonly number[]): Watcher & { readonly rows: Float64Array[] } {
  const rows: Float64Array[] = [];
  return {
    rows,
    step: (step) => {
      while (rows.length < times.length && times[rows.length] <= step.t1) {
        const x = new Float64Array(step.x1.length);
        step.at(times[rows.length], x);
        rows.push(x);
      }
    },
  };
}

function expectNear(x: ArrayLike<number>, exact: readonly number[], units = 30): void {
  exact.forEach((v, i) => {
    expect(
      Math.abs(x[i] - v) / (TOLERANCE * (1 + Math.abs(v))),
      `place ${i + 1}: ${x[i]}, not ${v}`,
    ).toBeLessThan(units);
  });
}

const response = (t: number): number[] => [1, 2, 3].map((n) => stepResponse(n, TAU, t));

describe.each(methods)('corners of the inputs, %s', (method) => {
  it('a jump at the start counts from the start on', () => {
    const jump = run(method, feed(400, [0, 0], [0, 1]));
    expect(jump.state).toEqual(run(method, feed(400, [0], [1])).state);
    expectNear(jump.state, response(400));
  });

  it('a jump at the horizon comes too late', () => {
    const schedule = feed(400, [400, 400], [1, 7], 1);
    let last = Number.NaN;
    const late = run(method, schedule, [
      {
        end: (_, __, w) => {
          last = w[0];
        },
      },
    ]);
    expect(late.state).toEqual(run(method, feed(400, [0], [1])).state);
    expect(last).toBe(1);
  });

  it('a jump on a record time: the record is the state at the jump', () => {
    const record = recorder([100, 250]);
    const begun: number[] = [];
    run(method, feed(400, [100, 100], [0, 1]), [record, { begin: (t, _, w) => begun.push(t, w[0]) }]);
    expect(begun).toEqual([0, 0, 100, 1]);
    expectNear(record.rows[0], barren);
    expectNear(record.rows[1], response(150));
  });

  it('a pulse of 1 s in 1e6 s is never stepped over', () => {
    for (const at of [1, 3600.5, 123_456.789, 999_000]) {
      const after = at + 120;
      const record = recorder([after]);
      // A thousand times the usual concentration, so that a second of it is seen among three tanks of 50 s.
      run(method, feed(1e6, [at, at, at + 1, at + 1], [0, 1000, 1000, 0]), [record]);
      const exact = [1, 2, 3].map((n) => 1000 * (stepResponse(n, TAU, 120) - stepResponse(n, TAU, 119)));
      expect(exact[2]).toBeGreaterThan(1);
      expectNear(record.rows[0], exact, 100);
    }
  });

  it('a ramp and its end are met', () => {
    const record = recorder([30, 90]);
    run(method, feed(200, [10, 60], [0, 5]), [record]);
    // One tank behind a ramp of slope r: r·(t − τ + τ·e^(−t/τ)); after its end the difference of two ramps.
    const ramp = (t: number): number => (t <= 0 ? 0 : 0.1 * (t - TAU + TAU * Math.exp(-t / TAU)));
    expectNear(record.rows[0].subarray(0, 1), [ramp(20)]);
    expectNear(record.rows[1].subarray(0, 1), [ramp(80) - ramp(30)]);
  });

  it('a jump closer than a microsecond to another is no trouble', () => {
    const close = run(method, feed(400, [100, 100, 100 + 1e-7, 100 + 1e-7], [0, 500, 500, 1]));
    expect(close.stop.reason).toBe('reached-end');
    expectNear(close.state, response(300), 200);
  });
});

describe.each(methods)('what changes nothing, %s', (method) => {
  const step = (): Schedule => feed(1000, [0, 0], [0, 1]);

  it('record times change no digit', () => {
    const plain = run(method, step());
    for (const every of [0.37, 10, 333]) {
      const times = Array.from({ length: Math.floor(1000 / every) }, (_, k) => k * every);
      const recorded = run(method, step(), [recorder(times)]);
      expect(recorded.state).toEqual(plain.state);
      expect(recorded.work).toEqual(plain.work);
    }
  });

  it('idle corners change nothing beyond the tolerance', () => {
    const corners: Track[] = [[1e-3], [17, 17.1, 500], [999.9999]].map((times) => ({
      input: 0,
      times,
      values: times.map(() => 1),
    }));
    for (const track of corners) {
      const cut = solve(
        plant,
        barren,
        makeSchedule(Float64Array.of(1), [track], 0, 1000),
        options(method, TOLERANCE, 1),
      );
      expect(cut.work.restarts).toBe(track.times.length + 1);
      expectNear(cut.state, response(1000));
    }
  });

  it('corners make no method forget the step it had come to, however close they are', () => {
    const horizon = 144.5 * 600;
    const corners = Array.from({ length: 144 }, (_, k) => [600 * (k + 1), 600 * (k + 1) + 1e-3]).flat();
    const track = { input: 0, times: corners, values: corners.map(() => 1) };
    const plain = run(method, feed(horizon, [0], [1]));
    const cut = run(method, makeSchedule(Float64Array.of(1), [track], 0, horizon));
    // odex, bounded by stability and without a memory for its order, spends some steps on each stretch.
    const stretch = method === 'odex' ? 8 : 1;
    expect(cut.work.steps).toBeLessThan(plain.work.steps + 1.1 * stretch * corners.length);
  });

  it('the horizon changes nothing beyond the tolerance', () => {
    for (const horizon of [201, 350, 1e5]) {
      const record = recorder([200]);
      run(method, feed(horizon, [0, 0], [0, 1]), [record]);
      expectNear(record.rows[0], response(200));
    }
  });

  it('a total that only counts what passes changes nothing beyond the tolerance', () => {
    const counting = tanks(4, TAU);
    const system = dense({
      ...counting,
      // A million times what flows: its own error, judged, would rule the steps.
      rhs: (x, w) => [...counting.rhs(x, w).slice(0, 3), 1e6 * x[2]],
      jacobian: (x, w) => [...counting.jacobian(x, w).slice(0, 3), [0, 0, 1e6, 0]],
      places: [{}, {}, {}, { kind: 'total', scale: 1e-3 }],
    });
    const counted = solve(system, [0, 0, 0, 0], step(), options(method, TOLERANCE, 1));
    const plain = run(method, step());
    expectNear(counted.state, response(1000));
    expect(Math.abs(counted.work.steps - plain.work.steps)).toBeLessThan(2);
    // Three tanks hold back the feed of three times τ.
    expect(Math.abs(counted.state[3] / 1e6 - (1000 - 3 * TAU))).toBeLessThan(1e-4);
  });

  it('a first step that is far off changes nothing beyond the tolerance', () => {
    for (const first of [1e-6, 1, 1e6])
      expectNear(run(method, feed(300, [0], [1]), [], first).state, response(300));
  });
});

describe('schedules', () => {
  const at = (s: Schedule, segment: number, t: number): number => {
    const w = new Float64Array(1);
    s.value(segment, t, w);
    return w[0];
  };

  it('have both limits at a jump and straight lines between corners', () => {
    const s = feed(100, [10, 20, 20, 40], [1, 3, -2, 0], 9);
    expect([...s.times]).toEqual([0, 10, 20, 40, 100]);
    expect(at(s, 0, 5)).toBe(1);
    expect(at(s, 1, 15)).toBeCloseTo(2, 14);
    expect(at(s, 1, 20)).toBeCloseTo(3, 14);
    expect(at(s, 2, 20)).toBe(-2);
    expect(at(s, 3, 77)).toBe(0);
  });

  it('corners that no clock can tell apart are one', () => {
    const s = feed(1e6, [5e5, 5e5 * (1 + 1e-15)], [0, 1]);
    expect(s.times).toHaveLength(3);
    expect(at(s, 1, 6e5)).toBe(1);
  });

  it('refuse a horizon that is not after the start, and tracks that are empty, run backwards or lack a value', () => {
    expect(() => feed(0, [0], [0])).toThrow('the end 0 s is not after the start 0 s');
    expect(() => feed(10, [], [])).toThrow('no corner');
    expect(() => feed(10, [5, 4], [0, 1])).toThrow('not in the order of time');
    expect(() => feed(10, [5], [0, 1])).toThrow('not in the order of time');
  });

  it('may begin anywhere', () => {
    const s = makeSchedule(Float64Array.of(0), [{ input: 0, times: [-5, 5], values: [0, 10] }], 0, 10);
    expect(at(s, 0, 0)).toBeCloseTo(5, 14);
    const moved = solve(plant, barren, { ...idle([1e6, 1e6 + 400], [1]) }, options('rodas5p', TOLERANCE));
    expectNear(moved.state, response(400));
  });
});

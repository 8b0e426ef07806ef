import { describe, expect, it } from 'vitest';
import { firstOrder, follow, spec } from './first-order.ts';

/*
 * Closed forms derived by hand from the difference and differential equations of the loop; each is stated where it is
 * used. Times in minutes throughout.
 */

const stepTo = (v: number) => ({ setPoint: { times: [0], values: [v] } });
const range = (n: number, f: (k: number) => number): number[] => Array.from({ length: n }, (_, k) => f(k));

describe('PI on each result', () => {
  it('with Ti = h/(e^(h/T) − 1) cancels the sampled lag: the error halves with every sample', () => {
    // y_k+1 = φ·y_k + (1−φ)·u_k and u − u₋₁ = Kc(e_k − φ·e_k−1)/φ: with Kc(1−φ)/φ = 1/2, e_k = 2^−k.
    const phi = Math.exp(-10 / 60);
    const plan = spec({
      ...stepTo(1),
      settings: { gain: 2.756941, integralTime: 10 / (Math.exp(10 / 60) - 1) },
      analyser: { every: 10, first: 0 },
      modes: [],
    });
    expect((2.756941 * (1 - phi)) / phi).toBeCloseTo(0.5, 6);
    // Going automatic is without a bump, so the step comes at the first result: the integral makes up for it.
    const { at } = follow(
      firstOrder(1, 60),
      { ...plan, setPoint: { times: [0, 5, 5], values: [0, 0, 1] } },
      [10, 20, 30, 40],
    );
    [0, 0.5, 0.75, 0.875].forEach((y, k) => {
      expect(at[k][0]).toBeCloseTo(y, 6);
    });
  });

  it('keeps the books: u(t) − u(0) = Kc[e(t) − e(0)] + (Kc/Ti)·Σ h·e, whatever the interval', () => {
    const gain = 1.7;
    const Ti = 37;
    const plan = spec({
      setPoint: { times: [0, 30, 30], values: [0, 0, 1] },
      settings: { gain, integralTime: Ti },
      analyser: { every: 7, first: 3, delay: 4 },
    });
    const { loop, at } = follow(firstOrder(1, 60), plan, [199.9]);
    const e = loop.history.results.map((r) => ({
      time: r.time,
      e: (r.time >= 30 ? 1 : 0) - (r.value as number),
    }));
    let sum = 0;
    let last = 0;
    for (const q of e) {
      sum += (q.time - last) * q.e;
      last = q.time;
    }
    expect(at[0][1]).toBeCloseTo(gain * (e[e.length - 1].e - 0) + (gain / Ti) * sum, 9);
  });

  it('sees an upset at 0+ after the first sample and its delay: 16 min at every 10 and 6 late', () => {
    const plan = spec({ analyser: { every: 10, delay: 6 } });
    const times = [15.99, 16.01];
    const { at } = follow(firstOrder(1, 60), plan, times, { load: [{ input: 1, times: [0], values: [1] }] });
    expect(at[0][1]).toBe(0);
    expect(at[1][1]).toBeLessThan(-0.1);
  });

  it('settles a load with IE = Δu·Ti/Kc', () => {
    // From the identity above: at the end e = 0, so (Kc/Ti)·IE = Δu = −load/k. IE is that of the held measurement.
    const plan = spec({ settings: { gain: 1.2, integralTime: 50 }, analyser: { every: 5, first: 5 } });
    const { loop } = follow(firstOrder(1, 60), plan, [3000], {
      load: [{ input: 1, times: [0], values: [1] }],
    });
    const ie = loop.history.results.reduce((s, r) => s + 5 * (r.value as number), 0);
    expect(ie).toBeCloseTo((1 * 50) / 1.2, 6);
  });

  it('goes automatic without a bump, with an error at hand', () => {
    const plan = spec({
      ...stepTo(1),
      auto: false,
      modes: [{ at: 15, auto: true }],
      analyser: { every: 10 },
    });
    const { at } = follow(firstOrder(1, 60), plan, [14.9, 15.1, 19.9, 20.1], { x0: 0.2, u0: 0.2 });
    expect(at[1][1]).toBe(at[0][1]);
    expect(at[2][1]).toBe(at[0][1]);
    // At the next result: Kc·h·e/Ti = 5·0.8/60 more.
    expect(at[3][1] - at[0][1]).toBeCloseTo((5 * 0.8) / 60, 9);
  });

  it('has derivative action on the measurement: a ramp of slope s adds Kc·Td·s in the end', () => {
    const ramp = [{ input: 1, times: [0, 4000], values: [0, 4000] }];
    const one = (derivativeTime: number): number => {
      const plan = spec({
        auto: true,
        settings: { gain: 1e-6, integralTime: 1e9, derivativeTime },
        analyser: { every: 1 },
      });
      return follow(firstOrder(1, 1), plan, [400.5], { load: ramp }).at[0][1];
    };
    // Reverse action: rising measurement lowers the output.
    expect(one(20) - one(0)).toBeCloseTo(-1e-6 * 20, 10);
  });

  it('filters the measurement by the first-order filter that is stated', () => {
    const plan = spec({
      ...stepTo(0),
      settings: { gain: 1, integralTime: 1e12, filter: 30 },
      analyser: { every: 10 },
    });
    const { at } = follow(
      firstOrder(0, 1e-3),
      plan,
      range(4, (k) => 10 * k + 15),
      { load: [{ input: 1, times: [0], values: [1] }] },
    );
    // The measurement is 1 from the start: filtered 1 − (T/(T + h))^k, and u = −that.
    at.forEach((y, k) => {
      expect(y[1]).toBeCloseTo(-(1 - (30 / 40) ** (k + 1)), 6);
    });
  });
});

describe('PI on the held value', () => {
  it('with Ti = T on a lag is a sampled integrator: e falls by 1 − κ with every sample', () => {
    // Kc·(1 + 1/(T·s)) before 1/(1 + T·s) is Kc/(T·s): y_k+1 = y_k + κ·e_k, κ = k·Kc·h/T.
    const kappa = 0.5;
    const plan = spec({
      setPoint: { times: [0, 0.001], values: [0, 1] },
      runs: 'scan',
      settings: { gain: (kappa * 60) / 10, integralTime: 60 },
    });
    const { at } = follow(
      firstOrder(1, 60),
      { ...plan, setPoint: { times: [0, 9.9999999, 9.9999999], values: [0, 0, 1] } },
      [20, 30, 40, 50],
    );
    at.forEach((y, k) => {
      expect(y[0]).toBeCloseTo(1 - (1 - kappa) ** (k + 1), 5);
    });
  });

  it('with short intervals is the continuous loop: load and set-point peaks of 1/(60 s + 1) with Kc 2, Ti 30', () => {
    // 60 y″ + 3 y′ + y/15 = load′: computed from the roots of the characteristic equation.
    const plan = spec({
      runs: 'scan',
      settings: { gain: 2, integralTime: 30 },
      analyser: { every: 0.02, first: 0.02 },
    });
    const load = [{ input: 1, times: [0], values: [1] }];
    const { at } = follow(firstOrder(1, 60), plan, [10, 30, 32.78, 60, 120], { load });
    [0.128751, 0.219334, 0.220325, 0.163513, 0.017906].forEach((y, k) => {
      expect(Math.abs(at[k][0] - y)).toBeLessThan(2e-4);
    });
    const moved = { ...plan, setPoint: { times: [0, 1e-6, 1e-6], values: [0, 0, 1] } };
    const times = Array.from({ length: 400 }, (_, k) => 0.5 * (k + 1));
    const y = follow(firstOrder(1, 60), moved, times).at.map((q) => q[0]);
    const top = y.indexOf(Math.max(...y));
    expect(Math.abs(y[top] - 1.07907)).toBeLessThan(3e-4);
    expect(Math.abs(times[top] - 87.63)).toBeLessThan(0.6);
  });
});

describe('limits', () => {
  /** Kc 2, Ti 60, output in 0..1, I = 0.5, e = +1 for an hour, then −0.2; the plant does not answer. */
  const windUp = (runs: 'scan' | 'on each result', every: number) => {
    const plan = spec({
      runs,
      settings: { gain: 2, integralTime: 60 },
      move: { low: 0, high: 1 },
      analyser: { every, first: every },
      setPoint: { times: [0, 0.01, 0.01, 60 + 0.01, 60 + 0.01], values: [0, 0, 1, 1, -0.2] },
    });
    return follow(firstOrder(0, 60), plan, [59.9, 60.4, 60.9], { u0: 0.5 });
  };

  it('at a limit the integral tends to it with Ti: 1 − 0.5/e after one Ti, and the output leaves at once', () => {
    const { at } = windUp('scan', 0.02);
    expect(at[0][1]).toBe(1);
    // I = 0.81606 then u = I − 0.4; a wound-up integral would hold the output at the limit for 165 min more.
    expect(Math.abs(at[1][1] - (1 - 0.5 * Math.exp(-1) - 0.4))).toBeLessThan(4e-3);
  });

  it('on each result alike, by backward Euler', () => {
    const { at, loop } = windUp('on each result', 0.1);
    expect(at[0][1]).toBe(1);
    expect(Math.abs(at[1][1] - 0.41606)).toBeLessThan(4e-3);
    expect(loop.history.atLimit).toBeGreaterThan(58);
  });

  it('a slew turns moves into ramps, up and down at their own rates, and the integral does not wind up on them', () => {
    const plan = spec({
      settings: { gain: 1, integralTime: 1e9 },
      move: { up: 0.01, down: 0.05 },
      setPoint: { times: [0, 5, 5, 45, 45], values: [0, 0, 1, 1, 0] },
    });
    const { at, loop } = follow(firstOrder(0, 60), plan, [10, 20, 30, 50, 52, 54]);
    [0, 0.1, 0.2, 0.4, 0.3, 0.2].forEach((u, k) => {
      expect(at[k][1]).toBeCloseTo(u, 9);
    });
    loop.finish(54);
    expect(loop.history.travel).toBeCloseTo(0.6, 9);
    expect(loop.history.slewing).toBeGreaterThan(40);
  });
});

it('a ramp of the slew ends at the limit, however long the next result is in coming', () => {
  const plan = spec({
    settings: { gain: 10, integralTime: 1e9 },
    analyser: { every: 100, first: 10 },
    move: { low: 0, high: 0.2, up: 0.01, down: 0.01 },
    setPoint: { times: [0, 5, 5], values: [0, 0, 1] },
  });
  const { at, loop } = follow(firstOrder(0, 60), plan, [20, 29.9, 30.1, 60, 109, 400]);
  [0.1, 0.199, 0.2, 0.2, 0.2, 0.2].forEach((u, k) => {
    expect(at[k][1]).toBeCloseTo(u, 9);
  });
  loop.finish(400);
  expect(loop.history.travel).toBeCloseTo(0.2, 9);
});

it('on a scan with a slew the output catches up with the demand, and goes on with it', () => {
  const plan = spec({
    runs: 'scan',
    settings: { gain: 0.5, integralTime: 60 },
    analyser: { every: 10, delay: 6, noise: { absolute: 0.02 } },
    move: { low: -0.4, high: 0.4, up: 0.01, down: 0.01 },
  });
  const load = [{ input: 1, times: [0, 30, 30, 300, 300], values: [0, 0, 0.3, 0.3, -0.2] }];
  const { at, steps } = follow(firstOrder(1, 60), plan, [20, 299, 900], { load });
  expect(steps).toBeLessThan(6000);
  // The noise of 0.02 goes through the loop; without integral action 0.3 and 0.2 would be left.
  expect(Math.abs(at[1][0])).toBeLessThan(0.1);
  expect(Math.abs(at[2][1] - 0.2)).toBeLessThan(0.1);
});

describe('a loop in a run', () => {
  const plan = spec({ analyser: { every: 10, delay: 6, noise: { absolute: 0.1 }, dropout: 0.2 }, seed: 3 });
  const load = [{ input: 1, times: [0, 25, 25, 90], values: [0, 0, 1, 0.5] }];

  it('is shifted with its analyser: nothing depends on when the clock began', () => {
    const late = { ...plan, analyser: { ...plan.analyser, first: 40 } };
    const shifted = load.map((l) => ({ ...l, times: l.times.map((t) => t + 30) }));
    const times = range(20, (k) => 3 + 9 * k);
    const a = follow(firstOrder(1, 60), { ...plan, settings: { ...plan.settings } }, times, { load });
    const b = follow(
      firstOrder(1, 60),
      late,
      times.map((t) => t + 30),
      { load: shifted },
    );
    // The first execution counts its interval from the start; before the upset the error is noise alone.
    const quiet = { ...plan, analyser: { ...plan.analyser, noise: { absolute: 0 }, dropout: 0 } };
    const c = follow(firstOrder(1, 60), quiet, times, { load });
    const d = follow(
      firstOrder(1, 60),
      { ...quiet, analyser: { ...quiet.analyser, first: 40 } },
      times.map((t) => t + 30),
      { load: shifted },
    );
    c.at.forEach((y, k) => {
      expect(d.at[k][0]).toBeCloseTo(y[0], 9);
    });
    expect(a.at[10][0]).not.toBe(b.at[10][0]);
  });

  it('meets the same noise whatever its settings are', () => {
    const zero = firstOrder(0, 60);
    const noisy = (gain: number) =>
      follow(zero, { ...plan, settings: { ...plan.settings, gain } }, [500]).loop.history.results.map(
        (r) => r.value,
      );
    const first = noisy(1);
    expect(noisy(5)).toEqual(first);
    expect(first.filter((v) => v === null).length).toBeGreaterThan(1);
    const good = first.filter((v): v is number => v !== null);
    expect(Math.sqrt(good.reduce((s, v) => s + v * v, 0) / good.length)).toBeGreaterThan(0.05);
    expect(Math.sqrt(good.reduce((s, v) => s + v * v, 0) / good.length)).toBeLessThan(0.2);
  });

  it('a failed result holds the last, or puts the loop in manual where that is asked for', () => {
    const failing = { ...plan, analyser: { ...plan.analyser, dropout: 0.999999 } };
    const held = follow(firstOrder(1, 60), failing, [300], { load });
    expect(held.at[0][1]).toBe(0);
    expect(held.loop.automatic).toBe(true);
    const manual = { ...failing, analyser: { ...failing.analyser, onBad: 'manual' as const } };
    expect(follow(firstOrder(1, 60), manual, [300], { load }).loop.automatic).toBe(false);
  });

  it('a composite is the mean since the sample before', () => {
    // y = t on a plant that follows at once.
    const ramp = [{ input: 1, times: [0, 1000], values: [0, 1000] }];
    const still = spec({ auto: false, analyser: { every: 10, takes: 'composite' } });
    const { loop } = follow(firstOrder(0, 1e-6), still, [100], { load: ramp });
    loop.history.results.forEach((r, k) => {
      expect(r.value).toBeCloseTo(10 * k + 5, 4);
    });
  });
});

import { describe, expect, it } from 'vitest';
import type { LinearPlant } from '../../src/control/linearise.ts';
import { margins } from '../../src/control/margins.ts';
import { OpenLoops, SampledPlant, type Sampling } from '../../src/control/sampled.ts';
import type { PidSettings } from '../../src/control/spec.ts';
import { over, scale, times, turn } from '../../src/math/complex.ts';

/** k/(1 + T·s) as a state. */
const lag = (T: number, k = 1): LinearPlant => ({
  a: { n: 1, m: 1, a: Float64Array.of(-1 / T) },
  b: { n: 1, m: 1, a: Float64Array.of(k / T) },
  c: { n: 1, m: 1, a: Float64Array.of(1) },
  d: { n: 1, m: 1, a: Float64Array.of(0) },
});
const settings = (gain: number, integralTime: number): PidSettings => ({
  sense: -1,
  gain,
  integralTime,
  derivativeTime: 0,
  filter: 0,
  setPointWeight: 1,
});
const sampled = (T: number, s: Partial<Sampling>, gain: number, Ti: number) => {
  const loops = new OpenLoops(
    new SampledPlant(lag(T), { every: 10, delay: 0, takes: 'grab', runs: 'scan', ...s }),
  );
  return margins(loops.loop(settings(gain, Ti)), 1e-4, loops.top);
};

describe('margins of a sampled loop, exact in z', () => {
  /*
   * FOPDT with Ti = T and PI on the held value is κ·z^−(d+1)/(1 − z⁻¹), κ = k·Kc·h/T. From |1 − e^−jφ| = 2 sin(φ/2):
   * κ_u = 2 sin(π/(2(2d + 1))), PM = 90° − (2d + 1)·asin(κ/2).
   */
  it.each([
    [0, 0.5, 4, 75.522, 1.3333],
    [1, 1 / 3, 3, 61.218, 1.6119],
    [1, 0.5, 2, 46.567, 2.1974],
    [2, 0.3, 2.0601, 46.865, 2.1523],
  ])('sampled integrator, d = %i, κ = %f', (d, kappa, GM, PM, Ms) => {
    const m = sampled(60, { delay: 10 * d }, (kappa * 60) / 10, 60);
    expect(Math.abs(m.gain - GM)).toBeLessThan(6e-5);
    expect(m.gain).toBeCloseTo((2 * Math.sin(Math.PI / (2 * (2 * d + 1)))) / kappa, 8);
    expect(m.phase).toBeCloseTo(90 - ((2 * d + 1) * Math.asin(kappa / 2) * 180) / Math.PI, 6);
    expect(Math.abs(m.phase - PM)).toBeLessThan(6e-4);
    expect(Math.abs(m.sensitivity - Ms)).toBeLessThan(6e-5);
    expect(m.stable).toBe(true);
  });

  it('PI on each result, T 60, θ 10, h 10, Kc 2, Ti 60', () => {
    // L = 2·(1 − φ)·z⁻²/(1 − φz⁻¹)·(1 + (1/6)/(1 − z⁻¹)).
    const m = sampled(60, { delay: 10, runs: 'on each result' }, 2, 60);
    expect(Math.abs(m.gain - 2.7965)).toBeLessThan(6e-5);
    expect(Math.abs(m.phase - 60.913)).toBeLessThan(6e-4);
    expect(Math.abs(m.sensitivity - 1.6723)).toBeLessThan(6e-5);
  });

  it('FOPDT 1/60/4, analyser late by 6 every 10: the loop on each result and on the held value differ', () => {
    expect(sampled(60, { delay: 10, runs: 'on each result' }, 2, 60).gain).toBeCloseTo(2.7965, 3);
    expect(sampled(60, { delay: 10 }, 2, 60).gain).toBeCloseTo(3, 6);
  });

  it('a fractional delay is exact: dead time in the plant and in the analyser are one', () => {
    // ZOH of k·e^{−θs}/(1 + Ts), θ = d·h + δ: (1 − e^{−(h−δ)/T} + (e^{−(h−δ)/T} − e^{−h/T})·z⁻¹)·z^{−d−1}/(1 − e^{−h/T}z⁻¹).
    const plant = new SampledPlant(lag(60), { every: 10, delay: 16, takes: 'grab', runs: 'on each result' });
    for (const w of [0.01, 0.1, 0.3]) {
      const [a, b] = [Math.exp(-4 / 60), Math.exp(-1 / 6)];
      const back = turn(-10 * w);
      const top = { re: 1 - a + (a - b) * back.re, im: (a - b) * back.im };
      const bottom = { re: 1 - b * back.re, im: -b * back.im };
      const exact = over(times(top, turn(-20 * w)), bottom);
      const { held } = plant.response(w);
      expect(held.re).toBeCloseTo(exact.re, 12);
      expect(held.im).toBeCloseTo(exact.im, 12);
    }
  });

  it('a composite is the mean over the interval: of an integrator half an interval later', () => {
    // y = ∫u: y_k = h·z⁻¹/(1 − z⁻¹); its mean since the sample before is (y_k + y_k−1)/2.
    const slow: LinearPlant = { ...lag(1), a: { n: 1, m: 1, a: Float64Array.of(0) } };
    const plant = new SampledPlant(slow, { every: 10, delay: 0, takes: 'composite', runs: 'on each result' });
    const grab = new SampledPlant(slow, { every: 10, delay: 0, takes: 'grab', runs: 'on each result' });
    for (const w of [0.01, 0.1, 0.3]) {
      const exact = scale(
        times(grab.response(w).held, { re: 1 + Math.cos(10 * w), im: -Math.sin(10 * w) }),
        0.5,
      );
      expect(plant.response(w).held.re).toBeCloseTo(exact.re, 9);
      expect(plant.response(w).held.im).toBeCloseTo(exact.im, 9);
    }
  });

  it('knows an unstable loop from a stable one', () => {
    expect(sampled(60, { delay: 10 }, 6.1, 60).stable).toBe(false);
    expect(sampled(60, { delay: 10 }, 5.9, 60).stable).toBe(true);
  });
});

describe('margins of a continuous loop', () => {
  /** k·Kc/(T·s)·e^{−θs} after cancelling the lag, K = k·Kc/T: GM = π/(2Kθ), PM = 90° − Kθ, delay margin π/(2K) − θ. */
  const L = (K: number, theta: number) => (w: number) => times({ re: 0, im: -K / w }, turn(-w * theta));

  it('SIMC on FOPDT: GM 3.14, PM 61.4°, Ms 1.59, delay margin 2.14 θ (Skogestad 2003, table)', () => {
    const m = margins(L(0.5, 1), 1e-3, 20);
    expect(m.gain).toBeCloseTo(Math.PI, 6);
    expect(m.phase).toBeCloseTo(90 - (0.5 * 180) / Math.PI, 6);
    expect(m.delay).toBeCloseTo(2.141593, 5);
    expect(m.sensitivity).toBeCloseTo(1.59049, 5);
    expect(m.crossover180).toBeCloseTo(1.570796, 5);
    expect(m.crossover).toBeCloseTo(0.5, 6);
  });

  it.each([
    [0.5, 2.356, 51.8, 1.917],
    [1.5, 3.927, 67.08, 1.438],
    [2, 4.712, 70.9, 1.349],
    [3, 6.283, 75.68, 1.249],
  ])('SIMC with τc = %f θ', (tauc, GM, PM, Ms) => {
    const m = margins(L(1 / (tauc + 1), 1), 1e-3, 30);
    expect(Math.abs(m.gain - GM)).toBeLessThan(6e-4);
    expect(Math.abs(m.phase - PM)).toBeLessThan(6e-3);
    expect(Math.abs(m.sensitivity - Ms)).toBeLessThan(6e-4);
  });

  it('half-rule example of Skogestad (2003), case E2: Ms 1.66 on the full plant', () => {
    const s = (w: number, T: number) => ({ re: 1, im: w * T });
    const plant = (w: number) =>
      over(
        times(s(w, -0.3), s(w, 0.08)),
        [2, 1, 0.4, 0.2, 0.05, 0.05, 0.05].map((T) => s(w, T)).reduce((a, b) => times(a, b)),
      );
    const loop = (w: number) => times(scale(plant(w), 0.8503), over(s(w, 2.5), { re: 0, im: 2.5 * w }));
    expect(margins(loop, 1e-3, 50).sensitivity).toBeCloseTo(1.6612, 3);
  });
});

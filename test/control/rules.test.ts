import { describe, expect, it } from 'vitest';
import { forms } from '../../src/control/forms.ts';
import { fitResponse, fopdtStep, leastSquares, twoPoint } from '../../src/control/identify.ts';
import { margins } from '../../src/control/margins.ts';
import {
  amigo,
  amigoPid,
  cohenCoon,
  type Fopdt,
  type Settings,
  simc,
  tyreusLuyben,
  zieglerNichols,
  zieglerNicholsCurve,
  zieglerNicholsPid,
} from '../../src/control/rules.ts';
import { over, scale, times, turn } from '../../src/math/complex.ts';

const plant: Fopdt = { gain: 1, lag: 10, delay: 2 };
/** Ku and Pu of that plant, from ω with atan(10 ω) + 2 ω = π. */
const [Ku, Pu] = [8.50242, 7.44152];

/** Values recomputed from the papers' formulas; sources stand beside the rules themselves. */
describe('rules on k = 1, T = 10, θ = 2', () => {
  const expectPair = (s: Settings, gain: number, Ti: number, Td = 0): void => {
    expect(Math.abs(s.gain - gain)).toBeLessThan(6e-5);
    expect(Math.abs(s.integralTime - Ti)).toBeLessThan(6e-5);
    expect(Math.abs(s.derivativeTime - Td)).toBeLessThan(6e-5);
  };
  it('SIMC', () => expectPair(simc(plant), 2.5, 10));
  it('AMIGO', () => expectPair(amigo(plant), 1.20556, 7.76522));
  it('AMIGO PID', () => expectPair(amigoPid(plant), 2.45, 5.86667, 0.9434));
  it('Ziegler and Nichols, ultimate', () => expectPair(zieglerNichols(Ku, Pu), 3.86474, 6.20127));
  it('Ziegler and Nichols, ultimate, PID', () =>
    expectPair(zieglerNicholsPid(Ku, Pu), 5.00142, 3.72076, 0.93019));
  it('Ziegler and Nichols, curve', () => expectPair(zieglerNicholsCurve(plant), 4.5, 6.6));
  it('Cohen and Coon', () => expectPair(cohenCoon(plant), 4.58333, 4.70769));
  it('Tyreus and Luyben', () => expectPair(tyreusLuyben(Ku, Pu), 2.657, 16.37134));
  it('SIMC on the half-rule examples of Skogestad (2003): E1 and E2', () => {
    expectPair(simc({ gain: 1, lag: 1.1, delay: 0.1 }), 5.5, 0.8);
    expect(Math.abs(simc({ gain: 1, lag: 2.5, delay: 1.47 }).gain - 0.8503)).toBeLessThan(6e-5);
  });
});

describe('Ms of those settings on their plant', () => {
  const ms = (p: Fopdt, s: Settings): number =>
    margins(
      (w) =>
        times(
          scale(times(over({ re: p.gain, im: 0 }, { re: 1, im: w * p.lag }), turn(-w * p.delay)), s.gain),
          { re: 1, im: -1 / (w * s.integralTime) },
        ),
      1e-4,
      30,
      600,
    ).sensitivity;
  it.each([
    ['SIMC', simc(plant), 1.59],
    ['AMIGO', amigo(plant), 1.264],
    ['Ziegler and Nichols', zieglerNicholsCurve(plant), 2.948],
    ['Cohen and Coon', cohenCoon(plant), 3.759],
  ])('%s', (_, s, value) => expect(Math.abs(ms(plant, s) - value)).toBeLessThan(0.012));
  it('AMIGO at θ/T = 1 and 5', () => {
    expect(ms({ gain: 1, lag: 1, delay: 1 }, amigo({ gain: 1, lag: 1, delay: 1 }))).toBeCloseTo(1.249, 3);
    expect(ms({ gain: 1, lag: 1, delay: 5 }, amigo({ gain: 1, lag: 1, delay: 5 }))).toBeCloseTo(1.486, 3);
  });
});

describe('identification', () => {
  const times_ = Array.from({ length: 200 }, (_, k) => 0.5 * k);
  const test = {
    step: 0.05,
    times: times_,
    values: times_.map((t) => fopdtStep({ gain: -1.2, lag: 10, delay: 2 }, 0.05, t)),
  };
  it('least squares gives back the plant that made the test', () => {
    const f = leastSquares(test);
    expect(f?.gain).toBeCloseTo(-1.2, 6);
    expect(f?.lag).toBeCloseTo(10, 4);
    expect(f?.delay).toBeCloseTo(2, 4);
    expect(f?.error).toBeLessThan(1e-6);
  });
  it('two-point methods: Smith exact, Sundaresan and Krishnaswamy 0.7 % off in T by their own coefficients', () => {
    const a = twoPoint(test, 'smith');
    expect(a?.lag).toBeCloseTo(10, 1);
    expect(a?.delay).toBeCloseTo(2, 1);
    const b = twoPoint(test, 'sundaresan-krishnaswamy');
    expect((b?.lag ?? 0) / 10).toBeCloseTo(0.67 / 0.6748, 2);
  });
  it('a frequency response likewise', () => {
    const omega = [0.01, 0.03, 0.1, 0.3];
    const g = omega.map((w) => ({
      omega: w,
      g: times(over({ re: -1.2, im: 0 }, { re: 1, im: 10 * w }), turn(-2 * w)),
    }));
    const f = fitResponse(g, { gain: -1, lag: 7, delay: 3 });
    expect(f.gain).toBeCloseTo(-1.2, 4);
    expect(f.lag).toBeCloseTo(10, 3);
    expect(f.delay).toBeCloseTo(2, 3);
  });
});

describe('forms', () => {
  it('series and standard are the same controller', () => {
    // Kc(1 + 1/(τI s))(1 + τD s) with c = 1 + τD/τI: Kc' = Kc·c, Ti = τI·c, Td = τD/c.
    const c = 1 + 2 / 8;
    const f = forms(
      { gain: 3 * c, integralTime: 8 * c, derivativeTime: 2 / c },
      { measurement: 2, output: 0.8 },
    );
    expect(f.series?.gain).toBeCloseTo(3, 12);
    expect(f.series?.integralTime).toBeCloseTo(8, 12);
    expect(f.series?.derivativeTime).toBeCloseTo(2, 12);
    expect(f.parallel).toEqual({ proportional: 3.75, integral: 0.375, derivative: 6 });
    expect(f.percentGain).toBeCloseTo((3.75 * 2) / 0.8, 12);
    expect(f.proportionalBand).toBeCloseTo(100 / ((3.75 * 2) / 0.8), 12);
    expect(forms({ gain: 1, integralTime: 3, derivativeTime: 1 }, null).series).toBeNull();
  });
});

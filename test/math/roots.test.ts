import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { crossing, risingRoot } from '../../src/math/roots.ts';

/** Counts evaluations. */
function counting(f: (t: number) => number): { readonly f: (t: number) => number; calls: number } {
  const c = {
    calls: 0,
    f: (t: number): number => {
      c.calls += 1;
      return f(t);
    },
  };
  return c;
}

const PRECISION = 1e-10;

describe('a crossing', () => {
  const shapes: [string, (t: number) => number, number][] = [
    ['a line', (t) => t - 0.3, 0.3],
    ['a falling line', (t) => 0.7 - t, 0.7],
    ['a cubic that is flat at its root', (t) => (t - 0.4) ** 3, 0.4],
    ['a ninth power', (t) => (t - 0.6) ** 9, 0.6],
    ['a front', (t) => Math.tanh(1e6 * (t - 0.123)), 0.123],
    ['a jump', (t) => (t < 0.77 ? -1 : 1), 0.77],
    ['a jump between unequal sides', (t) => (t < 0.77 ? -1e-9 : 1e9), 0.77],
    ['a decay', (t) => Math.exp(-50 * t) - 1e-3, Math.log(1e3) / 50],
    ['a root beside the start', (t) => t - 1e-8, 1e-8],
    ['a root beside the end', (t) => t - (1 - 1e-8), 1 - 1e-8],
  ];

  it.each(shapes)('of %s is found from its far side', (_, shape, root) => {
    const { f } = counting(shape);
    const at = crossing(f, 0, 1, PRECISION);
    expect(at - root).toBeGreaterThan(-1e-16);
    expect(at - root).toBeLessThan(PRECISION * 1.01);
    expect(Math.sign(f(at)) * Math.sign(f(1))).toBeGreaterThanOrEqual(0);
  });

  it.each(shapes)('of %s takes no more than three times bisection', (_, shape) => {
    const c = counting(shape);
    crossing(c.f, 0, 1, PRECISION);
    expect(c.calls).toBeLessThanOrEqual(2 + 3 * Math.ceil(Math.log2(1 / PRECISION)));
  });

  it('of something smooth is cheap', () => {
    const c = counting((t) => Math.sin(t) - 0.5);
    expect(Math.abs(crossing(c.f, 0, 1.5, 1e-12) - Math.PI / 6)).toBeLessThan(1e-12);
    expect(c.calls).toBeLessThan(15);
  });

  it('at the start is the start, and at the end the end', () => {
    expect(crossing((t) => t, 0, 1, PRECISION)).toBe(0);
    expect(crossing((t) => t - 1, 0, 1, PRECISION)).toBe(1);
  });

  it('comes to an end where the clock is too coarse for the precision', () => {
    const root = 1e9 + 0.25;
    const c = counting((t) => t - root);
    expect(Math.abs(crossing(c.f, 1e9, 1e9 + 1, 1e-12) - root)).toBeLessThan(1e-6);
    expect(c.calls).toBeLessThan(210);
  });

  it('among several is one of them', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: 0.01, max: 0.99, noNaN: true }), { minLength: 1, maxLength: 5 }),
        (roots) => {
          fc.pre(roots.length % 2 === 1);
          const f = (t: number): number => roots.reduce((p, r) => p * (t - r), 1);
          const at = crossing(f, 0, 1, PRECISION);
          expect(Math.min(...roots.map((r) => Math.abs(at - r)))).toBeLessThan(1e-4);
          expect(f(at)).toBeGreaterThanOrEqual(0);
        },
      ),
    );
  });
});

describe('the root of a rising function', () => {
  const cases: [string, (x: number) => number, (x: number) => number, number, number, number][] = [
    ['a line', (x) => 2 * x - 3, () => 2, -10, 10, 1.5],
    [
      'an exponential, started where Newton overshoots',
      (x) => Math.exp(x) - 5,
      Math.exp,
      -50,
      50,
      Math.log(5),
    ],
    [
      'an arctangent, on which Newton alone diverges',
      (x) => Math.atan(x - 3),
      (x) => 1 / (1 + (x - 3) ** 2),
      -50,
      90,
      3,
    ],
    ['a slope of zero at the guess', (x) => x ** 3 - 8, (x) => 3 * x * x, -5, 5, 2],
    ['a slope without bound', (x) => Math.cbrt(x - 1), (x) => 1 / (3 * Math.cbrt(x - 1) ** 2), -4, 5, 1],
    ['a root at the lower end', (x) => x - 1, () => 1, 1, 5, 1],
    ['a root at the upper end', (x) => x - 5, () => 1, 1, 5, 5],
    ['a large root', (x) => x / 1e12 - 7, () => 1e-12, 0, 1e15, 7e12],
    ['a small root', (x) => x * 1e12 - 7, () => 1e12, 0, 1e3, 7e-12],
    ['a slope that is wrong', (x) => x ** 3 - 2, () => 0.01, 0, 5, Math.cbrt(2)],
  ];

  it.each(cases)('is found to twelve digits: %s', (_, f, slope, lo, hi, root) => {
    for (const guess of [lo, hi, (lo + hi) / 2, lo - 1e6, hi + 1e6, 0]) {
      const { value, iterations } = risingRoot(f, slope, lo, hi, guess);
      expect(Math.abs(value - root), `from ${guess}`).toBeLessThanOrEqual(1e-12 * Math.abs(root));
      expect(value).toBeGreaterThanOrEqual(lo);
      expect(value).toBeLessThanOrEqual(hi);
      expect(iterations).toBeLessThanOrEqual(100);
    }
  });

  it('is near by Newton where that converges', () => {
    expect(
      risingRoot(
        (x) => x * x - 2,
        (x) => 2 * x,
        1,
        2,
        1.5,
      ).iterations,
    ).toBeLessThanOrEqual(5);
  });

  it('at zero is found although nothing is small against it', () => {
    const { value } = risingRoot(
      (x) => x + x ** 3,
      (x) => 1 + 3 * x * x,
      -1,
      2,
      1,
    );
    expect(Math.abs(value)).toBeLessThan(1e-12);
  });

  it('must exist', () => {
    expect(() =>
      risingRoot(
        (x) => x,
        () => 1,
        1,
        2,
        1.5,
      ),
    ).toThrow('no root between 1 and 2');
    expect(() =>
      risingRoot(
        (x) => x,
        () => 1,
        -2,
        -1,
        -1.5,
      ),
    ).toThrow(RangeError);
  });
});

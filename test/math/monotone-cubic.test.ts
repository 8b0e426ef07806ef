import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { MonotoneCubic } from '../../src/math/monotone-cubic.ts';

/** Columns that rise by steps from 1e-6 to 1e6. */
const steps = fc.integer({ min: -6000, max: 6000 }).map((e) => 10 ** (e / 1000));
const rising = fc
  .array(fc.tuple(steps, steps), { minLength: 1, maxLength: 12 })
  .chain((increments) => fc.tuple(fc.constant(increments), fc.double({ min: -10, max: 10, noNaN: true })))
  .map(([increments, start]) => {
    const x = [start];
    const y = [1 - start];
    for (const [dx, dy] of increments) {
      x.push(x[x.length - 1] + dx);
      y.push(y[y.length - 1] + dy);
    }
    return { x, y };
  })
  .filter(({ x, y }) => x.every((v, i) => i === 0 || (v > x[i - 1] && y[i] > y[i - 1])));

/** Points inside each interval and a little beyond both ends. */
function looks(x: readonly number[]): number[] {
  const span = x[x.length - 1] - x[0];
  const inside = x.slice(1).flatMap((b, i) => [0, 0.1, 0.37, 0.5, 0.9].map((s) => x[i] + s * (b - x[i])));
  return [x[0] - span / 7, ...inside, x[x.length - 1], x[x.length - 1] + span / 5];
}

describe('the monotone cubic', () => {
  it('has the values and slopes of SciPy where both have the same tangents', () => {
    /*
     * SciPy 1.10.1: p = PchipInterpolator([0, 1, 2.5, 4, 7, 8], [0, 2, 2.5, 6, 6.5, 11]); p(q), p(q, 1), and
     * c = PchipInterpolator([0, .028, .079, .186, .49, .74], [0, .486, .921, 1.628, 2.04, 2.08]), a copper isotherm.
     * Its last tangent is 0 there, which ours may not be: the last interval is left out.
     */
    const p = new MonotoneCubic([0, 1, 2.5, 4, 7, 8], [0, 2, 2.5, 6, 6.5, 11]);
    const c = new MonotoneCubic([0, 0.028, 0.079, 0.186, 0.49, 0.74], [0, 0.486, 0.921, 1.628, 2.04, 2.08]);
    const of: [MonotoneCubic, number[], number[], number[]][] = [
      [
        p,
        [0.3, 1, 1.7, 2.6, 3.9, 5.5, 6.999, 7.4, 8],
        [
          0.7861999999999999, 2.0, 2.242874074074074, 2.593265330904676, 5.9290479659987865, 6.23649272685292,
          6.499619919874949, 7.602760563380283, 11.0,
        ],
        [
          2.5086666666666666, 0.6, 0.20644444444444443, 1.265355191256831, 1.0581602914389823,
          0.06886400369429696, 0.37987860342748636, 4.6476995305164355, 5.583333333333334,
        ],
      ],
      [
        c,
        [0.01, 0.03, 0.05, 0.1, 0.2, 0.3, 0.48],
        [
          0.19919259457349753, 0.509224682926724, 0.7023546906878319, 1.0862361491718309, 1.662400060427309,
          1.862861493104145, 2.0368817044783456,
        ],
        [
          19.04659617843356, 11.398696440369038, 8.272717224483202, 8.055957421536554, 2.400320433364518,
          1.6178548686135, 0.34469017649409106,
        ],
      ],
    ];
    for (const [curve, at, value, slope] of of)
      at.forEach((x, i) => {
        expect(Math.abs(curve.value(x) / value[i] - 1)).toBeLessThan(1e-13);
        expect(Math.abs(curve.slope(x) / slope[i] - 1)).toBeLessThan(1e-11);
      });
  });

  it('passes one huge jump without a swing', () => {
    // SciPy 1.10.1: PchipInterpolator([0, 1, 1.0001, 2], [0, 1e-3, 1e3, 1e3 + 1e-3]) at 1.00005.
    const x = [0, 1, 1.0001, 2];
    const y = [0, 1e-3, 1e3, 1e3 + 1e-3];
    const curve = new MonotoneCubic(x, y);
    expect(Math.abs(curve.value(1.00005) / 500.0005000016615 - 1)).toBeLessThan(1e-9);
    expect(Math.abs(curve.slope(1.00005) / 14999984.998501725 - 1)).toBeLessThan(1e-9);
    expect(curve.value(0.999)).toBeLessThan(1e-3);
    expect(curve.value(1.001)).toBeGreaterThan(1e3);
    for (const v of [5e-4, 1e-3, 1, 500, 1e3, 1e3 + 5e-4, 2e3]) {
      const at = curve.inverse(v);
      // The digits of the argument, as the front stretches them.
      expect(Math.abs(curve.value(at) - v)).toBeLessThan(1e-13 * (v + curve.slope(at) * at));
    }
  });

  it('goes through its points, rises between and beyond them', () => {
    fc.assert(
      fc.property(rising, ({ x, y }) => {
        const curve = new MonotoneCubic(x, y);
        x.forEach((v, i) => {
          expect(curve.value(v)).toBe(y[i]);
        });
        const at = looks(x);
        for (const v of at) expect(curve.slope(v)).toBeGreaterThanOrEqual(0);
        at.slice(1).forEach((v, i) => {
          const size = Math.abs(curve.value(v)) + Math.abs(y[0]);
          expect(curve.value(v) - curve.value(at[i])).toBeGreaterThanOrEqual(-1e-15 * size);
        });
        // Straight beyond both ends, and truly rising there: an isotherm must have an inverse everywhere.
        expect(curve.slope(x[0] - 1)).toBeGreaterThan(0);
        expect(curve.slope(x[x.length - 1] + 1)).toBeGreaterThan(0);
      }),
      { numRuns: 300 },
    );
  });

  it('has the slope of its values', () => {
    fc.assert(
      fc.property(rising, ({ x, y }) => {
        const curve = new MonotoneCubic(x, y);
        for (let i = 0; i + 1 < x.length; i++) {
          const width = x[i + 1] - x[i];
          const rise = y[i + 1] - y[i];
          // Differences across an interval are exact for a cubic, but for what its values lose in digits.
          const h = 0.05 * width;
          const lost = (1e-14 * (Math.abs(y[i + 1]) + Math.abs(y[0]))) / h + 1e-12 * (rise / width);
          const digits = (Math.abs(x[i + 1]) * 1e-14 * rise) / (width * h);
          for (const s of [0.2, 0.5, 0.8]) {
            const at = x[i] + s * width;
            const near = curve.value(at + h) - curve.value(at - h);
            const far = curve.value(at + 2 * h) - curve.value(at - 2 * h);
            const difference = (8 * near - far) / (12 * h);
            expect(Math.abs(curve.slope(at) - difference)).toBeLessThanOrEqual(10 * (lost + digits));
          }
        }
      }),
      { numRuns: 300 },
    );
  });

  it('has the inverse of its values', () => {
    fc.assert(
      fc.property(rising, ({ x, y }) => {
        const curve = new MonotoneCubic(x, y);
        for (const v of looks(y)) {
          const at = curve.inverse(v);
          const wrong = Math.abs(curve.value(at) - v);
          // The digits of v, and those of x as the curve stretches them.
          const allowed = 1e-12 * (Math.abs(v) + Math.abs(y[0]) + curve.slope(at) * Math.abs(at));
          expect(wrong, `${v} at ${at}`).toBeLessThanOrEqual(allowed + 1e-300);
        }
      }),
      { numRuns: 300 },
    );
  });

  it('is smooth at its points', () => {
    const curve = new MonotoneCubic([0, 1, 3, 4], [0, 2, 3, 9]);
    for (const v of [0, 1, 3])
      expect(Math.abs(curve.slope(v - 1e-9) - curve.slope(v + 1e-9))).toBeLessThan(1e-7);
  });

  it('is the line through two points, and beyond the last of more its last secant', () => {
    const line = new MonotoneCubic([1, 3], [10, 14]);
    for (const v of [-5, 1, 1.5, 3, 10]) {
      expect(line.value(v)).toBeCloseTo(8 + 2 * v, 12);
      expect(line.slope(v)).toBeCloseTo(2, 12);
      expect(line.inverse(8 + 2 * v)).toBeCloseTo(v, 12);
    }
    const bent = new MonotoneCubic([0, 1, 2], [0, 5, 6]);
    expect(bent.value(5)).toBeCloseTo(6 + 3, 12);
  });

  it('keeps its first tangent above zero where data would turn it', () => {
    // The three-point formula gives (3·1 − 100)/2 < 0 here.
    const curve = new MonotoneCubic([0, 1, 2], [0, 1, 101]);
    expect(curve.slope(0)).toBeCloseTo(0.1, 14);
    expect(curve.inverse(-1)).toBeCloseTo(-10, 12);
  });

  it.each<[string, number[], number[], string]>([
    ['one point', [1], [1], 'at least two points'],
    ['columns of unequal length', [1, 2], [1], 'at least two points'],
    ['a flat', [1, 2, 3], [1, 1, 2], 'point 2 does not rise'],
    ['a fall', [1, 2, 3], [1, 2, 1], 'point 3 does not rise'],
    ['a repeated abscissa', [1, 1], [1, 2], 'point 2 does not rise'],
    ['what is no number', [1, Number.NaN], [1, 2], 'point 2 does not rise'],
  ])('refuses %s', (_, x, y, message) => {
    expect(() => new MonotoneCubic(x, y)).toThrow(message);
  });
});

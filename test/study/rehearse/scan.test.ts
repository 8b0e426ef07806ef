import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { contourPieces } from '../../../src/study/rehearse/contour.ts';
import { keptStretches, spread, type Trial } from '../../../src/study/rehearse/scan.ts';

const of = (excess: (v: number) => number, rough = excess): Trial => ({
  holds: (v) => !(rough(v) > 0),
  roughly: rough,
  surely: excess,
});

describe('kept stretches', () => {
  it('lists islands with brackets that part kept from broken', () => {
    // Kept where the sine is not above zero: (π, 2π) and (3π, 4π).
    const list = keptStretches(spread(0.5, 13, 40), of(Math.sin), 1e-3);
    expect(list).toHaveLength(2);
    [
      [Math.PI, 2 * Math.PI],
      [3 * Math.PI, 4 * Math.PI],
    ].forEach(([from, to], i) => {
      const { fromBracket, toBracket } = list[i];
      expect(fromBracket?.[0]).toBeLessThan(from);
      expect(fromBracket?.[1]).toBeGreaterThanOrEqual(from);
      expect(toBracket?.[0]).toBeLessThanOrEqual(to);
      expect(toBracket?.[1]).toBeGreaterThan(to);
      for (const [a, b] of [fromBracket ?? [0, 1], toBracket ?? [0, 1]])
        expect(b - a).toBeLessThanOrEqual(1e-3 * (1 + 1e-9));
    });
  });

  it('knows all kept and none kept', () => {
    expect(
      keptStretches(
        [0, 1, 2],
        of(() => -1),
        0.1,
      ),
    ).toEqual([{ from: 0, to: 2, fromBracket: null, toBracket: null }]);
    expect(
      keptStretches(
        [0, 1, 2],
        of(() => 1),
        0.1,
      ),
    ).toEqual([]);
  });

  it('settles an edge by sure trials, however far off the rough ones are', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 2, max: 8, noNaN: true }),
        fc.double({ min: -1.5, max: 1.5, noNaN: true }),
        fc.constantFrom('line', 'jump', 'cubic'),
        (edge, off, kind) => {
          const shape = (v: number): number =>
            kind === 'line' ? v : kind === 'jump' ? Math.sign(v) || -1 : v ** 3;
          const list = keptStretches(
            spread(0, 10, 40),
            of(
              (v) => shape(v - edge),
              (v) => shape(v - edge - off),
            ),
            0.01,
          );
          expect(list).toHaveLength(1);
          const [kept, broken] = list[0].toBracket ?? [Number.NaN, Number.NaN];
          expect(kept).toBeLessThanOrEqual(edge);
          expect(broken).toBeGreaterThan(edge - 1e-9);
          expect(broken - kept).toBeLessThanOrEqual(0.01 * (1 + 1e-9));
        },
      ),
      { seed: 5 },
    );
  });
});

describe('the contour of a map', () => {
  it('lies on the circle that the values describe', () => {
    const x = spread(-1, 1, 41);
    const values = x.map((b) => x.map((a) => Math.hypot(a, b)));
    const pieces = contourPieces(x, x, values, 0.7);
    expect(pieces.length).toBeGreaterThan(80);
    let length = 0;
    for (const [a, b] of pieces) {
      expect(Math.hypot(a.start, a.size)).toBeCloseTo(0.7, 2);
      length += Math.hypot(a.start - b.start, a.size - b.size);
    }
    expect(length).toBeCloseTo(2 * Math.PI * 0.7, 1);
  });

  it('parts a saddle by the mean of its corners', () => {
    const pieces = contourPieces(
      [0, 1],
      [0, 1],
      [
        [1, -1],
        [-1, 1.2],
      ],
      0,
    );
    expect(pieces).toHaveLength(2);
    // The corners above zero are joined: each piece cuts off one that is below.
    for (const [a, b] of pieces) {
      const corner = a.start + b.start > 1 ? [1, 0] : [0, 1];
      for (const p of [a, b])
        expect(Math.abs(p.start - corner[0]) + Math.abs(p.size - corner[1])).toBeLessThan(1);
    }
  });
});

import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { differentiate } from '../../src/math/differentiate.ts';
import * as x from '../../src/math/expression.ts';
import { generated, interpreted } from '../../src/math/kernel.ts';
import { complexStep } from './complex.ts';
import { build, evaluate, points, SLOTS, smooth, values } from './trees.ts';

const [a, b] = [0, 1].map(x.input);
const slots = Array.from({ length: SLOTS }, (_, i) => i);
const slopeAt = (e: x.Expr, slot: number, at: readonly number[]): number =>
  values(generated, [differentiate(e, slot)], at)[0];

describe('derivatives', () => {
  it('are those of a complex step, whatever the formula', () => {
    fc.assert(
      fc.property(smooth, points, fc.constantFrom(...slots), (t, at, slot) => {
        fc.pre(!Number.isNaN(evaluate(t, at)));
        const { slope, largest } = complexStep(t, at, slot);
        // Terms that cancel leave the rounding of the largest of them.
        fc.pre(largest < 1e6);
        expect(Math.abs(slopeAt(build(t), slot, at) - slope)).toBeLessThan(1e-10 * (1 + largest) ** 2);
      }),
      { numRuns: 1500 },
    );
  });

  it('do not depend on the order of differentiation', () => {
    fc.assert(
      fc.property(smooth, points, (t, at) => {
        fc.pre(!Number.isNaN(evaluate(t, at)));
        const sizes = [0, 1].map((slot) => complexStep(t, at, slot).largest);
        fc.pre(Math.max(...sizes) < 30);
        const e = build(t);
        const mixed = [differentiate(differentiate(e, 0), 1), differentiate(differentiate(e, 1), 0)];
        const [xy, yx] = values(interpreted, mixed, at);
        expect(Math.abs(xy - yx)).toBeLessThan(1e-8);
      }),
      { numRuns: 500 },
    );
  });

  it('vanish by structure where an input does not matter', () => {
    const zero = x.constant(0);
    expect(differentiate(x.mul(3, a), 1)).toBe(zero);
    expect(differentiate(x.constant(5), 0)).toBe(zero);
    expect(differentiate(x.pow(b, 2.7), 0)).toBe(zero);
    expect(differentiate(x.mul(3, a), 0)).toBe(x.constant(3));
  });

  it('of a power with a constant exponent exist where its base is zero or negative', () => {
    expect(slopeAt(x.pow(a, 1.5), 0, [0])).toBe(0);
    expect(slopeAt(x.pow(a, 3), 0, [-2])).toBe(12);
    expect(slopeAt(x.pow(a, 4), 0, [-2])).toBe(-32);
  });

  it('take one branch, the upper where both meet', () => {
    expect([-2, 0, 2].map((v) => slopeAt(x.abs(a), 0, [v]))).toEqual([-1, 1, 1]);
    expect([1, 2, 3].map((v) => slopeAt(x.max(a, b), 0, [v, 2]))).toEqual([0, 1, 1]);
  });

  it('go through special functions by their partials', () => {
    // u³·v, by rule; and the root r of r³ + r = u, whose slope 1/(3r² + 1) is written with the value itself.
    const cube: x.Special = {
      name: 'cube',
      evaluate: (u, v) => u ** 3 * v,
      partials: ([u, v]) => [x.mul(3, u, u, v), x.mul(u, u, u)],
    };
    const root: x.Special = {
      name: 'root',
      evaluate: (u) => {
        let r = Math.cbrt(u);
        for (let k = 0; k < 60; k++) r -= (r ** 3 + r - u) / (3 * r * r + 1);
        return r;
      },
      partials: (_, self) => [x.div(1, x.add(1, x.mul(3, self, self)))],
    };
    const e = x.mul(b, x.call(root, x.call(cube, x.add(a, b), x.exp(a))));
    const value = (at: readonly number[], slot: number, by: number): number =>
      values(
        interpreted,
        [e],
        at.map((v, i) => (i === slot ? v + by : v)),
      )[0];
    fc.assert(
      fc.property(points, (at) => {
        for (const slot of [0, 1]) {
          const h = 1e-4;
          const near = value(at, slot, h) - value(at, slot, -h);
          const far = value(at, slot, 2 * h) - value(at, slot, -2 * h);
          const central = (8 * near - far) / (12 * h);
          expect(Math.abs(slopeAt(e, slot, at) - central)).toBeLessThan(1e-7);
        }
      }),
    );
  });

  it('leave a special function alone where its arguments stand still', () => {
    const unasked: x.Special = {
      name: 'unasked',
      evaluate: (u) => u,
      partials: () => {
        throw new Error('asked for partials');
      },
    };
    expect(differentiate(x.call(unasked, b), 0)).toBe(x.constant(0));
  });
});

import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import * as x from '../../src/math/expression.ts';
import { generated, interpreted } from '../../src/math/kernel.ts';
import { substitute } from '../../src/math/substitute.ts';
import { build, evaluate, formulas, points, SLOTS, values } from './trees.ts';

// The very first constant of this module: no later zero may inherit its sign.
const zero = x.constant(-0);
const [a, b, c] = [0, 1, 2].map(x.input);

describe('expressions', () => {
  it('are one node where they are equal', () => {
    fc.assert(
      fc.property(formulas, (t) => {
        expect(build(t)).toBe(build(structuredClone(t)));
      }),
    );
    const special = (): x.Special => ({ name: 'f', evaluate: (v) => v, partials: () => [x.constant(1)] });
    const f = special();
    expect(x.call(f, a)).toBe(x.call(f, a));
    expect(x.call(f, a)).not.toBe(x.call(special(), a));
  });

  it('know one zero', () => {
    expect(zero).toBe(x.constant(0));
    expect(zero).toMatchObject({ value: 0 });
    expect(x.neg(0)).toBe(zero);
  });

  it('are simplified where that is exact', () => {
    expect(x.add(a, 0, b)).toBe(x.add(a, b));
    expect(x.add()).toBe(zero);
    expect(x.mul()).toBe(x.constant(1));
    expect(x.mul(1, a, 1)).toBe(a);
    expect(x.mul(a, -1)).toBe(x.neg(a));
    expect(x.mul(a, 0)).toBe(zero);
    expect(x.sub(a, 0)).toBe(a);
    expect(x.sub(0, a)).toBe(x.neg(a));
    expect(x.sub(x.mul(a, b), x.mul(a, b))).toBe(zero);
    expect(x.neg(x.neg(a))).toBe(a);
    expect(x.div(a, 1)).toBe(a);
    expect(x.div(0, a)).toBe(zero);
    expect(x.pow(a, 0)).toBe(x.constant(1));
    expect(x.pow(a, 1)).toBe(a);
    expect(x.pow(a, 2)).toBe(x.mul(a, a));
    expect(x.pow(a, 0.5)).toBe(x.sqrt(a));
    expect(x.pow(a, -1)).toBe(x.div(1, a));
    expect(x.select(0, a, b)).toBe(a);
    expect(x.select(-1, a, b)).toBe(b);
    expect(x.select(c, a, a)).toBe(a);
    expect(x.exp(x.constant(0))).toBe(x.constant(1));
  });

  it('have the value of the formula as written: no simplification changes a digit', () => {
    fc.assert(
      fc.property(formulas, points, (t, at) => {
        const plain = evaluate(t, at);
        fc.pre(!Number.isNaN(plain));
        // 0 and −0 are the same value.
        expect(values(interpreted, [build(t)], at)[0] === plain).toBe(true);
      }),
      { numRuns: 1500 },
    );
  });

  it('have a smaller, a larger and a size', () => {
    fc.assert(
      fc.property(points, (at) => {
        const [p, q] = at;
        const found = values(generated, [x.max(a, b), x.min(a, b), x.abs(a)], at);
        [Math.max(p, q), Math.min(p, q), Math.abs(p)].forEach((v, i) => {
          expect(found[i] === v).toBe(true);
        });
      }),
    );
  });

  it('are listed arguments first, each once', () => {
    fc.assert(
      fc.property(formulas, formulas, (s, t) => {
        const roots = [build(s), build(t)];
        const order = x.topological(roots);
        expect(new Set(order).size).toBe(order.length);
        order.forEach((e, k) => {
          if (e.kind === 'operation') for (const arg of e.args) expect(order.indexOf(arg)).toBeLessThan(k);
        });
        for (const r of roots) expect(order).toContain(r);
      }),
    );
  });

  it('read the slots that can change their value', () => {
    expect([...x.slotsOf(x.mul(c, x.add(a, 1)))].sort()).toEqual([0, 2]);
    expect(x.slotsOf(x.sub(b, b)).size).toBe(0);
    const f: x.Special = { name: 'f', evaluate: (v) => v, partials: () => [x.constant(1)] };
    expect([...x.slotsOf(x.call(f, b))]).toEqual([1]);
  });
});

describe('substitution', () => {
  it('evaluates at the values of what is put in', () => {
    fc.assert(
      fc.property(
        formulas,
        fc.array(formulas, { minLength: SLOTS, maxLength: SLOTS }),
        points,
        (t, by, at) => {
          const inner = by.map((u) => evaluate(u, at));
          const plain = evaluate(t, inner);
          fc.pre(!inner.some(Number.isNaN) && !Number.isNaN(plain));
          expect(values(interpreted, [substitute(build(t), by.map(build))], at)[0] === plain).toBe(true);
        },
      ),
      { numRuns: 500 },
    );
  });

  it('of each input by itself changes nothing', () => {
    fc.assert(
      fc.property(formulas, (t) => {
        expect(substitute(build(t), [a, b, c])).toBe(build(t));
      }),
    );
  });

  it('goes through special functions', () => {
    const f: x.Special = { name: 'hyperbola', evaluate: (u, v) => u / (1 + v), partials: () => [] };
    const e = substitute(x.call(f, x.add(a, 1), b), [x.mul(c, c), x.constant(3)]);
    expect(values(interpreted, [e], [0, 0, 3])).toEqual([2.5]);
  });
});

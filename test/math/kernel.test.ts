import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import * as x from '../../src/math/expression.ts';
import {
  dependencies,
  generated,
  interpreted,
  type Kernel,
  kernel,
  partialsOf,
} from '../../src/math/kernel.ts';
import { build, formulas, SLOTS, values } from './trees.ts';

const args = Array.from({ length: SLOTS }, (_, i) => `x${i}`);
const both = [generated, interpreted];

/** Numbers with all that a plant must never hold: the two executions must agree on these as well. */
const wild = fc.array(fc.oneof(fc.double(), fc.constantFrom(0, -0, 1, -1, 2)), {
  minLength: 12,
  maxLength: 12,
});
const kernels = fc
  .array(formulas, { minLength: 1, maxLength: 3 })
  .map((trees): Kernel => ({ name: 'random', args, outputs: trees.map(build) }));

/** Four instances, each with its own three arguments, followed by what `targets` says. */
const instances = (targets: (i: number) => readonly number[]): Int32Array =>
  Int32Array.from([0, 1, 2, 3].flatMap((i) => [3 * i, 3 * i + 1, 3 * i + 2, ...targets(i)]));

function expectSameBits(p: Float64Array, q: Float64Array): void {
  expect(p).toHaveLength(q.length);
  p.forEach((v, i) => {
    expect(Object.is(v, q[i]), `${v} and ${q[i]} at ${i}`).toBe(true);
  });
}

describe('generated and interpreted kernels', () => {
  it('give the same bits: values', () => {
    fc.assert(
      fc.property(kernels, wild, (k, numbers) => {
        const n = k.outputs.length;
        const references = instances((i) => k.outputs.map((_, o) => n * i + o));
        const [own, oracle] = both.map((e) => {
          const target = new Float64Array(4 * n);
          e.run(k, 'assign')(4, references, Float64Array.from(numbers), target);
          return target;
        });
        expectSameBits(own, oracle);
      }),
      { numRuns: 400 },
    );
  });

  it('give the same bits: moves', () => {
    fc.assert(
      fc.property(kernels, wild, (k, numbers) => {
        const references = instances((i) => k.outputs.flatMap((_, o) => [o % 3, (o + i) % 3]));
        const [own, oracle] = both.map((e) => {
          const target = new Float64Array(3);
          e.run(k, 'move')(4, references, Float64Array.from(numbers), target);
          return target;
        });
        expectSameBits(own, oracle);
      }),
      { numRuns: 400 },
    );
  });

  it('give the same bits: derivatives', () => {
    fc.assert(
      fc.property(kernels, wild, (k, numbers) => {
        const pairs = dependencies(k, () => true);
        const n = pairs.length;
        // A stride longer than the arguments: a derivative does not look at the targets.
        const references = instances(() => [-1, -1]);
        const [own, oracle] = both.map((e) => {
          const target = new Float64Array(4 * n);
          e.derive(k, pairs)(4, references, Float64Array.from(numbers), target);
          return target;
        });
        expectSameBits(own, oracle);
        // Instance by instance they are the partial derivatives, in the order of the pairs.
        const second = values(interpreted, partialsOf(k, pairs), numbers.slice(3, 6));
        expectSameBits(own.subarray(n, 2 * n), Float64Array.from(second));
      }),
      { numRuns: 400 },
    );
  });
});

describe.each(both)('$name kernels', (execution) => {
  it('move what they take, no more and no less', () => {
    const k = kernel('flow', ['q', 'c'], (q, c) => [q, x.mul(q, c)]);
    const target = Float64Array.of(100, 200, 300, 0, 0, 0);
    // Two flows in a row: 0 → 1 → 2 for the volume, 3 → 4 → 5 for the content.
    const references = Int32Array.of(0, 1, 0, 1, 3, 4, 2, 3, 1, 2, 4, 5);
    execution.run(k, 'move')(2, references, Float64Array.of(7, 3, 5, 2), target);
    expect([...target]).toEqual([93, 202, 305, -21, 11, 10]);
  });

  it('call special functions, each once an instance', () => {
    let calls = 0;
    const counted: x.Special = {
      name: 'counted',
      evaluate: (u, v) => {
        calls += 1;
        return u - 2 * v;
      },
      partials: () => [x.constant(1), x.constant(-2)],
    };
    const k = kernel('special', ['u', 'v'], (u, v) => {
      const f = x.call(counted, u, v);
      return [f, x.mul(f, f)];
    });
    const target = new Float64Array(4);
    execution.run(k, 'assign')(2, Int32Array.of(0, 1, 0, 1, 1, 2, 2, 3), Float64Array.of(5, 1, 4), target);
    expect([...target]).toEqual([3, 9, -7, 49]);
    expect(calls).toBe(2);
  });

  it('do nothing for no instance', () => {
    const k = kernel('none', ['u'], (u) => x.mul(u, 2));
    const target = Float64Array.of(7);
    execution.run(k, 'assign')(0, new Int32Array(0), new Float64Array(0), target);
    expect([...target]).toEqual([7]);
  });

  it('read all arguments before they write, where board and target are one', () => {
    const swap = kernel('swap', ['u', 'v'], (u, v) => [v, u]);
    const board = Float64Array.of(1, 2);
    execution.run(swap, 'assign')(1, Int32Array.of(0, 1, 0, 1), board, board);
    expect([...board]).toEqual([2, 1]);
  });
});

describe('dependencies', () => {
  const k = kernel('mixed', ['u', 'v', 'w'], (u, v, w) => [x.mul(u, w), x.add(v, 1), x.constant(4)]);

  it('are the pairs that can be non-zero, by output and argument', () => {
    expect(dependencies(k, () => true)).toEqual([
      { output: 0, arg: 0 },
      { output: 0, arg: 2 },
      { output: 1, arg: 1 },
    ]);
  });

  it('leave out what is not active', () => {
    expect(dependencies(k, (arg) => arg === 2)).toEqual([{ output: 0, arg: 2 }]);
  });
});

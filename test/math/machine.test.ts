import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { interpreted, type Kernel } from '../../src/math/kernel.ts';
import { functionsFor, type Instance, runsOf } from '../../src/math/machine/affine.ts';
import { Calls, evaluate } from '../../src/math/machine/kernels.ts';
import { encodeModule } from '../../src/math/machine/module.ts';
import { region } from '../../src/math/machine/store.ts';
import { build, formulas, SLOTS } from './trees.ts';

const instance = (shape: string, ...at: number[]): Instance => ({ shape, at });
const told = (list: readonly Instance[]): string[] =>
  runsOf(list).map((r) => `${r.count} x ${r.block.map((q) => q.shape).join('')}`);

describe('runs of instances', () => {
  it('are loops over what repeats at even distances', () => {
    const list = Array.from({ length: 7 }, (_, i) => instance('a', 8 * i, 800 - 16 * i));
    expect(told(list)).toEqual(['7 x a']);
    expect(runsOf(list)[0].steps).toEqual([[8, -16]]);
  });

  it('find blocks: stage after stage of the same few shapes, with their own ends written out', () => {
    const stage = (i: number): Instance[] => [
      instance('a', 80 * i),
      instance('b', 80 * i + 8),
      instance('a', 80 * i + 24),
    ];
    const list = [instance('x', 0), ...[1, 2, 3, 4].flatMap(stage), instance('b', 999)];
    expect(told(list)).toEqual(['1 x x', '4 x aba', '1 x b']);
  });

  it('write out what repeats less than three times, or does not move at all', () => {
    expect(told([instance('a', 0), instance('a', 8)])).toEqual(['1 x a', '1 x a']);
    expect(told([1, 2, 3, 4].map(() => instance('a', 0)))).toEqual(Array(4).fill('1 x a'));
  });

  it('end where a distance changes', () => {
    const list = [0, 8, 16, 24, 40, 56, 72].map((a) => instance('a', a));
    expect(runsOf(list).reduce((n, r) => n + r.count * r.block.length, 0)).toBe(7);
    expect(runsOf(list)[0].count).toBe(4);
  });

  it('cover every list, each instance once and in order', () => {
    const any = fc.array(
      fc.record({
        shape: fc.constantFrom('a', 'b'),
        at: fc.tuple(fc.integer({ min: 0, max: 5 }), fc.integer({ min: 0, max: 5 })),
      }),
      { maxLength: 40 },
    );
    fc.assert(
      fc.property(any, (list) => {
        const back = runsOf(list).flatMap(({ block, count, steps }) =>
          Array.from({ length: count }, (_, n) =>
            block.map((q, j) => ({ shape: q.shape, at: q.at.map((a, k) => a + n * steps[j][k]) })),
          ).flat(),
        );
        expect(back).toEqual(list);
      }),
      { numRuns: 500 },
    );
  });
});

/** Runs kernels as machine code: instances by their arguments (numbers of the region), results one after the other. */
function run(k: Kernel, args: readonly (readonly number[])[], numbers: readonly number[]): Float64Array {
  const calls = new Calls();
  const n = k.outputs.length;
  const to = numbers.length;
  const list = args.map((own, i) => ({
    shape: 'k',
    at: [...own, ...k.outputs.map((_, o) => to + i * n + o)].map((a) => 8 * a),
  }));
  const codes = functionsFor(list, (code, _, address) => {
    evaluate(code, k.outputs, address, calls).forEach((value, o) => {
      const { local, offset } = address(SLOTS + o);
      code.get(local).get(value).store(offset);
    });
  });
  const own = region(to + args.length * n);
  own.view(0, to).set(numbers);
  const exported = new Map(codes.map((_, i) => [`f${i}`, calls.list.length + i]));
  const module = new WebAssembly.Module(encodeModule(calls.list, codes, exported));
  const { exports } = new WebAssembly.Instance(module, {
    m: { memory: own.memory },
    f: Object.fromEntries(calls.list.map((c) => [c.name, c.f])),
  });
  for (const name of exported.keys()) (exports[name] as (base: number) => void)(own.base);
  return own.view(to, args.length * n);
}

describe('machine code', () => {
  const names = Array.from({ length: SLOTS }, (_, i) => `x${i}`);
  const kernels = fc
    .array(formulas, { minLength: 1, maxLength: 3 })
    .map((trees): Kernel => ({ name: 'random', args: names, outputs: trees.map(build) }));
  const wild = fc.array(fc.oneof(fc.double(), fc.constantFrom(0, -0, 1, -1, 2)), {
    minLength: 30,
    maxLength: 30,
  });

  it.each([
    ['in a loop upwards', (i: number) => [3 * i, 3 * i + 1, 3 * i + 2]],
    ['in a loop downwards, one argument standing still', (i: number) => [27 - 3 * i, 5, 29 - 3 * i]],
    ['written out', (i: number) => [(7 * i) % 30, (i * i) % 30, (11 * i + 3) % 30]],
  ])('gives the bits of the interpreter, %s', (_, where) => {
    fc.assert(
      fc.property(kernels, wild, (k, numbers) => {
        const args = Array.from({ length: 9 }, (__, i) => where(i));
        const n = k.outputs.length;
        const references = Int32Array.from(
          args.flatMap((own, i) => [...own, ...k.outputs.map((__, o) => i * n + o)]),
        );
        const oracle = new Float64Array(9 * n);
        interpreted.run(k, 'assign')(9, references, Float64Array.from(numbers), oracle);
        run(k, args, numbers).forEach((v, i) => {
          expect(Object.is(v, oracle[i]), `${v} and ${oracle[i]}`).toBe(true);
        });
      }),
      { numRuns: 120 },
    );
  });

  it('does not grow with the number of equal instances', () => {
    const size = (count: number): number => {
      const list = Array.from({ length: count }, (_, i) => instance('a', 8 * i, 8 * (count + i)));
      return functionsFor(list, (code, __, address) => {
        code.get(address(1).local).get(address(0).local).load(address(0).offset).store(address(1).offset);
      }).reduce((s, c) => s + c.length, 0);
    };
    expect(size(100_000)).toBeLessThan(size(10) + 16);
  });

  it('keeps regions apart, in memories that many share', () => {
    const [a, b] = [region(3), region(5)];
    a.view(0, 4).fill(1);
    expect([...b.view(0, 5)]).toEqual([0, 0, 0, 0, 0]);
    expect(a.memory).toBe(b.memory);
    // One that does not fit begins a memory of its own size.
    const large = region(9e6);
    expect(large.memory).not.toBe(a.memory);
    expect(large.view(9e6 - 1, 1)[0]).toBe(0);
  });
});

import type { Algebra } from './algebra.ts';
import type { Ref } from './ledger.ts';

/**
 * A flow as a sum of values of the System, written down and not yet computed: what is added in one place and taken away
 * in another cancels, so that the flow of a stage depends on no more than it must.
 */
export interface Sum {
  readonly parts: ReadonlyMap<string, { readonly ref: Ref; readonly factor: number }>;
}

const NOTHING: Sum = { parts: new Map() };
const ROUNDING = 1e-12;

export const just = (ref: Ref): Sum => ({
  parts: new Map([[`${ref.space}${ref.index}`, { ref, factor: 1 }]]),
});
export const isNothing = (s: Sum): boolean => s.parts.size === 0;

function combined(list: readonly (readonly [Sum, number])[]): Sum {
  const parts = new Map<string, { ref: Ref; factor: number }>();
  for (const [sum, k] of list)
    for (const [key, { ref, factor }] of sum.parts) {
      const total = (parts.get(key)?.factor ?? 0) + k * factor;
      if (Math.abs(total) < ROUNDING) parts.delete(key);
      else parts.set(key, { ref, factor: total });
    }
  return { parts };
}

export const sums: Algebra<Sum> = {
  none: NOTHING,
  add: (...list) => {
    const some = list.filter((s) => !isNothing(s));
    return some.length === 1 ? some[0] : combined(some.map((s) => [s, 1] as const));
  },
  sub: (a, b) =>
    isNothing(b)
      ? a
      : combined([
          [a, 1],
          [b, -1],
        ]),
  scale: (a, k) => combined([[a, k]]),
};

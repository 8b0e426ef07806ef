/**
 * What is needed to reckon with flows, whatever stands for one: a number at design, a range, a sum of names, or refs of
 * the System. The way of the flows through the plant is thus written once.
 */
export interface Algebra<T> {
  readonly none: T;
  add(...list: readonly T[]): T;
  sub(a: T, b: T): T;
  scale(a: T, k: number): T;
}

export const numbers: Algebra<number> = {
  none: 0,
  add: (...list) => list.reduce((s, v) => s + v, 0),
  sub: (a, b) => a - b,
  scale: (a, k) => a * k,
};

/** Least and most of a flow. */
export interface Range {
  readonly least: number;
  readonly most: number;
}

/** Ranges of flows: none runs backwards. */
export const ranges: Algebra<Range> = {
  none: { least: 0, most: 0 },
  add: (...list) => ({
    least: list.reduce((s, v) => s + v.least, 0),
    most: list.reduce((s, v) => s + v.most, 0),
  }),
  sub: (a, b) => ({ least: Math.max(0, a.least - b.most), most: Math.max(0, a.most - b.least) }),
  scale: (a, k) => ({ least: a.least * k, most: a.most * k }),
};

/** A sum of named flows with their factors. */
export type Terms = ReadonlyMap<string, number>;

const ROUNDING = 1e-12;

function combined(list: readonly (readonly [Terms, number])[]): Terms {
  const sum = new Map<string, number>();
  for (const [terms, k] of list) for (const [name, v] of terms) sum.set(name, (sum.get(name) ?? 0) + k * v);
  for (const [name, v] of sum) if (Math.abs(v) < ROUNDING) sum.delete(name);
  return sum;
}

export const terms: Algebra<Terms> = {
  none: new Map(),
  add: (...list) => combined(list.map((t) => [t, 1] as const)),
  sub: (a, b) =>
    combined([
      [a, 1],
      [b, -1],
    ]),
  scale: (a, k) => combined([[a, k]]),
};

/** Whether a sum is nothing but one named flow. */
export const isJust = (t: Terms, name: string): boolean =>
  t.size === 1 && Math.abs((t.get(name) ?? 0) - 1) < ROUNDING;

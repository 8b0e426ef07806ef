import fc from 'fast-check';
import type { Expr } from '../../src/math/expression.ts';
import * as x from '../../src/math/expression.ts';
import type { Execution, Kernel } from '../../src/math/kernel.ts';

/** A formula as plain data, so that it can be worked out by other rules than those under test. */
export type Tree =
  | { readonly op: 'value'; readonly value: number }
  | { readonly op: 'input'; readonly slot: number }
  | { readonly op: 'add' | 'sub' | 'mul' | 'div' | 'pow'; readonly a: Tree; readonly b: Tree }
  | { readonly op: 'neg' | 'exp' | 'log' | 'sqrt' | 'tanh'; readonly a: Tree }
  | { readonly op: 'select'; readonly a: Tree; readonly b: Tree; readonly c: Tree };

export const SLOTS = 3;

const value = (v: number): Tree => ({ op: 'value', value: v });
const two = (op: 'add' | 'sub' | 'mul' | 'div' | 'pow', a: Tree, b: Tree): Tree => ({ op, a, b });
const one = (op: 'neg' | 'exp' | 'log' | 'sqrt' | 'tanh', a: Tree): Tree => ({ op, a });

export const numbers = fc.double({ min: -2, max: 2, noNaN: true, noDefaultInfinity: true });
export const points = fc.tuple(numbers, numbers, numbers);

const leaves: fc.Arbitrary<Tree> = fc.oneof(
  fc.nat({ max: SLOTS - 1 }).map((slot): Tree => ({ op: 'input', slot })),
  fc.constantFrom(0, -0, 1, -1, 2, 3, 0.5, -2).map(value),
  numbers.map(value),
);

const exponents = [0, 1, 2, 3, 4, -1, -2, 0.5, 1.5];

/** Any formula: where it has no finite value is not looked at. */
export const formulas: fc.Arbitrary<Tree> = fc.letrec<{ tree: Tree }>((tie) => ({
  tree: fc.oneof(
    { maxDepth: 5, withCrossShrink: true },
    leaves,
    fc
      .tuple(fc.constantFrom('add', 'sub', 'mul', 'div'), tie('tree'), tie('tree'))
      .map(([op, a, b]) => two(op, a, b)),
    fc.tuple(tie('tree'), fc.constantFrom(...exponents)).map(([a, b]) => two('pow', a, value(b))),
    // An exponent that varies is shifted off the whole numbers, which have rules of their own where they are fixed.
    fc.tuple(tie('tree'), tie('tree')).map(([a, b]) => two('pow', a, two('add', b, value(Math.SQRT1_2)))),
    fc.tuple(fc.constantFrom('neg', 'exp', 'log', 'sqrt', 'tanh'), tie('tree')).map(([op, a]) => one(op, a)),
    fc.tuple(tie('tree'), tie('tree'), tie('tree')).map(([a, b, c]): Tree => ({ op: 'select', a, b, c })),
  ),
})).tree;

/** At least one, whatever the formula. */
const positive = (a: Tree): Tree => two('add', value(1), two('mul', a, a));

/** Formulas that are smooth, but for branches, wherever they are finite: roots, logs and divisors of 1 + a² only. */
export const smooth: fc.Arbitrary<Tree> = fc.letrec<{ tree: Tree }>((tie) => ({
  tree: fc.oneof(
    { maxDepth: 4, withCrossShrink: true },
    leaves,
    fc
      .tuple(fc.constantFrom('add', 'sub', 'mul'), tie('tree'), tie('tree'))
      .map(([op, a, b]) => two(op, a, b)),
    fc.tuple(tie('tree'), tie('tree')).map(([a, b]) => two('div', a, positive(b))),
    fc.tuple(tie('tree'), tie('tree')).map(([a, b]) => two('pow', positive(a), b)),
    fc
      .tuple(tie('tree'), fc.constantFrom(0, 1, 2, 3, -1, -2))
      .map(([a, b]) => two('pow', b < 0 ? positive(a) : a, value(b))),
    fc.tuple(fc.constantFrom('log', 'sqrt'), tie('tree')).map(([op, a]) => one(op, positive(a))),
    fc.tuple(fc.constantFrom('neg', 'exp', 'tanh'), tie('tree')).map(([op, a]) => one(op, a)),
    fc.tuple(tie('tree'), tie('tree'), tie('tree')).map(([a, b, c]): Tree => ({ op: 'select', a, b, c })),
  ),
})).tree;

const makers = {
  neg: x.neg,
  exp: x.exp,
  log: x.log,
  sqrt: x.sqrt,
  tanh: x.tanh,
  add: x.add,
  sub: x.sub,
  mul: x.mul,
  div: x.div,
  pow: x.pow,
};

export function build(t: Tree): Expr {
  if (t.op === 'value') return x.constant(t.value);
  if (t.op === 'input') return x.input(t.slot);
  if (t.op === 'select') return x.select(build(t.a), build(t.b), build(t.c));
  return 'b' in t ? makers[t.op](build(t.a), build(t.b)) : makers[t.op](build(t.a));
}

/** Powers that are products, quotients or roots where the exponent is fixed: these have their own last digit. */
function power(a: number, b: number): number {
  if (b === 2) return a * a;
  if (b === 3) return a * a * a;
  if (b === -1) return 1 / a;
  if (b === -2) return 1 / (a * a);
  if (b === 0.5) return Math.sqrt(a);
  return a ** b;
}

/** The value without any simplification; NaN where any part of the formula is not finite. */
export function evaluate(t: Tree, at: readonly number[]): number {
  const finite = (v: number): number => (Number.isFinite(v) ? v : Number.NaN);
  const go = (u: Tree): number => {
    switch (u.op) {
      case 'value':
        return u.value;
      case 'input':
        return at[u.slot];
      case 'add':
        return finite(go(u.a) + go(u.b));
      case 'sub':
        return finite(go(u.a) - go(u.b));
      case 'mul':
        return finite(go(u.a) * go(u.b));
      case 'div':
        return finite(go(u.a) / go(u.b));
      case 'pow': {
        const a = go(u.a);
        // NaN to the power of 0 is 1, but here no number has come of a.
        return Number.isNaN(a) ? a : finite(power(a, go(u.b)));
      }
      case 'neg':
        return -go(u.a);
      case 'select': {
        const [a, b, c] = [go(u.a), go(u.b), go(u.c)];
        return [a, b, c].some(Number.isNaN) ? Number.NaN : a >= 0 ? b : c;
      }
      default:
        return finite(Math[u.op](go(u.a)));
    }
  };
  return go(t);
}

/** Values of expressions at one point, by either execution. */
export function values(execution: Execution, roots: readonly Expr[], at: readonly number[]): number[] {
  const k: Kernel = { name: 'test', args: at.map((_, i) => `x${i}`), outputs: roots };
  const target = new Float64Array(roots.length);
  const references = Int32Array.from([...at.keys(), ...roots.keys()]);
  execution.run(k, 'assign')(1, references, Float64Array.from(at), target);
  return [...target];
}

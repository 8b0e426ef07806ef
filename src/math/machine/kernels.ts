import { type Expr, type Special, topological } from '../expression.ts';
import type { Address } from './affine.ts';
import type { Code } from './module.ts';

/** Functions that the code calls, numbered in the order in which they turn up. */
export class Calls {
  readonly #numbers = new Map<string, number>();
  readonly list: { readonly name: string; readonly arity: number; readonly f: (...v: number[]) => number }[] =
    [];
  readonly #specials = new Map<Special, string>();

  math(name: 'exp' | 'log' | 'tanh' | 'pow'): number {
    return this.#number(name, name === 'pow' ? 2 : 1, Math[name]);
  }

  special(s: Special, arity: number): number {
    const name = this.#specials.get(s) ?? `s${this.#specials.size}`;
    this.#specials.set(s, name);
    return this.#number(`${name}/${arity}`, arity, (...v) => s.evaluate(...v));
  }

  #number(name: string, arity: number, f: (...v: number[]) => number): number {
    const known = this.#numbers.get(name);
    if (known !== undefined) return known;
    this.#numbers.set(name, this.list.length);
    return this.list.push({ name, arity, f }) - 1;
  }
}

const orders = new WeakMap<readonly Expr[], readonly Expr[]>();

/** Nodes below the roots, each after what it needs; worked out once for one and the same list. */
export function orderOf(roots: readonly Expr[]): readonly Expr[] {
  const made = orders.get(roots) ?? topological(roots);
  orders.set(roots, made);
  return made;
}

/**
 * Writes code that leaves the values of `roots` in locals. Argument k of the expressions stands at `argument(k)`.
 *
 * @returns the local of each root.
 */
export function evaluate(
  code: Code,
  roots: readonly Expr[],
  argument: (slot: number) => Address,
  calls: Calls,
): number[] {
  const order = orderOf(roots);
  const local = new Map(order.map((e, i) => [e, code.number(i)]));
  code.needs(order.length);
  for (const e of order) {
    operate(code, e, (a) => local.get(a) as number, argument, calls);
    code.set(local.get(e) as number);
  }
  return roots.map((e) => local.get(e) as number);
}

function operate(
  code: Code,
  e: Expr,
  at: (a: Expr) => number,
  argument: (slot: number) => Address,
  calls: Calls,
): void {
  if (e.kind === 'constant') {
    code.constant(e.value);
    return;
  }
  if (e.kind === 'input') {
    const { local, offset } = argument(e.slot);
    code.get(local).load(offset);
    return;
  }
  if (e.kind === 'special') {
    for (const a of e.args) code.get(at(a));
    code.call(calls.special(e.special, e.args.length));
    return;
  }
  const [a, b, c] = e.args;
  switch (e.op) {
    case 'add':
    case 'sub':
    case 'mul':
    case 'div':
      code.get(at(a)).get(at(b)).binary(e.op);
      return;
    case 'neg':
      code.get(at(a)).negate();
      return;
    case 'sqrt':
      code.get(at(a)).root();
      return;
    case 'select':
      code.get(at(b)).get(at(c)).get(at(a)).select();
      return;
    case 'pow':
      code.get(at(a)).get(at(b)).call(calls.math('pow'));
      return;
    default:
      code.get(at(a)).call(calls.math(e.op));
  }
}

/** Adds to the number at an address (or takes from it) what is in a local. */
export function accumulate(code: Code, { local, offset }: Address, value: number, sign: 1 | -1): void {
  code
    .get(local)
    .get(local)
    .load(offset)
    .get(value)
    .binary(sign > 0 ? 'add' : 'sub')
    .store(offset);
}

/**
 * Expressions: the one form in which a law of the plant is written.
 *
 * An expression is an immutable node of a directed acyclic graph. Equal nodes are one node (hash-consing), so a
 * quantity that several balances share is computed once, and equality of structure is equality of reference.
 */

/** A scalar function that is no formula: a table, an implicit root. Its partials are expressions again. */
export interface Special {
  readonly name: string;
  evaluate(...args: number[]): number;
  /** ∂/∂argᵢ, in the order of the arguments; `self` is the value of the call itself. */
  partials(args: readonly Expr[], self: Expr): Expr[];
}

export type Operator =
  | 'add'
  | 'sub'
  | 'mul'
  | 'div'
  | 'neg'
  | 'pow'
  | 'exp'
  | 'log'
  | 'sqrt'
  | 'tanh'
  | 'select';

export type Expr =
  | { readonly kind: 'constant'; readonly id: number; readonly value: number }
  | { readonly kind: 'input'; readonly id: number; readonly slot: number }
  | { readonly kind: 'operation'; readonly id: number; readonly op: Operator; readonly args: readonly Expr[] }
  | {
      readonly kind: 'special';
      readonly id: number;
      readonly special: Special;
      readonly args: readonly Expr[];
    };

const known = new Map<string, Expr>();
const specialNumber = new WeakMap<Special, number>();
let specials = 0;

function intern(key: string, make: (id: number) => Expr): Expr {
  const found = known.get(key);
  if (found) return found;
  const node = make(known.size);
  known.set(key, node);
  return node;
}

/** There is one zero: adding 0 takes the sign from −0. */
export const constant = (value: number): Expr =>
  intern(`c${value + 0}`, (id) => ({ kind: 'constant', id, value: value + 0 }));

/** The `slot`-th argument of the kernel in which the expression stands. */
export const input = (slot: number): Expr => intern(`i${slot}`, (id) => ({ kind: 'input', id, slot }));

function operation(op: Operator, ...args: Expr[]): Expr {
  return intern(`${op}(${args.map((a) => a.id).join(',')})`, (id) => ({ kind: 'operation', id, op, args }));
}

/** A call of a special function. */
export function call(special: Special, ...args: Expr[]): Expr {
  let n = specialNumber.get(special);
  if (n === undefined) {
    specials += 1;
    n = specials;
    specialNumber.set(special, n);
  }
  return intern(`f${n}(${args.map((a) => a.id).join(',')})`, (id) => ({
    kind: 'special',
    id,
    special,
    args,
  }));
}

type Operand = Expr | number;
const lift = (x: Operand): Expr => (typeof x === 'number' ? constant(x) : x);
const is = (x: Expr, value: number): boolean => x.kind === 'constant' && x.value === value;
const both = (a: Expr, b: Expr): [number, number] | null =>
  a.kind === 'constant' && b.kind === 'constant' ? [a.value, b.value] : null;

function add2(a: Expr, b: Expr): Expr {
  const n = both(a, b);
  if (n) return constant(n[0] + n[1]);
  if (is(a, 0)) return b;
  if (is(b, 0)) return a;
  return operation('add', a, b);
}

function mul2(a: Expr, b: Expr): Expr {
  const n = both(a, b);
  if (n) return constant(n[0] * n[1]);
  if (is(a, 0) || is(b, 0)) return constant(0);
  if (is(a, 1)) return b;
  if (is(b, 1)) return a;
  if (is(a, -1)) return neg(b);
  if (is(b, -1)) return neg(a);
  return operation('mul', a, b);
}

export const add = (...terms: Operand[]): Expr => terms.map(lift).reduce(add2, constant(0));
export const mul = (...factors: Operand[]): Expr => factors.map(lift).reduce(mul2, constant(1));

export function sub(x: Operand, y: Operand): Expr {
  const a = lift(x);
  const b = lift(y);
  const n = both(a, b);
  if (n) return constant(n[0] - n[1]);
  if (is(b, 0)) return a;
  if (is(a, 0)) return neg(b);
  if (a === b) return constant(0);
  return operation('sub', a, b);
}

export function div(x: Operand, y: Operand): Expr {
  const a = lift(x);
  const b = lift(y);
  const n = both(a, b);
  if (n) return constant(n[0] / n[1]);
  if (is(a, 0)) return a;
  if (is(b, 1)) return a;
  return operation('div', a, b);
}

export function neg(x: Operand): Expr {
  const a = lift(x);
  if (a.kind === 'constant') return constant(-a.value);
  if (a.kind === 'operation' && a.op === 'neg') return a.args[0];
  return operation('neg', a);
}

export function pow(x: Operand, y: Operand): Expr {
  const a = lift(x);
  const b = lift(y);
  if (is(b, 0)) return constant(1);
  if (is(b, 1)) return a;
  if (is(b, 2)) return mul(a, a);
  if (is(b, 3)) return mul(a, a, a);
  if (is(b, -1)) return div(1, a);
  if (is(b, -2)) return div(1, mul(a, a));
  if (is(b, 0.5)) return sqrt(a);
  const n = both(a, b);
  return n ? constant(n[0] ** n[1]) : operation('pow', a, b);
}

const unary =
  (op: Operator, value: (x: number) => number) =>
  (x: Operand): Expr => {
    const a = lift(x);
    return a.kind === 'constant' ? constant(value(a.value)) : operation(op, a);
  };
export const exp = unary('exp', Math.exp);
export const log = unary('log', Math.log);
export const sqrt = unary('sqrt', Math.sqrt);
export const tanh = unary('tanh', Math.tanh);

/** `test ≥ 0 ? yes : no`; only the branch taken decides the value and the slope. */
export function select(test: Operand, yes: Operand, no: Operand): Expr {
  const t = lift(test);
  const a = lift(yes);
  const b = lift(no);
  if (t.kind === 'constant') return t.value >= 0 ? a : b;
  return a === b ? a : operation('select', t, a, b);
}

export const max = (x: Operand, y: Operand): Expr => select(sub(x, y), x, y);
export const min = (x: Operand, y: Operand): Expr => select(sub(x, y), y, x);
export const abs = (x: Operand): Expr => select(x, x, neg(x));

/** Every node that the roots need, arguments before users. */
export function topological(roots: readonly Expr[]): Expr[] {
  const order: Expr[] = [];
  const seen = new Set<Expr>();
  const visit = (e: Expr): void => {
    if (seen.has(e)) return;
    seen.add(e);
    if (e.kind === 'operation' || e.kind === 'special') e.args.forEach(visit);
    order.push(e);
  };
  roots.forEach(visit);
  return order;
}

/** The slots that an expression reads. */
export function slotsOf(root: Expr): Set<number> {
  return new Set(topological([root]).flatMap((e) => (e.kind === 'input' ? [e.slot] : [])));
}

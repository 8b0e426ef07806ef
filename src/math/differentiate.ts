import {
  add,
  call,
  constant,
  div,
  type Expr,
  exp,
  log,
  mul,
  neg,
  pow,
  select,
  sqrt,
  sub,
  tanh,
} from './expression.ts';

/**
 * ∂root/∂input(slot), an expression.
 *
 * Forward mode over the graph: each node's derivative is formed once, from those of its arguments.
 */
export function differentiate(root: Expr, slot: number): Expr {
  const done = new Map<Expr, Expr>();
  const d = (e: Expr): Expr => {
    const found = done.get(e);
    if (found) return found;
    const result = rule(e, d, slot);
    done.set(e, result);
    return result;
  };
  return d(root);
}

function rule(e: Expr, d: (e: Expr) => Expr, slot: number): Expr {
  if (e.kind === 'constant') return constant(0);
  if (e.kind === 'input') return constant(e.slot === slot ? 1 : 0);
  if (e.kind === 'special') return throughSpecial(e, d);
  const [a, b, c] = e.args;
  switch (e.op) {
    case 'add':
      return add(d(a), d(b));
    case 'sub':
      return sub(d(a), d(b));
    case 'neg':
      return neg(d(a));
    case 'mul':
      return add(mul(d(a), b), mul(a, d(b)));
    case 'div':
      return sub(div(d(a), b), div(mul(e, d(b)), b));
    case 'pow':
      return add(mul(b, pow(a, sub(b, 1)), d(a)), isZero(d(b)) ? 0 : mul(e, log(a), d(b)));
    case 'exp':
      return mul(exp(a), d(a));
    case 'log':
      return div(d(a), a);
    case 'sqrt':
      return div(mul(0.5, d(a)), sqrt(a));
    case 'tanh':
      return mul(sub(1, mul(tanh(a), tanh(a))), d(a));
    case 'select':
      return select(a, d(b), d(c));
  }
}

const isZero = (e: Expr): boolean => e.kind === 'constant' && e.value === 0;

function throughSpecial(e: Expr & { kind: 'special' }, d: (e: Expr) => Expr): Expr {
  const inner = e.args.map(d);
  if (inner.every(isZero)) return constant(0);
  const partial = e.special.partials(e.args, call(e.special, ...e.args));
  return add(...inner.map((di, i) => mul(partial[i], di)));
}

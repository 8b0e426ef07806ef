import * as x from './expression.ts';
import { call, type Expr, type Operator } from './expression.ts';

const rebuild: Record<Operator, (...args: Expr[]) => Expr> = {
  add: x.add,
  sub: x.sub,
  mul: x.mul,
  div: x.div,
  neg: x.neg,
  pow: x.pow,
  exp: x.exp,
  log: x.log,
  sqrt: x.sqrt,
  tanh: x.tanh,
  select: x.select,
};

/** The expression with each input slot replaced by the expression given for it. */
export function substitute(root: Expr, by: readonly Expr[]): Expr {
  const done = new Map<Expr, Expr>();
  for (const e of x.topological([root])) {
    const at = (a: Expr): Expr => done.get(a) as Expr;
    if (e.kind === 'constant') done.set(e, e);
    else if (e.kind === 'input') done.set(e, by[e.slot]);
    else if (e.kind === 'special') done.set(e, call(e.special, ...e.args.map(at)));
    else done.set(e, rebuild[e.op](...e.args.map(at)));
  }
  return done.get(root) as Expr;
}

import { differentiate } from '../math/differentiate.ts';
import { add, call, div, type Expr, input, mul, type Special } from '../math/expression.ts';
import { generated } from '../math/kernel.ts';
import { risingRoot } from '../math/roots.ts';
import { substitute } from '../math/substitute.ts';

/**
 * The aqueous concentration x at the interface of two films, from f(x) + r·x = b with f the rising equilibrium
 * curve, r = k_a/k_o and b = c_o + r·c_a (W. K. Lewis and W. G. Whitman, Ind. Eng. Chem. 16, 1215 (1924)).
 *
 * `curve` is f over the slots 0 (x) and 1 … n (whatever else it depends on); `rest` are the values of those slots.
 * One root: f rises and r > 0. Its slopes follow from the equation, so they are bounded: ∂x/∂b = 1/(f′ + r).
 */
export function interfaceConcentration(
  curve: Expr,
  slots: number,
  b: Expr,
  r: Expr,
  rest: readonly Expr[],
): Expr {
  return call(solver(curve, slots), b, r, ...rest);
}

/** Digits of b in which f(b/r) may be lost, relative. */
const ROUNDING = 1e-14;

const known = new WeakMap<Expr, Special>();

function solver(curve: Expr, slots: number): Special {
  const found = known.get(curve);
  if (found) return found;
  // Slots of the equation: x, r, then what the curve depends on.
  const shifted = substitute(curve, [input(0), ...Array.from({ length: slots - 1 }, (_, i) => input(i + 2))]);
  const left = add(shifted, mul(input(1), input(0)));
  const partial = Array.from({ length: slots + 1 }, (_, i) => differentiate(left, i));
  const value = scalar(left, slots + 1);
  const slope = scalar(partial[0], slots + 1);
  const made: Special = {
    name: 'interface',
    evaluate(b, r, ...rest) {
      if (!Number.isFinite(b) || !(r > 0)) return Number.NaN;
      if (b === 0) return 0;
      const f = (x: number): number => value([x, r, ...rest]) - b;
      const d = (x: number): number => slope([x, r, ...rest]);
      const far = b / r;
      const guess = b / d(0);
      // A trial state far out can leave the curve below the last digit of b, or outside what it is made for.
      const beyond = Math.sign(b) * f(far);
      if (!(beyond >= 0)) return beyond >= -ROUNDING * Math.abs(b) ? far : Number.NaN;
      if (!(Math.sign(b) * f(0) <= 0)) return Number.NaN;
      return b > 0 ? risingRoot(f, d, 0, far, guess).value : risingRoot(f, d, far, 0, guess).value;
    },
    partials([, r, ...rest], x) {
      const at = (e: Expr): Expr => substitute(e, [x, r, ...rest]);
      const bySelf = at(partial[0]);
      return [
        div(1, bySelf),
        ...[1, ...rest.map((_, i) => i + 2)].map((i) => div(mul(-1, at(partial[i])), bySelf)),
      ];
    },
  };
  known.set(curve, made);
  return made;
}

/** An expression over slots as a plain function of their values. */
function scalar(e: Expr, slots: number): (args: readonly number[]) => number {
  const names = Array.from({ length: slots }, (_, i) => `s${i}`);
  const run = generated.run({ name: 'scalar', args: names, outputs: [e] }, 'assign');
  const references = Int32Array.from({ length: slots + 1 }, (_, i) => (i < slots ? i : 0));
  const board = new Float64Array(slots);
  const y = new Float64Array(1);
  return (args) => {
    for (let i = 0; i < slots; i++) board[i] = args[i];
    run(1, references, board, y);
    return y[0];
  };
}

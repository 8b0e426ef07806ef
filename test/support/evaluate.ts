import type { Expr } from '../../src/math/expression.ts';
import { generated, kernel } from '../../src/math/kernel.ts';

/** Evaluates expressions built from named numbers: `evaluate({a: 2}, ({a}) => [mul(a, a)])` is [4]. */
export function evaluate<N extends string>(
  numbers: Readonly<Record<N, number>>,
  build: (args: Readonly<Record<N, Expr>>) => readonly Expr[],
): number[] {
  const names = Object.keys(numbers) as N[];
  const k = kernel('test', names, (...args) =>
    build(Object.fromEntries(names.map((n, i) => [n, args[i]])) as Record<N, Expr>),
  );
  const board = Float64Array.from(names, (n) => numbers[n]);
  const y = new Float64Array(k.outputs.length);
  generated.run(k, 'assign')(1, Int32Array.from([...board.keys(), ...y.keys()]), board, y);
  return Array.from(y);
}

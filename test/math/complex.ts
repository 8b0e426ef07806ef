import { evaluate, type Tree } from './trees.ts';

type Complex = readonly [re: number, im: number];

const times = ([a, b]: Complex, [c, d]: Complex): Complex => [a * c - b * d, a * d + b * c];
const over = ([a, b]: Complex, [c, d]: Complex): Complex => {
  const q = c * c + d * d;
  return [(a * c + b * d) / q, (b * c - a * d) / q];
};
const exp = ([a, b]: Complex): Complex => [Math.exp(a) * Math.cos(b), Math.exp(a) * Math.sin(b)];
const log = ([a, b]: Complex): Complex => [Math.log(Math.hypot(a, b)), Math.atan2(b, a)];
const tanh = ([a, b]: Complex): Complex => {
  const q = Math.cosh(2 * a) + Math.cos(2 * b);
  return [Math.sinh(2 * a) / q, Math.sin(2 * b) / q];
};

function whole(z: Complex, n: number): Complex {
  let p: Complex = [1, 0];
  for (let k = 0; k < Math.abs(n); k++) p = times(p, z);
  return n < 0 ? over([1, 0], p) : p;
}

const STEP = 1e-100;

/**
 * A step so small along one input that the imaginary part of the value is the slope: no difference is formed.
 * `largest` is the largest value or slope on the way. W. Squire and G. Trapp, SIAM Rev. 40, 110 (1998) (from memory).
 */
export function complexStep(
  t: Tree,
  at: readonly number[],
  slot: number,
): { readonly slope: number; readonly largest: number } {
  let largest = 0;
  const go = (u: Tree): Complex => {
    const z = rule(u);
    largest = Math.max(largest, Math.abs(z[0]), Math.abs(z[1] / STEP));
    return z;
  };
  const rule = (u: Tree): Complex => {
    if (u.op === 'value') return [u.value, 0];
    if (u.op === 'input') return [at[u.slot], u.slot === slot ? STEP : 0];
    // The step must not decide the branch: squared, it takes the real part of a zero below zero.
    if (u.op === 'select') return evaluate(u.a, at) >= 0 ? go(u.b) : go(u.c);
    const a = go(u.a);
    switch (u.op) {
      case 'neg':
        return [-a[0], -a[1]];
      case 'exp':
        return exp(a);
      case 'log':
        return log(a);
      case 'sqrt':
        return exp(times([0.5, 0], log(a)));
      case 'tanh':
        return tanh(a);
    }
    const b = go(u.b);
    switch (u.op) {
      case 'add':
        return [a[0] + b[0], a[1] + b[1]];
      case 'sub':
        return [a[0] - b[0], a[1] - b[1]];
      case 'mul':
        return times(a, b);
      case 'div':
        return over(a, b);
      case 'pow':
        return u.b.op === 'value' && Number.isInteger(u.b.value)
          ? whole(a, u.b.value)
          : exp(times(b, log(a)));
    }
  };
  return { slope: go(t)[1] / STEP, largest };
}

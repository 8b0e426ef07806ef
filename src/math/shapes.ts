import { add, div, type Expr, mul, pow, select, sub } from './expression.ts';

/** The smooth switch S(x) = 3x² − 2x³, 0 below 0 and 1 above 1: C1. */
export function smoothStep(x: Expr): Expr {
  const inside = mul(x, x, sub(3, mul(2, x)));
  return select(x, select(sub(1, x), inside, 1), 0);
}

/**
 * (c/k)^s for 0 < s < 1 with a finite slope at zero: for x = c/near < 1 it is g·((2 − s)x + (s − 1)x²) with
 * g = (near/k)^s, which meets the power in value and slope at x = 1, and it goes on straight below zero.
 */
export function steepPower(c: Expr, k: Expr, s: Expr, near: number): Expr {
  const top = pow(div(near, k), s);
  const x = div(c, near);
  const close = mul(top, add(mul(sub(2, s), x), mul(sub(s, 1), x, x)));
  const straight = mul(top, sub(2, s), x);
  return select(sub(c, near), pow(div(c, k), s), select(c, close, straight));
}

/**
 * A root of f between a and b, where f changes sign, to `precision` in the argument; by the Illinois variant of
 * regula falsi, with bisection whenever that does not halve the bracket in three tries.
 *
 * Returns the end of the final bracket on the side of b, so that f has already crossed there.
 * Reference: M. Dowell and P. Jarratt, BIT 11, 168 (1971).
 */
export function crossing(f: (t: number) => number, a: number, b: number, precision: number): number {
  let lo = a;
  let hi = b;
  let flo = f(lo);
  let fhi = f(hi);
  if (flo === 0) return lo;
  let side = 0;
  let width = hi - lo;
  for (let k = 0; hi - lo > precision && k < 200; k++) {
    const slow = k % 3 === 2 && hi - lo > width / 2;
    let t = slow ? (lo + hi) / 2 : hi - (fhi * (hi - lo)) / (fhi - flo);
    if (!(t > lo && t < hi)) t = (lo + hi) / 2;
    // A point just beside the end of the bracket would shrink it from one side only.
    t = Math.min(Math.max(t, lo + precision / 4), hi - precision / 4);
    const ft = f(t);
    if (Math.sign(ft) === Math.sign(flo)) {
      lo = t;
      flo = ft;
      if (side === -1) fhi /= 2;
      side = -1;
    } else {
      hi = t;
      fhi = ft;
      if (side === 1) flo /= 2;
      side = 1;
    }
    if (k % 3 === 2) width = hi - lo;
  }
  return hi;
}

export interface Inverse {
  readonly value: number;
  readonly iterations: number;
}

/**
 * The root of a rising function on [lo, hi] by Newton's method kept inside a shrinking bracket, to 1e-12 relative.
 *
 * @throws RangeError where f has no sign change on the bracket.
 */
export function risingRoot(
  f: (x: number) => number,
  slope: (x: number) => number,
  lo: number,
  hi: number,
  guess: number,
): Inverse {
  let a = lo;
  let b = hi;
  if (f(a) > 0 || f(b) < 0) throw new RangeError(`no root between ${lo} and ${hi}`);
  let x = Math.min(Math.max(guess, a), b);
  for (let k = 1; k <= 200; k++) {
    const fx = f(x);
    if (fx === 0) return { value: x, iterations: k };
    if (fx > 0) b = x;
    else a = x;
    let next = x - fx / slope(x);
    if (!(next > a && next < b)) next = (a + b) / 2;
    const change = Math.abs(next - x);
    x = next;
    if (change <= 1e-13 * Math.abs(x) || b - a <= 1e-15 * Math.abs(b)) return { value: x, iterations: k };
  }
  return { value: x, iterations: 200 };
}

import { risingRoot } from './roots.ts';

/**
 * Monotone piecewise cubic Hermite curve through strictly rising points.
 *
 * Tangents: inside, the weighted harmonic mean of the neighbouring secants; at the ends, the three-point formula
 * kept between 0 and three secants. Below the first point the curve goes on with its tangent there, beyond the
 * last with the last secant.
 *
 * References: F. N. Fritsch and R. E. Carlson, SIAM J. Numer. Anal. 17, 238 (1980), which gives the region of
 * monotone tangents; F. N. Fritsch and J. Butland, SIAM J. Sci. Stat. Comput. 5, 300 (1984), which gives these.
 */
export class MonotoneCubic {
  readonly x: readonly number[];
  readonly y: readonly number[];
  readonly #m: number[];
  readonly #last: number;

  /** @throws RangeError where either column does not rise strictly, or with fewer than two points. */
  constructor(x: readonly number[], y: readonly number[]) {
    if (x.length < 2 || x.length !== y.length) throw new RangeError('at least two points are needed');
    for (let i = 1; i < x.length; i++)
      if (!(x[i] > x[i - 1] && y[i] > y[i - 1])) throw new RangeError(`point ${i + 1} does not rise`);
    this.x = x;
    this.y = y;
    const n = x.length;
    const secant = Array.from({ length: n - 1 }, (_, i) => (y[i + 1] - y[i]) / (x[i + 1] - x[i]));
    const step = secant.map((_, i) => x[i + 1] - x[i]);
    this.#last = secant[n - 2];
    this.#m = x.map((_, i) => {
      if (n === 2) return secant[0];
      if (i === 0) return endTangent(step[0], step[1], secant[0], secant[1]);
      if (i === n - 1) return endTangent(step[n - 2], step[n - 3], secant[n - 2], secant[n - 3]);
      const a = 2 * step[i] + step[i - 1];
      const b = step[i] + 2 * step[i - 1];
      return (a + b) / (a / secant[i - 1] + b / secant[i]);
    });
  }

  value(x: number): number {
    const last = this.x.length - 1;
    if (x <= this.x[0]) return this.y[0] + this.#m[0] * (x - this.x[0]);
    if (x > this.x[last]) return this.y[last] + this.#last * (x - this.x[last]);
    const i = interval(this.x, x);
    const h = this.x[i + 1] - this.x[i];
    const s = (x - this.x[i]) / h;
    const r = 1 - s;
    return (
      this.y[i] * r * r * (1 + 2 * s) +
      this.y[i + 1] * s * s * (3 - 2 * s) +
      h * s * r * (this.#m[i] * r - this.#m[i + 1] * s)
    );
  }

  slope(x: number): number {
    const last = this.x.length - 1;
    if (x <= this.x[0]) return this.#m[0];
    if (x > this.x[last]) return this.#last;
    const i = interval(this.x, x);
    const h = this.x[i + 1] - this.x[i];
    const s = (x - this.x[i]) / h;
    const r = 1 - s;
    const secant = (this.y[i + 1] - this.y[i]) / h;
    return 6 * s * r * secant + this.#m[i] * r * (1 - 3 * s) + this.#m[i + 1] * s * (3 * s - 2);
  }

  /** The x at which value(x) = y. */
  inverse(y: number): number {
    const last = this.x.length - 1;
    if (y <= this.y[0]) return this.x[0] + (y - this.y[0]) / this.#m[0];
    if (y > this.y[last]) return this.x[last] + (y - this.y[last]) / this.#last;
    const i = interval(this.y, y);
    const [a, b] = [this.x[i], this.x[i + 1]];
    const guess = a + ((b - a) * (y - this.y[i])) / (this.y[i + 1] - this.y[i]);
    return risingRoot(
      (x) => this.value(x) - y,
      (x) => this.slope(x),
      a,
      b,
      guess,
    ).value;
  }
}

/** Three-point estimate of the slope at an end, with its own step and secant first. Data rise, so all are > 0. */
function endTangent(h0: number, h1: number, s0: number, s1: number): number {
  const m = ((2 * h0 + h1) * s0 - h0 * s1) / (h0 + h1);
  // A tangent of zero would make the inverse infinitely steep there: a tenth of the secant is still monotone.
  return Math.min(Math.max(m, s0 / 10), 3 * s0);
}

/** The i with list[i] ≤ v < list[i + 1]. */
function interval(list: readonly number[], v: number): number {
  let lo = 0;
  let hi = list.length - 1;
  while (hi - lo > 1) {
    const mid = (lo + hi) >> 1;
    if (list[mid] <= v) lo = mid;
    else hi = mid;
  }
  return lo;
}

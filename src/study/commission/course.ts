import { crossing } from '../../math/roots.ts';

/** Looks at each step, both ends included; the course between is the polynomial through them. */
export const LOOKS = 6;
/** (−1)ⁱ·C(5, i): of six equally spaced points. */
const WEIGHTS = [1, -5, 10, -10, 5, -1] as const;
const GOLDEN = (Math.sqrt(5) - 1) / 2;

/** A point of a course within one step: share of the step, and value. */
export interface Point {
  readonly s: number;
  readonly v: number;
}

/**
 * One quantity over one step, from its values at equally spaced looks: the polynomial of fifth degree through them. A
 * dense output of fourth or fifth order is followed to its own accuracy.
 */
export class StepCourse {
  readonly #v: ArrayLike<number>;
  readonly #at: number;

  /** Values at `at` … `at + LOOKS − 1`. */
  constructor(values: ArrayLike<number>, at = 0) {
    this.#v = values;
    this.#at = at;
  }

  /** At a share of the step, by the barycentric formula: J.-P. Berrut and L. N. Trefethen, SIAM Rev. 46, 501 (2004). */
  value(s: number): number {
    let above = 0;
    let below = 0;
    for (let i = 0; i < LOOKS; i++) {
      const gap = s * (LOOKS - 1) - i;
      if (gap === 0) return this.#v[this.#at + i];
      const weight = WEIGHTS[i] / gap;
      above += weight * this.#v[this.#at + i];
      below += weight;
    }
    return above / below;
  }

  /** The looks and every turning point between them, in order: the curve rises or falls from each to the next. */
  points(): Point[] {
    const list: Point[] = [];
    const v = (i: number): number => this.#v[this.#at + i];
    const n = LOOKS - 1;
    for (let i = 0; i < LOOKS; i++) list.push({ s: i / n, v: v(i) });
    const turns: { from: number; to: number; sign: number }[] = [];
    for (let i = 1; i < n; i++)
      if ((v(i) - v(i - 1)) * (v(i + 1) - v(i)) < 0 || (v(i) !== v(i - 1) && v(i + 1) === v(i)))
        turns.push({ from: i - 1, to: i + 1, sign: Math.sign(v(i) - v(i - 1)) });
    // A turning point between an end and its neighbour shows in the slope at the end.
    const first = -137 * v(0) + 300 * v(1) - 300 * v(2) + 200 * v(3) - 75 * v(4) + 12 * v(5);
    const last = 137 * v(5) - 300 * v(4) + 300 * v(3) - 200 * v(2) + 75 * v(1) - 12 * v(0);
    if (first * (v(1) - v(0)) < 0) turns.push({ from: 0, to: 1, sign: Math.sign(first) });
    if (last * (v(n) - v(n - 1)) < 0) turns.push({ from: n - 1, to: n, sign: -Math.sign(last) });
    for (const { from, to, sign } of turns) {
      const s = this.#extreme(from / n, to / n, sign);
      list.push({ s, v: this.value(s) });
    }
    return turns.length === 0 ? list : list.sort((p, q) => p.s - q.s);
  }

  #extreme(from: number, to: number, sign: number): number {
    let [a, b] = [from, to];
    let c = b - GOLDEN * (b - a);
    let d = a + GOLDEN * (b - a);
    while (b - a > 1e-5) {
      if (sign * this.value(c) > sign * this.value(d)) [b, d] = [d, c];
      else [a, c] = [c, d];
      c = b - GOLDEN * (b - a);
      d = a + GOLDEN * (b - a);
    }
    return (a + b) / 2;
  }

  /** Where |value − middle| last comes back to `half` between two shares, outside at the first and inside at the other. */
  entry(middle: number, half: number, from: number, to: number): number {
    return crossing((s) => Math.abs(this.value(s) - middle) - half, from, to, 1e-12);
  }

  /** The share of the step at which the value passes a bound between two shares. */
  passes(bound: number, from: number, to: number): number {
    return crossing((s) => this.value(s) - bound, from, to, 1e-12);
  }
}

import { type EliminationPlan, eliminationPlan } from './elimination-plan.ts';
import type { Factors } from './linear.ts';
import type { F, Pattern } from './system.ts';

/** Nothing that is measured is as small as that; it keeps the error of an empty row at zero. */
export const TINY = 1e-300;

/**
 * LU factors of W = shift·I − A without pivoting, on a pattern that never changes.
 *
 * A solve is two flat lists of x[i] −= value·x[j] with a scaling between, in place and without permuting: L carries
 * 1/pivot of its column, U that of its row. Blocks below the diagonal blocks are kept as they are and only enter
 * the solves.
 */
export class Elimination implements Factors {
  readonly b: F;
  readonly r: F;
  readonly worst: F = new Float64Array(1);
  readonly #pattern: Pattern;
  readonly #plan: EliminationPlan;
  #a: F = new Float64Array(0);
  #shift = 0;
  /** Values of the forward list, of the backward list, and pivots. */
  readonly #values: F;
  /** Reciprocal pivots by place. */
  readonly #reciprocal: F;

  constructor(pattern: Pattern) {
    this.#pattern = pattern;
    this.#plan = eliminationPlan(pattern);
    this.b = new Float64Array(this.#plan.size);
    this.r = new Float64Array(this.#plan.size);
    this.#values = new Float64Array(this.#plan.row.length + this.#plan.size);
    this.#reciprocal = new Float64Array(this.#plan.size);
  }

  get size(): number {
    return this.#plan.size;
  }

  /** Multiply-adds of one factorisation. */
  get work(): number {
    return this.#plan.work;
  }

  /** Factors shift·I − A, A given by its values on the pattern. A vanishing pivot leaves non-finite factors. */
  factor(values: F, shift: number): void {
    this.#a = values;
    this.#shift = shift;
    const v = this.#values;
    const d = this.#reciprocal;
    const { load, program: p } = this.#plan;
    const pivots = this.#plan.row.length;
    v.fill(0, 0, pivots);
    v.fill(shift, pivots);
    for (let k = 0; k < load.length; k += 2) v[load[k]] -= values[load[k + 1]];
    for (let at = 0; at < p.length; ) {
      const entry = p[at];
      const pivot = p[at + 1];
      const count = p[at + 2];
      const upper = p[at + 3];
      at += 4;
      if (entry < 0) {
        const r = 1 / v[pivots + pivot];
        d[pivot] = r;
        for (let q = 0; q < count; q++) v[upper + q] *= r;
        continue;
      }
      const a = v[entry];
      v[entry] = a * d[pivot];
      for (let q = 0; q < count; q++, at++) v[p[at]] -= a * v[upper + q];
    }
  }

  /** Solves W·x = b; `x` holds b on entry. */
  solve(x: F): void {
    const v = this.#values;
    const d = this.#reciprocal;
    const { row, column, order, blocks, backward } = this.#plan;
    let f = 0;
    let b = backward;
    for (let q = 0; q < blocks.length; q += 4) {
      const forwardEnd = blocks[q];
      const backwardEnd = blocks[q + 3];
      const last = blocks[q + 2];
      for (; f < forwardEnd; f++) x[row[f]] -= v[f] * x[column[f]];
      for (let i = blocks[q + 1]; i < last; i++) {
        const k = order[i];
        x[k] *= d[k];
      }
      for (; b < backwardEnd; b++) x[row[b]] -= v[b] * x[column[b]];
    }
  }

  measure(x: F): void {
    const { rowStart, column } = this.#pattern;
    const values = this.#a;
    let worst = 0;
    for (let i = 0; i < x.length; i++) {
      const own = this.#shift * x[i];
      let r = this.b[i] - own;
      let size = Math.abs(this.b[i]) + Math.abs(own);
      for (let k = rowStart[i]; k < rowStart[i + 1]; k++) {
        const term = values[k] * x[column[k]];
        r += term;
        size += Math.abs(term);
      }
      this.r[i] = r;
      // Math.max keeps a NaN, whatever the later rows say.
      worst = Math.max(worst, Math.abs(r) / (size + TINY));
    }
    this.worst[0] = worst;
  }
}

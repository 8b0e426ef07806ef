import { Elimination } from './elimination.ts';
import { PivotedElimination } from './pivoting.ts';
import type { F, Pattern } from './system.ts';

/** Row-wise backward error above which a solution is not taken as it is. A closure of 1e-9 needs some margin. */
const TRUSTED_ERROR = 1e-12;

export interface LinearWork {
  factorisations: number;
  solves: number;
  refinements: number;
  pivotings: number;
}

/**
 * Solves (shift·I − A)·u = b, fast where elimination in fixed order is safe, correct where it is not.
 *
 * The first solution after a factorisation is measured against W itself; if it fails, all solutions with these
 * factors are refined once, and if that fails too, W is factored again with pivoting. Row-wise backward error:
 * W. Oettli and W. Prager, Numer. Math. 6, 405 (1964).
 */
export class LinearSolver {
  readonly work: LinearWork = { factorisations: 0, solves: 0, refinements: 0, pivotings: 0 };
  readonly #pattern: Pattern;
  readonly #fast: Elimination;
  #safe: PivotedElimination | null = null;
  #mode: 'fast' | 'refined' | 'pivoted' = 'fast';
  #fresh = true;
  #values: F = new Float64Array(0);
  #shift = 0;
  readonly #b: F;
  readonly #r: F;
  #worst = 0;

  constructor(pattern: Pattern) {
    this.#pattern = pattern;
    this.#fast = new Elimination(pattern);
    this.#b = new Float64Array(this.#fast.size);
    this.#r = new Float64Array(this.#fast.size);
  }

  /** Multiply-adds of one factorisation. */
  get multiplications(): number {
    return this.#fast.work;
  }

  factor(values: F, shift: number): void {
    this.work.factorisations += 1;
    this.#values = values;
    this.#shift = shift;
    this.#mode = 'fast';
    this.#fresh = true;
    this.#fast.factor(values, shift);
  }

  /** `x` holds b on entry and the solution on return; returns false only where W is singular. */
  solve(x: F): boolean {
    this.work.solves += 1;
    if (this.#mode === 'fast' && !this.#fresh) {
      this.#fast.solve(x);
      return true;
    }
    this.#b.set(x);
    if (this.#mode === 'pivoted') {
      this.#safe?.solve(x);
      return true;
    }
    this.#fast.solve(x);
    if (this.#mode === 'refined') {
      this.#refine(x);
      return true;
    }
    this.#fresh = false;
    this.#measure(x);
    if (this.#worst <= TRUSTED_ERROR) return true;
    // With a right-hand side that is no number there is nothing to hold against the factors.
    if (!this.#b.every(Number.isFinite)) return true;
    this.#refine(x);
    this.#measure(x);
    if (this.#worst <= TRUSTED_ERROR) {
      this.#mode = 'refined';
      return true;
    }
    this.#safe ??= new PivotedElimination(this.#pattern);
    this.work.pivotings += 1;
    this.#mode = 'pivoted';
    if (!this.#safe.factor(this.#values, this.#shift)) return false;
    x.set(this.#b);
    this.#safe.solve(x);
    return true;
  }

  #refine(x: F): void {
    this.work.refinements += 1;
    this.#measure(x);
    this.#fast.solve(this.#r);
    for (let i = 0; i < x.length; i++) x[i] += this.#r[i];
  }

  /** Leaves b − W·x in #r and the largest row-wise backward error in #worst. */
  #measure(x: F): void {
    const { rowStart, column } = this.#pattern;
    const values = this.#values;
    let worst = 0;
    for (let i = 0; i < x.length; i++) {
      const own = this.#shift * x[i];
      let r = this.#b[i] - own;
      let size = Math.abs(this.#b[i]) + Math.abs(own);
      for (let k = rowStart[i]; k < rowStart[i + 1]; k++) {
        const term = values[k] * x[column[k]];
        r += term;
        size += Math.abs(term);
      }
      this.#r[i] = r;
      // Math.max keeps a NaN, whatever the later rows say.
      if (size !== 0) worst = Math.max(worst, Math.abs(r) / size);
    }
    this.#worst = worst;
  }
}

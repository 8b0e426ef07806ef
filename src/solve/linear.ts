import { Elimination } from './elimination.ts';
import { PivotedElimination } from './pivoting.ts';
import type { F, Pattern } from './system.ts';

/** An elimination in a fixed order. */
export interface Factors {
  readonly size: number;
  /** Multiply-adds of one factorisation. */
  readonly work: number;
  /** The right-hand side as it was, set by who solves; what `measure` has left of it. */
  readonly b: F;
  readonly r: F;
  /** Factors shift·I − A, A given by its values on the pattern. */
  factor(values: F, shift: number): void;
  /** Solves in place: `x` holds b on entry. */
  solve(x: F): void;
  /** Leaves b − W·x in r, and the largest row-wise backward error in `worst`: NaN where anything is no number. */
  measure(x: F): void;
  readonly worst: F;
}

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
  readonly #fast: Factors;
  #safe: PivotedElimination | null = null;
  #mode: 'fast' | 'refined' | 'pivoted' = 'fast';
  #fresh = true;
  #values: F = new Float64Array(0);
  #shift = 0;
  readonly #b: F;

  constructor(pattern: Pattern, factors: Factors = new Elimination(pattern)) {
    this.#pattern = pattern;
    this.#fast = factors;
    this.#b = factors.b;
  }

  /** Whether the factors at hand have been measured and are used as they are. */
  get trusted(): boolean {
    return this.#mode === 'fast' && !this.#fresh;
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
    this.#fast.measure(x);
    if (this.#fast.worst[0] <= TRUSTED_ERROR) return true;
    // With a right-hand side that is no number there is nothing to hold against the factors.
    if (!this.#b.every(Number.isFinite)) return true;
    this.#refine(x);
    this.#fast.measure(x);
    if (this.#fast.worst[0] <= TRUSTED_ERROR) {
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
    this.#fast.measure(x);
    const { r } = this.#fast;
    this.#fast.solve(r);
    for (let i = 0; i < x.length; i++) x[i] += r[i];
  }
}

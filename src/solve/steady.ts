import { LinearSolver } from './linear.ts';
import type { F, Pattern, System } from './system.ts';

/** Largest scaled change per second that still counts as steady, relative to the contents of each place. */
const STEADY = 1e-13;
/** Newton's last correction relative to the contents: the digits of the answer. */
const DIGITS = 1e-11;
/** A small residual counts only with small corrections: contents that grow without end hide a constant gain. */
const SMALL_CORRECTION = 1e-6;
const MOST_STEPS = 400;
/** First pseudo-time step [s]: shorter than any mixer, so that the start is followed, not jumped over. */
const FIRST_STEP = 30;
/** Beyond this pseudo-time step [s] the iteration is Newton's. */
const NEWTON_STEP = 1e14;

export type Steady =
  | { readonly found: true; readonly state: F; readonly iterations: number; readonly residual: number }
  | { readonly found: false; readonly reason: string; readonly place: string; readonly residual: number };

/**
 * Steady state for constant inputs, by pseudo-transient continuation from `start`: linearly implicit Euler steps
 * whose length grows as the residual falls, so that it follows the plant's own way to its steady state where
 * there are several, and ends as Newton's method.
 *
 * Rows as in `SteadyRow`: totals and drifting volumes keep their values, the contents of a drifting volume become
 * stationary in composition. Residuals and corrections are judged against the contents of each place.
 * Reference: C. T. Kelley and D. E. Keyes, SIAM J. Numer. Anal. 35, 508 (1998).
 */
export function steadyState(system: System, w: F, p: F, start: F): Steady {
  const rows = new SteadyRows(system);
  const linear = new LinearSolver(rows.pattern);
  const n = start.length;
  let x = Float64Array.from(start);
  const f = new Float64Array(n);
  const dx = new Float64Array(n);
  const values = new Float64Array(rows.pattern.column.length);
  const trial = new Float64Array(n);
  const g = new Float64Array(n);
  rows.residual(x, w, p, f);
  const lost = f.findIndex((v) => !Number.isFinite(v));
  if (lost >= 0) {
    const reason = 'the balances have no finite value at the start';
    return { found: false, reason, place: system.places[lost].path, residual: Infinity };
  }
  let size = norm(system, x, f);
  let tau = FIRST_STEP;
  let at = worst(system, x, f);
  let newton = 0;
  for (let k = 1; k <= MOST_STEPS; k++) {
    rows.jacobian(x, w, p, values);
    linear.factor(values, 1 / tau);
    dx.set(f);
    const solved = linear.solve(dx);
    let good = solved;
    for (let i = 0; i < n; i++) {
      trial[i] = x[i] + dx[i];
      const floor = system.places[i].floor;
      if (
        !Number.isFinite(trial[i]) ||
        (floor !== null && trial[i] < floor - 0.01 * (Math.abs(x[i]) + system.places[i].scale))
      ) {
        good = false;
        at = i;
        break;
      }
    }
    const change = good ? norm(system, x, dx) : Infinity;
    // A pseudo-time step that changes a place by more than its own contents is no longer on the plant's way.
    if (good && change > 2 && tau > 1e-6) good = false;
    if (good) {
      rows.residual(trial, w, p, g);
      good = g.every(Number.isFinite);
    }
    if (!good) {
      tau /= 8;
      if (tau < 1e-9) break;
      continue;
    }
    const after = norm(system, trial, g);
    at = worst(system, x, dx);
    x = Float64Array.from(trial);
    f.set(g);
    newton = tau >= NEWTON_STEP ? newton + 1 : 0;
    if (newton >= 1 && change <= DIGITS) return { found: true, state: x, iterations: k, residual: after };
    if (newton >= 2 && after <= STEADY && change <= SMALL_CORRECTION)
      return { found: true, state: x, iterations: k, residual: after };
    const growth = after > 0 ? size / after : 10;
    // The residual may rise at first while fronts form: the step still grows as long as changes stay small.
    tau = Math.min(NEWTON_STEP, tau * Math.min(10, Math.max(change < 0.3 ? 1.8 : 0.5, growth * 1.5)));
    // Small changes with a rising residual are the departure from a state that repels: it is not to be jumped over.
    if (change < 1e-3 && (after < size || after <= STEADY)) tau = Math.min(NEWTON_STEP, tau * 100);
    size = after;
  }
  return {
    found: false,
    reason: 'the balances do not come to rest',
    place: system.places[at].path,
    residual: size,
  };
}

/** Magnitude that a change of place i is measured against. */
const contents = (system: System, x: F, i: number): number => Math.abs(x[i]) + system.places[i].scale;

function norm(system: System, x: F, v: F): number {
  let largest = 0;
  for (let i = 0; i < v.length; i++) {
    if (system.places[i].kind === 'total') continue;
    largest = Math.max(largest, Math.abs(v[i]) / contents(system, x, i));
  }
  return largest;
}

function worst(system: System, x: F, v: F): number {
  let at = 0;
  let largest = -1;
  for (let i = 0; i < v.length; i++) {
    if (system.places[i].kind === 'total') continue;
    const r = Math.abs(v[i]) / contents(system, x, i);
    if (r > largest) {
      largest = r;
      at = i;
    }
  }
  return at;
}

/** The System with its rows as they count at steady state, on a pattern wide enough for the sums. */
export class SteadyRows {
  readonly pattern: Pattern;
  readonly #system: System;
  readonly #from: Int32Array;
  readonly #a: F;
  readonly #dx: F;
  #sums: { row: number; members: readonly number[]; kept: number; slots: number[] }[] = [];

  constructor(system: System) {
    this.#system = system;
    const n = system.places.length;
    const columns: number[][] = [];
    for (let i = 0; i < n; i++) {
      const own = new Set(system.A.column.subarray(system.A.rowStart[i], system.A.rowStart[i + 1]));
      own.add(i);
      const row = system.steady[i];
      if (typeof row === 'object' && 'keepsSumOf' in row) for (const m of row.keepsSumOf) own.add(m);
      columns.push([...own].sort((a, b) => a - b));
    }
    const rowStart = new Int32Array(n + 1);
    columns.forEach((c, i) => {
      rowStart[i + 1] = rowStart[i] + c.length;
    });
    this.pattern = { rowStart, column: Int32Array.from(columns.flat()) };
    this.#from = new Int32Array(this.pattern.column.length).fill(-1);
    for (let i = 0; i < n; i++)
      for (let k = system.A.rowStart[i]; k < system.A.rowStart[i + 1]; k++)
        this.#from[this.#slot(i, system.A.column[k])] = k;
    this.#a = new Float64Array(system.A.column.length);
    this.#dx = new Float64Array(n);
    system.steady.forEach((row, i) => {
      if (typeof row !== 'object' || !('keepsSumOf' in row)) return;
      const slots = row.keepsSumOf.map((m) => this.#slot(i, m));
      this.#sums.push({ row: i, members: row.keepsSumOf, kept: Number.NaN, slots });
    });
  }

  #slot(row: number, column: number): number {
    let k = this.pattern.rowStart[row];
    while (this.pattern.column[k] !== column) k += 1;
    return k;
  }

  residual(x: F, w: F, p: F, f: F): void {
    const { steady } = this.#system;
    this.#system.rhs(x, w, p, this.#dx);
    for (let i = 0; i < x.length; i++) {
      const row = steady[i];
      if (row === 'free') f[i] = this.#dx[i];
      else if (row === 'hold') f[i] = 0;
      else if ('followsVolume' in row)
        f[i] = this.#dx[i] - (x[i] / x[row.followsVolume]) * this.#dx[row.followsVolume];
    }
    for (const s of this.#sums) {
      const sum = s.members.reduce((q, m) => q + x[m], 0);
      if (Number.isNaN(s.kept)) s.kept = sum;
      f[s.row] = s.kept - sum;
    }
  }

  /** Call after `residual` at the same point. */
  jacobian(x: F, w: F, p: F, values: F): void {
    const { steady } = this.#system;
    this.#system.jacobian(x, w, p, this.#a);
    this.#system.rhs(x, w, p, this.#dx);
    for (let k = 0; k < values.length; k++) values[k] = this.#from[k] < 0 ? 0 : this.#a[this.#from[k]];
    const { rowStart, column } = this.pattern;
    for (let i = 0; i < x.length; i++) {
      const row = steady[i];
      if (row === 'free') continue;
      if (row === 'hold') {
        values.fill(0, rowStart[i], rowStart[i + 1]);
        // A held row must not become singular as the pseudo-time step grows.
        values[this.#slot(i, i)] = -1;
      } else if ('followsVolume' in row) {
        const v = row.followsVolume;
        for (let k = rowStart[i]; k < rowStart[i + 1]; k++)
          if (column[k] === i) values[k] -= this.#dx[v] / x[v];
      }
    }
    for (const s of this.#sums) {
      values.fill(0, rowStart[s.row], rowStart[s.row + 1]);
      for (const k of s.slots) values[k] -= 1;
    }
  }
}

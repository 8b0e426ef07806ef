import { type Complex, hessenbergEigenvalues, hessenbergVector } from '../math/eigen.ts';
import { randomNumbers } from '../math/random.ts';
import { LinearSolver } from './linear.ts';
import { SteadyRows } from './steady.ts';
import type { F, System } from './system.ts';

/** One way in which a small disturbance of a steady state dies away (or grows): e^(rate·t), turning at `frequency`. */
export interface Mode {
  /** 1/s; negative where it dies away. */
  readonly rate: number;
  /** rad/s; above zero where it swings: then the mode stands for a conjugate pair. */
  readonly frequency: number;
  /** Share of each place in the mode, in the place's own unit, up to a common complex factor. */
  readonly shape: Complex<F>;
  /** Length of A·v − λ·v relative to λ·v, estimated from the projection. */
  readonly residual: number;
}

/** 1/s: a shift that makes what has no rate of its own (a bypassed stage) no zero pivot, 300 years in time. */
const SHIFT = 1e-10;
/** Slower than that is at rest for any purpose: 30 years. */
const AT_REST = 1e-9;
const CONVERGED = 1e-9;
/** By how much, relatively, round-off may part what belongs together. */
const SPLIT = 1e-4;
/** An imaginary part below this share is round-off. */
const REAL = 1e-8;
/** Vectors of the first projection, and at most. */
const FIRST = 24;
/** The slowest mode alone says how long to wait: few digits do. */
const FIRST_OF_ONE = 10;
const CONVERGED_ONE = 1e-5;
const MOST = 192;

/**
 * The `count` modes nearest to rest of the exact linearisation at a steady state, slowest first: Arnoldi's method on
 * (σ·I − A)⁻¹ with full reorthogonalisation, one sparse factorisation in all. Eigenvalues θ of that operator are
 * 1/(σ − λ), so what decays most slowly comes out first, be it real or a conjugate pair.
 *
 * Rows count as they do at steady state (`SteadyRow`): boundary totals and held places do not move, and of a set that
 * only circulates one row says that its sum stays, which takes its zero out of the spectrum and leaves the rest as it
 * is. Each place is measured against its own contents, or kg and m³ would not compare.
 *
 * References: W. E. Arnoldi, Q. Appl. Math. 9, 17 (1951); Y. Saad, Numerical Methods for Large Eigenvalue Problems
 * (1992), ch. VI and VIII (from memory). One mode is found to five digits, several to nine. Returns fewer than `count` where there are fewer, none where A cannot be solved with.
 */
export function slowModes(system: System, x: F, w: F, p: F, count: number): Mode[] {
  const rows = new SteadyRows(system);
  const n = x.length;
  const values = new Float64Array(rows.pattern.column.length);
  rows.residual(x, w, p, new Float64Array(n));
  rows.jacobian(x, w, p, values);
  if (!values.every(Number.isFinite)) return [];
  const linear = new LinearSolver(rows.pattern);
  linear.factor(values, SHIFT);
  const counts = Uint8Array.from(system.steady, (row, i) =>
    system.places[i].kind === 'total' || row === 'hold' || (typeof row === 'object' && 'keepsSumOf' in row)
      ? 0
      : 1,
  );
  const order = counts.reduce((s, c) => s + c, 0);
  if (order === 0) return [];
  const size = Float64Array.from(system.places, (q, i) => Math.abs(x[i]) + q.scale);
  const apply = (v: F, to: F): boolean => {
    for (let i = 0; i < n; i++) to[i] = counts[i] ? v[i] * size[i] : 0;
    if (!linear.solve(to)) return false;
    for (let i = 0; i < n; i++) to[i] = counts[i] ? to[i] / size[i] : 0;
    return to.every(Number.isFinite);
  };
  const [first, close] = count === 1 ? [FIRST_OF_ONE, CONVERGED_ONE] : [FIRST, CONVERGED];
  for (let m = Math.min(order, first); ; m = Math.min(order, MOST, 2 * m)) {
    const space = arnoldi(apply, counts, m);
    if (space === null) return [];
    const found = ritz(space, count);
    if (found === null) return [];
    const converged = found.length === count && found.every((q) => q.residual <= close);
    const done = converged || m === order || m >= MOST;
    if (!done) continue;
    return found
      .map(({ theta, vector, residual }): Mode => {
        const square = theta.re ** 2 + theta.im ** 2;
        return {
          rate: SHIFT - theta.re / square,
          frequency: Math.abs(theta.im / square),
          shape: inPlaces(vector, space, size),
          residual,
        };
      })
      .sort((a, b) => b.rate - a.rate);
  }
}

interface Space {
  readonly basis: readonly F[];
  /** Row-major, `stride` apart. */
  readonly h: Float64Array;
  readonly stride: number;
}

/** m vectors of the Krylov space, or null where the operator fails. */
function arnoldi(apply: (v: F, to: F) => boolean, counts: Uint8Array, m: number): Space | null {
  const n = counts.length;
  const h = new Float64Array((m + 1) * m);
  const basis: F[] = [];
  const random = randomNumbers(1);
  const fresh = (): F => {
    const v = Float64Array.from(counts, (c) => (c ? 0.5 + random() : 0));
    orthogonal(v, basis);
    orthogonal(v, basis);
    return scaled(v, 1 / length(v));
  };
  basis.push(fresh());
  for (let j = 0; j < m; j++) {
    const v = new Float64Array(n);
    if (!apply(basis[j], v)) return null;
    const before = length(v);
    const once = orthogonal(v, basis);
    const again = orthogonal(v, basis);
    for (let i = 0; i <= j; i++) h[i * m + j] = once[i] + again[i];
    const left = length(v);
    if (j + 1 === m) {
      h[m * m + j] = left;
      break;
    }
    // An invariant space: what is outside of it is found from a new start.
    if (left <= 1e-13 * before) basis.push(fresh());
    else {
      h[(j + 1) * m + j] = left;
      basis.push(scaled(v, 1 / left));
    }
  }
  return { basis, h, stride: m };
}

interface Ritz {
  readonly theta: Complex;
  readonly vector: Complex<F>;
  readonly residual: number;
}

/** The `count` largest Ritz values (one of each conjugate pair) with their vectors, or null where none are found. */
function ritz({ h, stride: m, basis }: Space, count: number): Ritz[] | null {
  const values = hessenbergEigenvalues(h, m, m);
  if (values === null) return null;
  const size = (q: Complex): number => Math.hypot(q.re, q.im);
  // λ = σ − 1/θ. What stands still would take all the places of what still moves.
  const moves = (q: Complex): boolean =>
    Math.hypot(SHIFT - q.re / size(q) ** 2, q.im / size(q) ** 2) > AT_REST;
  return oneOfEachPair(values)
    .filter(moves)
    .sort((a, b) => size(b) - size(a))
    .slice(0, count)
    .map((theta) => {
      const vector = hessenbergVector(h, basis.length, m, theta);
      const last = Math.hypot(vector.re[m - 1], vector.im[m - 1]);
      return { theta, vector, residual: (h[m * m + m - 1] * last) / size(theta) };
    });
}

/** Without the lower ones of conjugate pairs. A multiple eigenvalue falls apart by round-off, and not into exact pairs. */
function oneOfEachPair(all: readonly Complex[]): Complex[] {
  const size = (q: Complex): number => Math.hypot(q.re, q.im);
  const straight = all.map((q) => (Math.abs(q.im) <= REAL * size(q) ? { re: q.re, im: 0 } : q));
  const upper = straight.filter((q) => q.im > 0);
  const free = new Set(upper);
  const lower = straight.filter((q) => q.im < 0).sort((a, b) => a.im - b.im);
  const lone = lower.filter((q) => {
    const gap = (u: Complex): number => Math.hypot(u.re - q.re, u.im + q.im);
    const partner = [...free].reduce<Complex | null>((a, b) => (a && gap(a) <= gap(b) ? a : b), null);
    if (partner === null || gap(partner) > SPLIT * size(q)) return true;
    free.delete(partner);
    return false;
  });
  return [...straight.filter((q) => q.im === 0), ...upper, ...lone];
}

function inPlaces(v: Complex<F>, { basis }: Space, size: F): Complex<F> {
  const part = (weights: F): F => {
    const y = new Float64Array(size.length);
    basis.forEach((b, j) => {
      for (let i = 0; i < y.length; i++) y[i] += weights[j] * b[i] * size[i];
    });
    return y;
  };
  return { re: part(v.re), im: part(v.im) };
}

/** Takes the basis out of v; returns how much of each was in it. */
function orthogonal(v: F, basis: readonly F[]): number[] {
  return basis.map((b) => {
    let s = 0;
    for (let i = 0; i < v.length; i++) s += v[i] * b[i];
    for (let i = 0; i < v.length; i++) v[i] -= s * b[i];
    return s;
  });
}

function length(v: F): number {
  let s = 0;
  for (let i = 0; i < v.length; i++) s += v[i] * v[i];
  return Math.sqrt(s);
}

const scaled = (v: F, by: number): F => v.map((q) => q * by);

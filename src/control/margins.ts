import { abs, arg, plus } from '../math/complex.ts';
import type { Complex } from '../math/eigen.ts';

/** Open loop L at ω rad/s, with the sign that makes 1 + L = 0 the limit of stability. */
export type OpenLoop = (omega: number) => Complex;

export interface Margins {
  /** Whether the closed loop is stable; without it the other figures say nothing. */
  readonly stable: boolean;
  /** Factor on the gain until it swings for ever; Infinity: none. */
  readonly gain: number;
  /** Degrees. */
  readonly phase: number;
  /** s of further delay until it swings for ever. */
  readonly delay: number;
  /** Largest |1/(1 + L)|. */
  readonly sensitivity: number;
  readonly sensitivityAt: number;
  /** rad/s at which L is negative real, and at which |L| is 1; NaN: none. */
  readonly crossover180: number;
  readonly crossover: number;
}

/** Frequencies looked at on a logarithmic scale. */
const LOOKS = 240;
const ONE = { re: 1, im: 0 };

/** Frequencies from `from` to `to`, evenly on a logarithmic scale. */
export const logSpace = (from: number, to: number, n: number): number[] =>
  Array.from({ length: n }, (_, k) => (k === n - 1 ? to : from * (to / from) ** (k / (n - 1))));

/**
 * Margins of a loop with one integrator whose own parts are stable, from its response on (0, top]; for a sampled loop
 * top = π/h. Crossings are bracketed on the grid and found by bisection. The loop is stable when 1 + L turns by a
 * quarter from ω → 0, where it comes from −j∞, to the top (Nyquist); where the top is short of real, to its angle.
 */
export function margins(L: OpenLoop, bottom: number, top: number, looks = LOOKS): Margins {
  const grid = logSpace(bottom, top, looks);
  const at = grid.map(L);
  let sensitivity = 0;
  let sensitivityAt = bottom;
  let gain = Infinity;
  let crossover180 = Number.NaN;
  let crossover = Number.NaN;
  let phase = Infinity;
  let delay = Infinity;
  let winding = arg(plus(ONE, at[0]));
  for (let k = 0; k < looks; k++) {
    const s = 1 / abs(plus(ONE, at[k]));
    if (s > sensitivity) {
      sensitivity = s;
      sensitivityAt = grid[k];
    }
    if (k === 0) continue;
    winding += turned(plus(ONE, at[k - 1]), plus(ONE, at[k]));
    const [a, b] = [at[k - 1], at[k]];
    // The negative real axis is crossed, or met at the top of a sampled loop.
    if (a.im !== 0 && Math.sign(a.im) !== Math.sign(b.im) && (a.re < 0 || b.re < 0)) {
      const w = bisect((q) => L(q).im, grid[k - 1], grid[k], Math.sign(a.im));
      const here = L(w);
      if (here.re < 0 && 1 / abs(here) < gain) {
        gain = 1 / abs(here);
        crossover180 = w;
      }
    }
    if (abs(a) >= 1 !== abs(b) >= 1) {
      const w = bisect((q) => abs(L(q)) - 1, grid[k - 1], grid[k], abs(a) >= 1 ? 1 : -1);
      const p = 180 + wrapped((arg(L(w)) * 180) / Math.PI);
      if (Math.abs(p) < Math.abs(phase)) {
        phase = p;
        crossover = w;
      }
      delay = Math.min(delay, (p * Math.PI) / 180 / w);
    }
  }
  const last = at[looks - 1];
  if (last.re < 0 && Math.abs(last.im) <= 1e-9 * abs(last) && 1 / abs(last) < gain) {
    gain = 1 / abs(last);
    crossover180 = top;
  }
  const k = grid.indexOf(sensitivityAt);
  const peak = climb(
    (q) => 1 / abs(plus(ONE, L(q))),
    grid[Math.max(0, k - 1)],
    grid[Math.min(looks - 1, k + 1)],
  );
  if (peak.value > sensitivity) {
    sensitivity = peak.value;
    sensitivityAt = peak.at;
  }
  return {
    stable: Math.abs(winding - arg(plus(ONE, last))) < 1,
    gain,
    phase,
    delay,
    sensitivity,
    sensitivityAt,
    crossover180,
    crossover,
  };
}

/** −360 < φ ≤ 0 */
const wrapped = (degrees: number): number => (degrees > 0 ? degrees - 360 : degrees);

function turned(a: Complex, b: Complex): number {
  return Math.atan2(a.re * b.im - a.im * b.re, a.re * b.re + a.im * b.im);
}

function bisect(f: (w: number) => number, from: number, to: number, side: number): number {
  let [lo, hi] = [from, to];
  for (let n = 0; n < 50; n++) {
    const mid = Math.sqrt(lo * hi);
    if (side * f(mid) > 0) lo = mid;
    else hi = mid;
  }
  return Math.sqrt(lo * hi);
}

/** The largest value between two points, by golden section. */
function climb(f: (w: number) => number, from: number, to: number): { at: number; value: number } {
  const golden = (Math.sqrt(5) - 1) / 2;
  let [a, b] = [from, to];
  for (let n = 0; n < 40; n++) {
    const c = b - golden * (b - a);
    const d = a + golden * (b - a);
    if (f(c) > f(d)) b = d;
    else a = c;
  }
  return { at: (a + b) / 2, value: f((a + b) / 2) };
}

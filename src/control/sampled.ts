import { over as divided, minus, plus, scale, times, turn } from '../math/complex.ts';
import {
  type Dense,
  exponential,
  type Hessenberg,
  hessenberg,
  identity,
  multiply,
  resolvent,
  zeros,
} from '../math/dense.ts';
import type { Complex } from '../math/eigen.ts';
import type { LinearPlant } from './linearise.ts';
import { DERIVATIVE_FILTER, type PidSettings } from './spec.ts';

/** How a loop looks at its plant. */
export interface Sampling {
  /** s */
  readonly every: number;
  readonly delay: number;
  readonly takes: 'grab' | 'composite';
  readonly runs: 'on each result' | 'scan';
}

/**
 * A linear plant as a sampled loop meets it, exact in z. An output that holds over h and takes effect `delay` late, with
 * delay = d·h + δ, obeys
 *
 *   x_{k+1} = Φ(h)·x_k + Γ(h − δ)·u_{k−d} + Φ(h − δ)·Γ(δ)·u_{k−d−1}
 *
 * with Φ = e^{Aτ}, Γ = ∫e^{As}B ds (the matrix exponential of the plant with its inputs as states gives both). Beside the
 * held output a ramped one is kept, G/s: PI on the held value is Kc·(held + ramped/Ti). K. J. Åström and B. Wittenmark,
 * Computer-Controlled Systems, 3rd ed. (1997), ch. 2 (from memory).
 */
export class SampledPlant {
  readonly sampling: Sampling;
  readonly #h: Hessenberg;
  readonly #whole: number;
  readonly #direct: number;

  constructor(plant: LinearPlant, sampling: Sampling) {
    this.sampling = sampling;
    const { every: h, delay, takes } = sampling;
    const n = plant.a.n;
    // States, the ramp r with r' = v, and for a composite the integral of what is measured.
    const mean = takes === 'composite';
    const m = n + 1 + (mean ? 1 : 0);
    const a = zeros(m);
    const b = zeros(m, 2);
    const direct = plant.d.a[0];
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < n; j++) a.a[i * m + j] = plant.a.a[i * n + j];
      a.a[i * m + n] = plant.b.a[i * plant.b.m];
      b.a[i * 2] = plant.b.a[i * plant.b.m];
    }
    b.a[n * 2 + 1] = 1;
    const c = zeros(1, m);
    const measured = c.a;
    for (let j = 0; j < n; j++) measured[j] = plant.c.a[j];
    measured[n] = direct;
    if (mean) {
      for (let j = 0; j <= n; j++) a.a[(n + 1) * m + j] = measured[j];
      b.a[(n + 1) * 2] = direct;
      measured.fill(0);
      measured[n + 1] = 1;
    }
    // A delay that rounding puts beside a whole number of intervals is that number.
    const d = Math.floor(delay / h + 1e-12);
    const delta = Math.max(0, delay - d * h);
    const early = discretise(a, b, delta);
    const late = discretise(a, b, h - delta);
    const phi = multiply(late.phi, early.phi);
    const old = multiply(late.phi, early.gamma);
    const all = zeros(m, 4);
    for (let i = 0; i < m; i++)
      for (let q = 0; q < 2; q++) {
        all.a[i * 4 + q] = late.gamma.a[i * 2 + q];
        all.a[i * 4 + 2 + q] = old.a[i * 2 + q];
      }
    this.#h = hessenberg(phi, all, c);
    this.#whole = d;
    this.#direct = mean ? 0 : direct;
  }

  /** Nyquist's frequency, rad/s. */
  get top(): number {
    return Math.PI / this.sampling.every;
  }

  /** Response at z = e^{jωh} of the measurement to an output that holds, and to one that is ramped. */
  response(omega: number): { held: Complex; ramped: Complex } {
    const { every: h, takes } = this.sampling;
    const z = turn(omega * h);
    const back = turn(-omega * h);
    const [newHeld, newRamp, oldHeld, oldRamp] = resolvent(this.#h, z, 0);
    const late = turn(-omega * h * this.#whole);
    const joined = (fresh: Complex, old: Complex): Complex => {
      const y = times(late, plus(fresh, times(old, back)));
      return takes === 'grab' ? y : scale(times(y, minus({ re: 1, im: 0 }, back)), 1 / h);
    };
    return {
      held: plus(joined(newHeld, oldHeld), scale(times(late, back), this.#direct)),
      ramped: joined(newRamp, oldRamp),
    };
  }
}

function discretise(a: Dense, b: Dense, tau: number): { phi: Dense; gamma: Dense } {
  const { n } = a;
  if (!(tau > 0)) return { phi: identity(n), gamma: zeros(n, b.m) };
  const m = n + b.m;
  const big = zeros(m);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) big.a[i * m + j] = tau * a.a[i * n + j];
    for (let j = 0; j < b.m; j++) big.a[i * m + n + j] = tau * b.a[i * b.m + j];
  }
  const e = exponential(big);
  const phi = zeros(n);
  const gamma = zeros(n, b.m);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) phi.a[i * n + j] = e.a[i * m + j];
    for (let j = 0; j < b.m; j++) gamma.a[i * b.m + j] = e.a[i * m + n + j];
  }
  return { phi, gamma };
}

/** Responses are asked for again and again by settings that differ: each frequency is computed once. */
export class OpenLoops {
  readonly #plant: SampledPlant;
  readonly #known = new Map<number, { held: Complex; ramped: Complex }>();

  constructor(plant: SampledPlant) {
    this.#plant = plant;
  }

  get top(): number {
    return this.#plant.top;
  }

  at(omega: number): { held: Complex; ramped: Complex } {
    const found = this.#known.get(omega);
    if (found) return found;
    const made = this.#plant.response(omega);
    this.#known.set(omega, made);
    return made;
  }

  /**
   * L with settings: on each result Kc·held·F·[1 + (h/Ti)/(1 − z⁻¹) + D], by backward Euler, with the filter
   * F = a/(1 − (1 − a)z⁻¹), a = h/(T_f + h), and D = Td(1 − z⁻¹)/(T_N(1 − z⁻¹) + h), T_N = Td/N.
   */
  loop(s: PidSettings): (omega: number) => Complex {
    const { every: h, runs } = this.#plant.sampling;
    const sense = -s.sense * s.gain;
    return (omega) => {
      const { held, ramped } = this.at(omega);
      if (runs === 'scan') return scale(plus(held, scale(ramped, 1 / s.integralTime)), sense);
      const back = turn(-omega * h);
      const difference = minus({ re: 1, im: 0 }, back);
      let c = plus({ re: 1, im: 0 }, divided({ re: h / s.integralTime, im: 0 }, difference));
      if (s.derivativeTime > 0) {
        const Tn = s.derivativeTime / DERIVATIVE_FILTER;
        c = plus(
          c,
          divided(scale(difference, s.derivativeTime), plus(scale(difference, Tn), { re: h, im: 0 })),
        );
      }
      if (s.filter > 0) {
        const a = h / (s.filter + h);
        c = times(c, divided({ re: a, im: 0 }, minus({ re: 1, im: 0 }, scale(back, 1 - a))));
      }
      return scale(times(held, c), sense);
    };
  }
}

import { createRequire } from 'node:module';
import type { Integrator, OnStep, Settings, Step, Stretch, StretchEnd } from './integrator.ts';
import { noWork, type Work } from './outcome.ts';
import type { F, System } from './system.ts';

/*
 * The package ships its TypeScript source beside the compiled file and no declarations: a plain import would
 * have that source checked under our settings.
 */
type DenseOutput = (component: number, t: number) => number;
interface OdexSolver {
  maxSteps: number;
  initialStepSize: number;
  denseOutput: boolean;
  absoluteTolerance: number | number[];
  relativeTolerance: number | number[];
  solve(
    f: (t: number, y: number[]) => ArrayLike<number>,
    t0: number,
    y0: number[],
    t1: number,
    onStep: (n: number, t0: number, t1: number, y: number[], dense: DenseOutput) => boolean | undefined,
  ): { outcome: 0 | 1 | 2; nStep: number; nAccept: number };
}
const { Solver } = createRequire(import.meta.url)('odex') as { Solver: new (n: number) => OdexSolver };

/**
 * Where stability and not accuracy bounds the step, the error control holds h at the edge of stability. There a
 * step damps the error e no more, and the estimate, the difference of two columns of the scheme, shows a fraction
 * |R_k − R_(k−1)| of it only: e stands at 20 … 45 tolerances on plants. A smaller tolerance makes such steps no
 * shorter, so asking for a tenth of it costs nothing there.
 */
const MARGIN = 10;
/** Steps between two places where a run may pause: the scheme starts afresh there, whether it pauses or not. */
const LEG = 100;
/** Stands for a slope that is no number, in scales per second: NaN would pass for convergence, this is rejected. */
const ABSURD = 1e20;
/** Smallest step, relative to the time reached: see the Rosenbrock methods. */
const SMALLEST = 1e-13;

/**
 * Explicit extrapolation (Gragg-Bulirsch-Stoer with step and order control): the second, independent integrator.
 *
 * It knows nothing of Jacobians or of our own formulas for steps and errors, so an agreement with the default
 * method says something. Its cost grows with stiffness.
 * Reference: E. Hairer, S. P. Nørsett and G. Wanner, Solving Ordinary Differential Equations I, Sec. II.9.
 */
export class Extrapolation implements Integrator {
  readonly name = 'odex';
  readonly work: Work = noWork();
  readonly #system: System;
  readonly #p: F;
  readonly #settings: Settings;
  readonly #scale: F;
  readonly #relative: number;
  readonly #absolute: number[];
  #step: number;

  constructor(system: System, p: F, settings: Settings) {
    const { places } = system;
    this.#system = system;
    this.#p = p;
    this.#settings = settings;
    this.#scale = Float64Array.from(places, (q) => q.scale);
    // The scheme judges the root mean square over n places: at most 1/√n, no place is beyond 1.
    this.#relative = settings.tolerance.relative / (MARGIN * Math.sqrt(places.length));
    this.#absolute = places.map((q) => (q.kind === 'total' ? Infinity : this.#relative * q.scale));
    this.#step = settings.firstStep;
  }

  advance({ from, to, inputs }: Stretch, x: F, onStep: OnStep): StretchEnd {
    for (let at = from; ; ) {
      const end = this.#leg({ from: at, to, inputs }, x, onStep);
      if (end.ended !== 'leg') return end;
      at = end.time;
    }
  }

  #leg({ from, to, inputs }: Stretch, x: F, onStep: OnStep): StretchEnd | { ended: 'leg'; time: number } {
    const n = x.length;
    const { work } = this;
    const limit = this.#settings.maximumSteps;
    const left = limit - work.steps - work.rejectedByError;
    if (left <= 0) return { ended: 'failed', stop: { reason: 'too-many-steps', time: from, limit } };
    const solver = new Solver(n);
    solver.denseOutput = true;
    solver.relativeTolerance = this.#relative;
    solver.absoluteTolerance = this.#absolute;
    solver.initialStepSize = Math.min(this.#step, to - from);
    solver.maxSteps = left;
    const w = new Float64Array(this.#system.inputs.length);
    const state = new Float64Array(n);
    const dx = new Float64Array(n);
    inputs.slope(w);
    const moving = w.some((v) => v !== 0);
    inputs.value(from, w);
    let reached = from;
    let asked = Number.NaN;
    let steps = 0;
    let bad = { place: 0, time: Infinity };
    let failed = -1;
    const f = (t: number, y: number[]): F => {
      state.set(y);
      if (moving) inputs.value(t, w);
      this.#system.rhs(state, w, this.#p, dx);
      work.rhs += 1;
      const lost = dx.findIndex((v) => !Number.isFinite(v));
      if (lost < 0) return dx;
      // The earliest is to blame: those after it start from what it has spoilt.
      if (t < bad.time) bad = { place: lost, time: t };
      // Right beside the point reached a smaller step helps no more: what is no number passes, and ends the run.
      if (t - reached > SMALLEST * Math.max(Math.abs(t), SMALLEST * (to - from)))
        for (let i = 0; i < n; i++) dx[i] = ABSURD * this.#scale[i];
      return dx;
    };
    const result = solver.solve(f, from, Array.from(x), to, (_, t0, t1, y, dense) => {
      if (t1 === t0) return undefined;
      failed = y.findIndex((v) => !Number.isFinite(v));
      if (failed >= 0) return false;
      steps += 1;
      const step: Step = {
        t0,
        t1,
        x1: Float64Array.from(y),
        pausable: steps === LEG,
        at: (t, to_) => {
          for (let i = 0; i < n; i++) to_[i] = dense(i, t);
        },
      };
      const end = onStep(step);
      reached = t1;
      if (bad.time < t1) bad.time = Infinity;
      this.#step = t1 - t0;
      x.set(step.x1);
      if (!(end <= t1)) return steps === LEG ? false : undefined;
      asked = end;
      if (end < t1) step.at(end, x);
      return false;
    });
    work.steps += steps;
    work.rejectedByError += result.nStep - steps;
    if (failed >= 0) {
      const { path } = this.#system.places[bad.time < Infinity ? bad.place : failed];
      return { ended: 'failed', stop: { reason: 'not-finite', time: reached, place: path } };
    }
    if (!Number.isNaN(asked)) return { ended: 'asked', time: asked };
    if (result.outcome === 0) return { ended: 'at-end' };
    if (steps === LEG) return { ended: 'leg', time: reached };
    return { ended: 'failed', stop: { reason: 'too-many-steps', time: reached, limit } };
  }
}

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
  ): { outcome: 0 | 1 | 2; nStep: number; nReject: number; nEval: number };
}
const { Solver } = createRequire(import.meta.url)('odex') as { Solver: new (n: number) => OdexSolver };

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
  #step: number;

  constructor(system: System, p: F, settings: Settings) {
    this.#system = system;
    this.#p = p;
    this.#settings = settings;
    this.#step = settings.firstStep;
  }

  advance({ from, to, inputs }: Stretch, x: F, onStep: OnStep): StretchEnd {
    const n = x.length;
    const { places } = this.#system;
    const relative = this.#settings.tolerance.relative;
    const solver = new Solver(n);
    solver.denseOutput = true;
    solver.relativeTolerance = relative;
    solver.absoluteTolerance = places.map((q) => relative * q.scale);
    // The step controller works on a relative step, so no absolute floor is needed beyond the stretch itself.
    solver.initialStepSize = Math.min(this.#step, to - from);
    solver.maxSteps = this.#settings.maximumSteps;
    const w = new Float64Array(this.#system.inputs.length);
    const state = new Float64Array(n);
    const dx = new Float64Array(n);
    inputs.value(from, w);
    const slope = new Float64Array(w.length);
    inputs.slope(slope);
    const moving = slope.some((v) => v !== 0);
    let reached = from;
    let asked = Number.NaN;
    let bad = -1;
    const f = (t: number, y: number[]): F => {
      state.set(y);
      if (moving) inputs.value(t, w);
      this.#system.rhs(state, w, this.#p, dx);
      return dx;
    };
    this.work.restarts += 1;
    const result = solver.solve(f, from, Array.from(x), to, (_, t0, t1, y, dense) => {
      if (t1 === t0) return undefined;
      bad = y.findIndex((v) => !Number.isFinite(v));
      if (bad >= 0) return false;
      const step: Step = {
        t0,
        t1,
        x1: Float64Array.from(y),
        at: (t, to_) => {
          for (let i = 0; i < n; i++) to_[i] = dense(i, t);
        },
      };
      const end = onStep(step);
      reached = t1;
      this.#step = t1 - t0;
      x.set(step.x1);
      if (!(end <= t1)) return undefined;
      asked = end;
      if (end < t1) step.at(end, x);
      return false;
    });
    this.work.steps += result.nStep;
    this.work.rejectedByError += result.nReject;
    this.work.rhs += result.nEval;
    if (bad >= 0)
      return { ended: 'failed', stop: { reason: 'not-finite', time: reached, place: places[bad].path } };
    if (!Number.isNaN(asked)) return { ended: 'asked', time: asked };
    if (result.outcome !== 0)
      return {
        ended: 'failed',
        stop: { reason: 'too-many-steps', time: reached, limit: this.#settings.maximumSteps },
      };
    return { ended: 'at-end' };
  }
}

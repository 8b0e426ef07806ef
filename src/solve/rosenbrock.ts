import type { Inputs } from './inputs.ts';
import type { Integrator, OnStep, Settings, Step, Stretch, StretchEnd } from './integrator.ts';
import { LinearSolver } from './linear.ts';
import { noWork, type Stop, type Work } from './outcome.ts';
import type { F, System } from './system.ts';
import type { Tableau } from './tableau.ts';
import { release, type StepBench, type Workbench, workbench } from './workbench.ts';

/** A new step aims a little below the tolerance, so that few are rejected. */
const SAFETY = 0.9;
/** Bounds on the change of step from one to the next: Hairer & Wanner II, Sec. IV.8 (their facl, facr). */
const SHRINK = 0.2;
const GROW = 6;
/** After a trial that was no number or negative the error says nothing about the step: cut it hard. */
const CUT = 0.25;
/** Where the natural step and the error are kept. */
const NATURAL = 0;
const ERROR = 1;
const AT = 2;
const STEP = 3;
/** Smallest step, relative to the time reached, below which t + h loses its digits; and its like at the very start. */
const SMALLEST = 1e-13;

/** Linearly implicit one-step integrator: one Jacobian and one factorisation a step, exact f_t along ramps. */
export class Rosenbrock implements Integrator {
  readonly name: string;
  readonly work: Work = noWork();
  readonly #system: System;
  readonly #p: F;
  readonly #table: Tableau;
  readonly #settings: Settings;
  readonly #linear: LinearSolver;
  #byInput: F | null = null;
  readonly #work: Workbench;
  readonly #bench: StepBench;
  readonly #ft: F;
  readonly #w: F;
  readonly #dw: F;
  #moving = false;
  /**
   * The step that the error would allow, kept over corners (a step cut short by a corner says nothing), and the error of
   * the last attempt. In an array: a field that is a number is a new object each time it is set.
   */
  readonly #kept: F;

  constructor(system: System, p: F, settings: Settings, table: Tableau) {
    const n = system.places.length;
    this.name = table.name.toLowerCase();
    this.#system = system;
    this.#p = p;
    this.#table = table;
    this.#settings = settings;
    this.#work = workbench(system, table);
    this.#linear = new LinearSolver(system.A, this.#work);
    const bench = this.#work.steps;
    this.#bench = bench;
    bench.tolerate(settings.tolerance.relative, system.places);
    this.#ft = new Float64Array(n);
    this.#w = new Float64Array(system.inputs.length);
    this.#dw = new Float64Array(system.inputs.length);
    this.#kept = Float64Array.of(settings.firstStep, 0, 0, 0);
  }

  advance({ from, to, inputs }: Stretch, x: F, onStep: OnStep): StretchEnd {
    const { work } = this;
    const table = this.#table;
    const exponent = -1 / table.order;
    inputs.slope(this.#dw);
    this.#moving = this.#dw.some((v) => v !== 0);
    const dense = new DenseStep(this.#bench);
    let t = from;
    let grow = GROW;
    while (t < to) {
      if (work.steps >= this.#settings.maximumSteps)
        return failed({ reason: 'too-many-steps', time: t, limit: this.#settings.maximumSteps });
      this.#prepare(t, x, inputs);
      for (;;) {
        const left = to - t;
        const cut = this.#kept[NATURAL] >= left * (1 - 1e-12);
        const h = cut
          ? left
          : Math.min(this.#kept[NATURAL], left > 2 * this.#kept[NATURAL] ? left : left / 2);
        this.#kept[AT] = t;
        this.#kept[STEP] = h;
        const verdict = this.#attempt(inputs);
        if (verdict === 'accepted') {
          const factor = Math.min(grow, Math.max(SHRINK, SAFETY * this.#kept[ERROR] ** exponent));
          // A step that a corner cut short may only raise the natural step, never lower it.
          this.#kept[NATURAL] = cut ? Math.max(this.#kept[NATURAL], h * factor) : h * factor;
          grow = GROW;
          work.steps += 1;
          dense.open(t, cut ? to : t + h);
          const end = onStep(dense);
          t = dense.t1;
          if (end < t) dense.at(end, this.#bench.trial);
          x.set(end < t ? this.#bench.trial : this.#bench.x1);
          if (!(end < t) && t < to && this.#stuck(t, to - from))
            return failed(this.#tooSmall(t, x, inputs, 'error'));
          if (end <= t) return { ended: 'asked', time: end };
          break;
        }
        grow = 1;
        if (verdict === 'error') {
          work.rejectedByError += 1;
          this.#kept[NATURAL] = h * Math.min(1, Math.max(SHRINK, SAFETY * this.#kept[ERROR] ** exponent));
        } else {
          if (verdict === 'negative') work.rejectedByNegative += 1;
          else if (verdict === 'not-finite') work.rejectedByNonFinite += 1;
          else work.rejectedBySingular += 1;
          this.#kept[NATURAL] = h * CUT;
        }
        if (this.#stuck(t, to - from)) return failed(this.#tooSmall(t, x, inputs, verdict));
      }
    }
    return { ended: 'at-end' };
  }

  close(): void {
    release(this.#system, this.#table, this.#work);
  }

  #stuck(t: number, span: number): boolean {
    return this.#kept[NATURAL] < SMALLEST * Math.max(Math.abs(t), SMALLEST * span);
  }

  #tooSmall(time: number, x: F, inputs: Inputs, verdict: Exclude<Verdict, 'accepted'>): Stop {
    const lost = this.#lost(time, x, inputs);
    const place = this.#system.places[lost < 0 ? this.#worst(verdict) : lost].path;
    if (verdict === 'not-finite' || lost >= 0) return { reason: 'not-finite', time, place };
    const cause = {
      error: 'no step is small enough for the tolerance',
      negative: 'every trial step makes it negative',
      singular: 'the equations have no unique solution there',
    }[verdict];
    return { reason: 'step-too-small', time, place, cause };
  }

  /** The place that is to blame for the verdict on the last attempt: its error, or how far it lies below its floor. */
  #worst(verdict: Exclude<Verdict, 'accepted'>): number {
    const { x, x1, absolute, floor } = this.#bench;
    const stage = this.#work.x;
    const { relative } = this.#settings.tolerance;
    const blame = (i: number): number =>
      verdict === 'negative'
        ? floor[i] - x1[i]
        : Math.abs(stage[i]) / (absolute[i] + relative * Math.max(Math.abs(x[i]), Math.abs(x1[i])));
    let at = 0;
    for (let i = 1; i < x1.length; i++) if (!(blame(i) <= blame(at))) at = i;
    return at;
  }

  /**
   * The place whose balance or slopes have no finite value, or −1. The solution cannot tell, one place that is no
   * number spoils all that are eliminated with it: so the stages of the last attempt are gone through again.
   */
  #lost(t: number, x: F, inputs: Inputs): number {
    const bench = this.#bench;
    bench.x.set(x);
    inputs.value(t, this.#w);
    for (let i = 0; i < this.#table.alpha.length; i++) {
      bench.state(i);
      this.#system.rhs(bench.trial, this.#w, this.#p, bench.dx);
      const lost = bench.dx.findIndex((v) => !Number.isFinite(v));
      if (lost >= 0) return lost;
      if (i > 0) continue;
      const steep = this.#work.a.findIndex((v) => !Number.isFinite(v));
      if (steep >= 0) return this.#system.A.rowStart.findIndex((start) => start > steep) - 1;
    }
    return -1;
  }

  /** Jacobian and f_t at (t, x): they serve every attempt from this point. */
  #prepare(t: number, x: F, inputs: Inputs): void {
    inputs.value(t, this.#w);
    this.#bench.x.set(x);
    this.#system.jacobian(x, this.#w, this.#p, this.#work.a);
    this.work.jacobians += 1;
    if (!this.#moving) return;
    const { rowStart, column } = this.#system.B;
    this.#byInput ??= new Float64Array(column.length);
    const values = this.#byInput;
    this.#system.byInput(x, this.#w, this.#p, values);
    for (let i = 0; i < this.#ft.length; i++) {
      let s = 0;
      for (let k = rowStart[i]; k < rowStart[i + 1]; k++) s += values[k] * this.#dw[column[k]];
      this.#ft[i] = s;
    }
  }

  /** A step of the length, and from the time, that are kept. */
  #attempt(inputs: Inputs): Verdict {
    const t = this.#kept[AT];
    const h = this.#kept[STEP];
    const table = this.#table;
    const stages = table.alpha.length;
    const bench = this.#bench;
    const stage = this.#work.x;
    const { trial, dx } = bench;
    this.#linear.factor(this.#work.a, 1 / (h * table.gamma));
    bench.perStep[0] = 1 / h;
    bench.relative[0] = this.#settings.tolerance.relative;
    const { rest } = bench;
    let done = 0;
    for (let i = 0; i < stages; i++) {
      bench.state(i);
      if (this.#moving) inputs.value(t + table.alpha[i] * h, this.#w);
      this.#system.rhs(trial, this.#w, this.#p, dx);
      bench.slope(i);
      if (this.#moving && table.d[i] !== 0) {
        const hd = h * table.d[i];
        const ft = this.#ft;
        for (let k = 0; k < ft.length; k++) stage[k] += hd * ft[k];
      }
      if (!this.#linear.solve(stage)) return this.#count(i + 1, 'singular');
      bench.keep(i);
      done += 1;
      // The first solution has been measured: the other stages need nobody to look at them.
      if (i === 0 && rest !== null && !this.#moving && this.#linear.trusted) {
        rest();
        this.#linear.work.solves += stages - 1;
        break;
      }
    }
    if (done === stages) bench.finish();
    // An error of exactly zero (nothing moves) must not give an infinite next step.
    this.#kept[ERROR] = Math.max(bench.error[0], 1e-10);
    if (!Number.isFinite(this.#kept[ERROR])) return this.#count(stages, 'not-finite');
    if (this.#kept[ERROR] > 1) return this.#count(stages, 'error');
    return this.#count(stages, bench.below[0] > 0 ? 'negative' : 'accepted');
  }

  #count(stages: number, verdict: Verdict): Verdict {
    const { work } = this;
    work.rhs += stages;
    const linear = this.#linear.work;
    work.factorisations = linear.factorisations;
    work.solves = linear.solves;
    work.refinements = linear.refinements;
    work.pivotings = linear.pivotings;
    return verdict;
  }
}

type Verdict = 'accepted' | 'error' | 'negative' | 'not-finite' | 'singular';

const failed = (stop: Stop): StretchEnd => ({ ended: 'failed', stop });

/** The dense output of a step; its coefficients are formed when first asked for. */
class DenseStep implements Step {
  readonly #span = new Float64Array(2);
  readonly x1: F;
  readonly pausable = true;
  readonly #bench: StepBench;
  #formed = false;

  constructor(bench: StepBench) {
    this.x1 = bench.x1;
    this.#bench = bench;
  }

  get t0(): number {
    return this.#span[0];
  }

  get t1(): number {
    return this.#span[1];
  }

  open(t0: number, t1: number): void {
    this.#span[0] = t0;
    this.#span[1] = t1;
    this.#formed = false;
  }

  at(t: number, x: F): void {
    const bench = this.#bench;
    if (!this.#formed) {
      bench.dense();
      this.#formed = true;
    }
    bench.at((t - this.t0) / (this.t1 - this.t0));
    x.set(bench.point);
  }
}

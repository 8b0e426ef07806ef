import { type Code, encodeModule } from '../math/machine/module.ts';
import { region } from '../math/machine/store.ts';
import { type EliminationPlaces, factorCode, measureCode, solveCode } from './elimination-code.ts';
import { type EliminationPlan, eliminationPlan } from './elimination-plan.ts';
import type { Factors } from './linear.ts';
import { denseCode, finishCode, keepCode, type StepPlaces, slopeCode, stateCode } from './stage-code.ts';
import type { F, Pattern } from './system.ts';
import type { Tableau } from './tableau.ts';

/** The elimination on one pattern as code, with its arrays: nothing is copied where its own are used. */
export interface Workbench extends Factors {
  /** Values of A; right-hand side and solution. */
  readonly a: F;
  readonly x: F;
  /** Steps of a one-step method on the same region; null where none was asked for. */
  readonly steps: StepBench | null;
}

/** The vectors of a step and what is done with them; the stage vector is `x` of the elimination. */
export interface StepBench {
  readonly x: F;
  readonly x1: F;
  readonly trial: F;
  readonly dx: F;
  readonly absolute: F;
  readonly floor: F;
  /** Terms of dense output, one after the other, each of `length`. */
  readonly k: F;
  readonly length: number;
  /** trial = x + Σ aⱼuⱼ. */
  state(stage: number): void;
  /** The stage vector = dx + (1/h)·Σ cⱼuⱼ. */
  slope(stage: number, perStep: number): void;
  /** Keeps the stage vector as uᵢ. */
  keep(stage: number): void;
  /** x₁ = trial + the stage vector. Returns the largest scaled error; `below` says how far the lowest place lies below its floor. */
  finish(relative: number): number;
  readonly below: number;
  dense(): void;
}

interface Compiled {
  readonly module: WebAssembly.Module;
  readonly plan: EliminationPlan;
  readonly places: EliminationPlaces & { readonly step: StepPlaces | null; readonly end: number };
  readonly nonzeros: number;
  readonly names: ReadonlyMap<string, readonly string[]>;
  /** Benches that nobody works at. */
  readonly free: Workbench[];
}

const known = new WeakMap<Pattern, Map<Tableau | null, Compiled>>();
/** Free benches that are kept of one kind. */
const MOST_FREE = 4;

function compiledFor(pattern: Pattern, table: Tableau | null): Compiled {
  const own = known.get(pattern) ?? new Map<Tableau | null, Compiled>();
  known.set(pattern, own);
  const made = own.get(table) ?? compile(pattern, table);
  own.set(table, made);
  return made;
}

/** A bench for one run; its arrays hold whatever the run before left. */
export function workbench(pattern: Pattern, table: Tableau | null): Workbench {
  const made = compiledFor(pattern, table);
  return made.free.pop() ?? open(made, table);
}

/** Gives a bench back for the next run. */
export function release(pattern: Pattern, table: Tableau | null, bench: Workbench): void {
  const { free } = compiledFor(pattern, table);
  if (free.length < MOST_FREE) free.push(bench);
}

function compile(pattern: Pattern, table: Tableau | null): Compiled {
  const plan = eliminationPlan(pattern);
  const n = plan.size;
  const length = 2 * Math.ceil(n / 2);
  let end = 0;
  const take = (count: number): number => {
    const at = end;
    end += 2 * Math.ceil(count / 2);
    return at;
  };
  const one = (): number => take(n);
  const scalar = (): number => take(1);
  const elimination: EliminationPlaces = {
    a: take(pattern.column.length),
    v: take(plan.row.length + n),
    d: one(),
    x: one(),
    b: one(),
    r: one(),
    shift: scalar(),
    worst: scalar(),
  };
  const step: StepPlaces | null = table && {
    length,
    stage: elimination.x,
    x: one(),
    x1: one(),
    trial: one(),
    dx: one(),
    absolute: one(),
    floor: one(),
    u: take(length * table.alpha.length),
    k: take(length * table.dense.length),
    perStep: scalar(),
    relative: scalar(),
    error: scalar(),
    below: scalar(),
  };
  const parts = new Map<string, readonly Code[]>([
    ['factor', factorCode(plan, elimination)],
    ['solve', solveCode(plan, elimination)],
    ['measure', measureCode(pattern, elimination)],
  ]);
  if (table && step) {
    table.alpha.forEach((_, i) => {
      parts.set(`state${i}`, [stateCode(table, i, step)]);
      parts.set(`slope${i}`, [slopeCode(table, i, step)]);
      parts.set(`keep${i}`, [keepCode(i, step)]);
    });
    parts.set('finish', [finishCode(step)]);
    parts.set(
      'dense',
      table.dense.map((_, m) => denseCode(table, m, step)),
    );
  }
  const exported = new Map<string, number>();
  const names = new Map([...parts].map(([part, list]) => [part, list.map((_, i) => `${part}.${i}`)]));
  [...names.values()].flat().forEach((name, i) => {
    exported.set(name, i);
  });
  const functions = [...parts.values()].flat().map((code) => ({ code }));
  const module = new WebAssembly.Module(encodeModule([], functions, exported));
  return {
    module,
    plan,
    places: { ...elimination, step, end },
    names,
    nonzeros: pattern.column.length,
    free: [],
  };
}

function open({ module, plan, places, names, nonzeros }: Compiled, table: Tableau | null): Workbench {
  const own = region(places.end);
  const { exports } = new WebAssembly.Instance(module, { m: { memory: own.memory } });
  const { base } = own;
  const part = (name: string): (() => void) => {
    const list = (names.get(name) ?? []).map((n) => exports[n] as (base: number) => void);
    if (list.length === 1) return () => list[0](base);
    return () => {
      for (let i = 0; i < list.length; i++) list[i](base);
    };
  };
  const n = plan.size;
  const cell = (at: number): F => own.view(at, 1);
  const [shift, worst] = [cell(places.shift), cell(places.worst)];
  const [factor, solve, measure] = [part('factor'), part('solve'), part('measure')];
  const a = own.view(places.a, nonzeros);
  const x = own.view(places.x, n);
  return {
    size: n,
    work: plan.work,
    a,
    x,
    b: own.view(places.b, n),
    r: own.view(places.r, n),
    factor(values, by) {
      if (values !== a) a.set(values);
      shift[0] = by;
      factor();
    },
    solve(v) {
      if (v !== x) x.set(v);
      solve();
      if (v !== x) v.set(x);
    },
    measure(v) {
      if (v !== x) x.set(v);
      measure();
      return worst[0];
    },
    steps: table && places.step && stepBench(places.step, table, own.view, part, n),
  };
}

function stepBench(
  p: StepPlaces,
  table: Tableau,
  view: (from: number, count: number) => F,
  part: (name: string) => () => void,
  n: number,
): StepBench {
  const stages = table.alpha.map((_, i) => i);
  const [states, slopes, keeps] = ['state', 'slope', 'keep'].map((what) =>
    stages.map((i) => part(`${what}${i}`)),
  );
  const [finish, dense] = [part('finish'), part('dense')];
  const [perStep, relative, error, below] = [p.perStep, p.relative, p.error, p.below].map((at) =>
    view(at, 1),
  );
  // What pads the vectors is never judged.
  view(p.absolute, p.length).fill(Infinity);
  view(p.floor, p.length).fill(-Infinity);
  return {
    x: view(p.x, n),
    x1: view(p.x1, n),
    trial: view(p.trial, n),
    dx: view(p.dx, n),
    absolute: view(p.absolute, n),
    floor: view(p.floor, n),
    k: view(p.k, p.length * table.dense.length),
    length: p.length,
    state: (i) => states[i](),
    slope(i, q) {
      perStep[0] = q;
      slopes[i]();
    },
    keep: (i) => keeps[i](),
    finish(by) {
      relative[0] = by;
      finish();
      return error[0];
    },
    get below() {
      return below[0];
    },
    dense,
  };
}

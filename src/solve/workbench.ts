import { type Code, encodeModule, type Imported } from '../math/machine/module.ts';
import { type Region, region } from '../math/machine/store.ts';
import { type EliminationPlaces, factorCode, measureCode, solveCode } from './elimination-code.ts';
import { type EliminationPlan, eliminationPlan } from './elimination-plan.ts';
import type { Factors } from './linear.ts';
import {
  denseCode,
  finishCode,
  keepCode,
  pointCode,
  restCode,
  type StepPlaces,
  slopeCode,
  stateCode,
} from './stage-code.ts';
import type { F, Native, Pattern, Place, System } from './system.ts';
import type { Tableau } from './tableau.ts';

/** The elimination on one pattern as code, with its arrays: nothing is copied where its own are used. */
export interface Workbench extends Factors {
  /** Values of A; right-hand side and solution. */
  readonly a: F;
  readonly x: F;
  readonly steps: StepBench;
}

/** The vectors of a step and what is done with them; the stage vector is `x` of the elimination. */
export interface StepBench {
  readonly x: F;
  readonly x1: F;
  readonly trial: F;
  readonly dx: F;
  readonly absolute: F;
  readonly floor: F;
  /** Sets absolute tolerances and floors; what the run before has set is kept where it is the same. */
  tolerate(relative: number, places: readonly Place[]): void;
  /** A point of dense output. */
  readonly point: F;
  /** trial = x + Σ aⱼuⱼ. */
  state(stage: number): void;
  /** 1/h and the relative tolerance, for what follows: a number that is handed over is a new object each time. */
  readonly perStep: F;
  readonly relative: F;
  /** The stage vector = dx + (1/h)·Σ cⱼuⱼ. */
  slope(stage: number): void;
  /** Keeps the stage vector as uᵢ. */
  keep(stage: number): void;
  /** x₁ = trial + the stage vector, and the errors. */
  finish(): void;
  /** All stages but the first and `finish` in one go; null where the System is no machine code in the same memory. */
  readonly rest: (() => void) | null;
  /** The largest scaled error, and how far the lowest place lies below its floor. */
  readonly error: F;
  readonly below: F;
  /** Terms of dense output, before the first point of a step. */
  dense(): void;
  /** Puts the solution at a share of the step into `point`. */
  at(share: number): void;
}

interface Compiled {
  readonly module: WebAssembly.Module;
  readonly plan: EliminationPlan;
  readonly elimination: EliminationPlaces;
  readonly step: StepPlaces;
  /** Numbers in the region. */
  readonly end: number;
  readonly nonzeros: number;
  readonly names: ReadonlyMap<string, readonly string[]>;
  /** How many functions of the System it calls; 0: none. */
  readonly fused: number;
}

const known = new WeakMap<Pattern, Map<string, Compiled>>();
/** A trial state may lie below its floor by this many absolute tolerances. */
const BELOW_FLOOR = 10;

/** Benches that nobody works at, by System and method; so many at most. */
const free = new WeakMap<System, Map<Tableau, Workbench[]>>();
const MOST_FREE = 2;

/** A bench for one run of a System; its arrays hold whatever the run before left. */
export function workbench(system: System, table: Tableau): Workbench {
  return free.get(system)?.get(table)?.pop() ?? open(system, table);
}

/** Gives a bench back for the next run. */
export function release(system: System, table: Tableau, bench: Workbench): void {
  const own = free.get(system) ?? new Map<Tableau, Workbench[]>();
  free.set(system, own);
  const list = own.get(table) ?? [];
  own.set(table, list);
  if (list.length < MOST_FREE) list.push(bench);
}

function open({ A, native }: System, table: Tableau): Workbench {
  const places = placesOf(A, table);
  const own = region(places.end);
  const shared = native && native.memory === own.memory ? native : null;
  const made = compiledFor(A, table, shared, places);
  return instance(made, own, table, shared);
}

function compiledFor(A: Pattern, table: Tableau, native: Native | null, places: Places): Compiled {
  const own = known.get(A) ?? new Map<string, Compiled>();
  known.set(A, own);
  const key = `${table.name} ${native ? [native.x, native.change, native.functions.length] : ''}`;
  const made = own.get(key) ?? compile(A, table, native, places);
  own.set(key, made);
  return made;
}

type Places = Pick<Compiled, 'plan' | 'elimination' | 'step' | 'end'>;

function placesOf(pattern: Pattern, table: Tableau): Places {
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
  const step: StepPlaces = {
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
    point: one(),
    share: scalar(),
    perStep: scalar(),
    relative: scalar(),
    error: scalar(),
    below: scalar(),
  };
  return { plan, elimination, step, end };
}

function compile(pattern: Pattern, table: Tableau, native: Native | null, places: Places): Compiled {
  const { plan, elimination, step } = places;
  const calls = native?.functions.length ?? 0;
  const imports = Array.from({ length: calls }, (_, i): Imported => ({ name: `rhs${i}`, arity: 'address' }));
  const functions: Code[] = [];
  const names = new Map<string, string[]>();
  const exported = new Map<string, number>();
  const add = (part: string, ...list: Code[]): number[] => {
    const own = list.map((_, i) => `${part}.${i}`);
    names.set(part, own);
    return list.map((code, i) => {
      const index = imports.length + functions.push(code) - 1;
      exported.set(own[i], index);
      return index;
    });
  };
  add('factor', ...factorCode(plan, elimination));
  const solve = add('solve', ...solveCode(plan, elimination));
  add('measure', ...measureCode(pattern, elimination));
  const stages = table.alpha.map((_, i) => i);
  const [state, slope, keep] = [
    stages.map((i) => add(`state${i}`, stateCode(table, i, step))[0]),
    stages.map((i) => add(`slope${i}`, slopeCode(table, i, step))[0]),
    stages.map((i) => add(`keep${i}`, keepCode(i, step))[0]),
  ];
  const [finish] = add('finish', finishCode(step));
  add('dense', ...table.dense.map((_, m) => denseCode(table, m, step)));
  add('point', pointCode(table, step));
  if (native)
    add(
      'rest',
      restCode(table, plan.size, step, {
        rhs: native.functions.map((_, i) => i),
        state: (i) => state[i],
        slope: (i) => slope[i],
        keep: (i) => keep[i],
        solve,
        finish,
        x: native.x,
        change: native.change,
      }),
    );
  const module = new WebAssembly.Module(encodeModule(imports, functions, exported));
  return { ...places, module, names, nonzeros: pattern.column.length, fused: calls };
}

function instance(made: Compiled, own: Region, table: Tableau, native: Native | null): Workbench {
  const rhs = Object.fromEntries((native?.functions ?? []).map((f, i) => [`rhs${i}`, f]));
  const { exports } = new WebAssembly.Instance(made.module, { m: { memory: own.memory }, f: rhs });
  const { base } = own;
  const part = (name: string): (() => void) => {
    const list = (made.names.get(name) ?? []).map((n) => exports[n] as (base: number) => void);
    if (list.length === 1) return () => list[0](base);
    return () => {
      for (let i = 0; i < list.length; i++) list[i](base);
    };
  };
  const { elimination: e, plan } = made;
  const [shift, worst] = [own.view(e.shift, 1), own.view(e.worst, 1)];
  const [factor, solve, measure] = [part('factor'), part('solve'), part('measure')];
  const a = own.view(e.a, made.nonzeros);
  const x = own.view(e.x, plan.size);
  const rest = exports['rest.0'] as ((base: number, system: number) => void) | undefined;
  return {
    size: plan.size,
    work: plan.work,
    a,
    x,
    b: own.view(e.b, plan.size),
    r: own.view(e.r, plan.size),
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
    },
    worst,
    steps: stepBench(made, own, table, part, native && rest ? () => rest(base, native.base) : null),
  };
}

function stepBench(
  { step: p, plan: { size: n } }: Compiled,
  { view }: Region,
  table: Tableau,
  part: (name: string) => () => void,
  rest: (() => void) | null,
): StepBench {
  const stages = table.alpha.map((_, i) => i);
  const [states, slopes, keeps] = ['state', 'slope', 'keep'].map((what) =>
    stages.map((i) => part(`${what}${i}`)),
  );
  const point = part('point');
  const [perStep, relative, share] = [p.perStep, p.relative, p.share].map((at) => view(at, 1));
  // What pads the vectors is never judged.
  view(p.absolute, p.length).fill(Infinity);
  view(p.floor, p.length).fill(-Infinity);
  const [absolute, floor] = [view(p.absolute, n), view(p.floor, n)];
  let tolerated = Number.NaN;
  return {
    x: view(p.x, n),
    x1: view(p.x1, n),
    trial: view(p.trial, n),
    dx: view(p.dx, n),
    absolute,
    floor,
    tolerate(by, places) {
      if (by === tolerated) return;
      tolerated = by;
      places.forEach((q, i) => {
        const own = by * q.scale;
        // Boundary totals have no feedback and take no part in the error norm.
        absolute[i] = q.kind === 'total' ? Infinity : own;
        floor[i] = q.floor === null ? -Infinity : q.floor - BELOW_FLOOR * own;
      });
    },
    point: view(p.point, n),
    error: view(p.error, 1),
    below: view(p.below, 1),
    state: (i) => states[i](),
    perStep,
    relative,
    slope: (i) => slopes[i](),
    keep: (i) => keeps[i](),
    finish: part('finish'),
    rest,
    dense: part('dense'),
    at(s) {
      share[0] = s;
      point();
    },
  };
}

import { integrate, type Options, type Run, type Watcher } from '../../../src/solve/integrate.ts';
import type {
  F,
  Guard,
  Named,
  Pattern,
  Place,
  Schedule,
  SteadyRow,
  System,
} from '../../../src/solve/system.ts';

type Rows = readonly (readonly number[])[];

/** Equations as they stand in a book: vectors and full matrices. */
export interface Equations {
  readonly name: string;
  readonly size: number;
  /** Typical magnitudes; 1 where not given. */
  readonly scale?: readonly number[];
  rhs(x: F, w: F): readonly number[];
  jacobian(x: F, w: F): Rows;
  readonly inputs?: number;
  byInput?(x: F, w: F): Rows;
  readonly guards?: readonly Guard[];
  guard?(x: F, w: F): readonly number[];
  readonly places?: readonly Partial<Place>[];
  readonly steady?: readonly SteadyRow[];
}

export const full = (rows: number, columns: number): Pattern => ({
  rowStart: Int32Array.from({ length: rows + 1 }, (_, i) => i * columns),
  column: Int32Array.from({ length: rows * columns }, (_, k) => k % columns),
});

const named = (path: string, scale = 1): Named => ({ path, unit: '', scale });

/** A System without outputs and parameters from equations. */
export function dense(e: Equations): System {
  const inputs = e.inputs ?? 0;
  return {
    topology: e.name,
    places: Array.from({ length: e.size }, (_, i) => ({
      ...named(`${e.name}.${i + 1}`, e.scale?.[i]),
      kind: 'amount',
      floor: null,
      ...e.places?.[i],
    })),
    inputs: Array.from({ length: inputs }, (_, i) => named(`input.${i + 1}`)),
    parameters: [],
    outputs: [],
    rhs: (x, w, _, dx) => dx.set(e.rhs(x, w)),
    A: full(e.size, e.size),
    jacobian: (x, w, _, values) => values.set(e.jacobian(x, w).flat()),
    B: full(e.size, inputs),
    byInput: (x, w, _, values) => values.set(e.byInput?.(x, w).flat() ?? []),
    output: () => undefined,
    C: full(0, 0),
    D: full(0, 0),
    byOutput: () => undefined,
    guards: e.guards ?? [],
    guard: (x, w, _, g) => g.set(e.guard?.(x, w) ?? []),
    conserved: [],
    steady: e.steady ?? Array.from({ length: e.size }, () => 'free'),
  };
}

/** Constant inputs, with corners where nothing happens at the inner times. */
export const idle = (times: readonly number[], w: readonly number[] = []): Schedule => ({
  times: Float64Array.from(times),
  value: (_, __, to) => to.set(w),
  slope: (_, to) => to.fill(0),
});

export const options = (integrator: string, relative: number, firstStep = 1e-3): Options => ({
  integrator,
  tolerance: { relative },
  maximumSteps: 100_000,
  firstStep,
});

export const none = new Float64Array(0);

export function solve(
  system: System,
  initial: readonly number[],
  schedule: Schedule,
  o: Options,
  watchers: readonly Watcher[] = [],
): Run {
  return integrate({ system, parameters: none, schedule, initial: Float64Array.from(initial) }, o, watchers);
}

import { SampledLoop } from '../../src/control/loop.ts';
import type { LoopSpec } from '../../src/control/spec.ts';
import { integrate } from '../../src/solve/integrate.ts';
import { makeSchedule, type Track } from '../../src/solve/schedule.ts';
import type { F, System } from '../../src/solve/system.ts';

/** T·dx/dt = k·u + load − x; y = x. Inputs u, load, measurement, set point, gate. */
export function firstOrder(k: number, T: number): System {
  const named = (path: string) => ({ path, unit: '', scale: 1 });
  const one = { rowStart: Int32Array.from([0, 1]), column: Int32Array.from([0]) };
  return {
    topology: 'first order',
    places: [{ ...named('x'), kind: 'amount', floor: null }],
    inputs: ['u', 'load', 'measurement', 'set point', 'gate'].map(named),
    parameters: [],
    outputs: ['y', 'u', 'measurement', 'set point'].map(named),
    rhs(x, w, _p, dx) {
      dx[0] = (k * w[0] + w[1] - x[0]) / T;
    },
    A: one,
    jacobian(_x, _w, _p, v) {
      v[0] = -1 / T;
    },
    B: { rowStart: Int32Array.from([0, 2]), column: Int32Array.from([0, 1]) },
    byInput(_x, _w, _p, v) {
      v.set([k / T, 1 / T]);
    },
    output(x, w, _p, y) {
      y.set([x[0], w[0], w[2], w[3]]);
    },
    C: { rowStart: Int32Array.from([0, 1, 1, 1, 1]), column: Int32Array.from([0]) },
    D: { rowStart: Int32Array.from([0, 0, 1, 2, 3]), column: Int32Array.from([0, 2, 3]) },
    byOutput(_x, _w, _p, c, d) {
      c[0] = 1;
      d.fill(1);
    },
    guards: [],
    guard() {},
    conserved: [],
    steady: ['free'],
  };
}

/** Settings of a loop on that plant; reverse action where k > 0. Times in whatever unit T is in. */
export type Plan = Partial<Omit<LoopSpec, 'settings' | 'move' | 'analyser'>> & {
  readonly settings?: Partial<LoopSpec['settings']>;
  readonly move?: Partial<LoopSpec['move']>;
  readonly analyser?: Partial<LoopSpec['analyser']>;
};

export const spec = (plan: Plan = {}): LoopSpec => ({
  name: 'AIC-1',
  measured: 0,
  weighedBy: -1,
  seed: 1,
  runs: 'on each result',
  auto: true,
  modes: [],
  service: [],
  setPoint: { times: [0], values: [0] },
  limits: null,
  manual: null,
  feedforward: null,
  inputs: { output: 0, gate: 4, measurement: 2, setPoint: 3, flow: -1, wild: -1, overruling: [] },
  ...plan,
  analyser: {
    every: 10,
    first: 10,
    delay: 0,
    takes: 'grab',
    noise: { absolute: 0 },
    bias: 0,
    dropout: 0,
    onBad: 'hold',
    ...plan.analyser,
  },
  settings: {
    sense: -1,
    gain: 1,
    integralTime: 60,
    derivativeTime: 0,
    filter: 0,
    setPointWeight: 1,
    ...plan.settings,
  },
  move: {
    low: -1e6,
    high: 1e6,
    up: Infinity,
    down: Infinity,
    leastWild: 0,
    flowLow: 0,
    flowHigh: Infinity,
    ...plan.move,
  },
});

export interface Followed {
  readonly loop: SampledLoop;
  /** Outputs y, u, measurement, set point at the times asked for. */
  readonly at: readonly F[];
  readonly steps: number;
}

/** Runs one loop on the first-order plant from x0, with a load over time. */
export function follow(
  system: System,
  plan: LoopSpec,
  times: readonly number[],
  { x0 = 0, u0 = 0, load = [] as readonly Track[], end = Math.max(...times), every = 0 } = {},
): Followed {
  const loop = new SampledLoop(plan);
  const at: F[] = [];
  const left = [...times].sort((a, b) => a - b);
  const w = Float64Array.from([u0, 0, 0, 0, 1]);
  const run = integrate(
    {
      system,
      parameters: new Float64Array(0),
      schedule: makeSchedule(w, load, 0, end + every),
      initial: Float64Array.from([x0]),
      devices: [loop],
    },
    { integrator: 'rodas5p', tolerance: { relative: 1e-10 }, maximumSteps: 1e6, firstStep: 1e-3 },
    [
      {
        step(step, inputs) {
          while (left.length > 0 && left[0] <= step.t1) {
            const t = left.shift() as number;
            const x = new Float64Array(1);
            const v = new Float64Array(5);
            const y = new Float64Array(4);
            step.at(t, x);
            inputs.value(t, v);
            system.output(x, v, new Float64Array(0), y);
            at.push(y);
          }
        },
      },
    ],
  );
  return { loop, at, steps: run.work.steps };
}

import { type Fitted, fopdtStep, leastSquares, type StepTest, twoPoint } from '../../control/identify.ts';
import type { Fopdt } from '../../control/rules.ts';
import { makeSchedule } from '../../solve/schedule.ts';
import { quiet } from './prove.ts';
import { type Ground, trial } from './trial.ts';

/** A step of the output in manual on the nonlinear plant, or a test made on the real one. */
export interface Tested {
  readonly name: string;
  readonly test: StepTest;
  readonly fit: Fitted | null;
  /** The fit at the times of the test. */
  readonly fitted: readonly number[];
  readonly smith: Fopdt | null;
  readonly sundaresanKrishnaswamy: Fopdt | null;
}

/** Lags and delays that a test lasts, within these bounds in s. */
const LASTS = 6;
const SHORTEST = 2 * 3600;
const LONGEST = 48 * 3600;
/** A test leaves this share of the way to a limit of the output. */
const ROOM = 0.9;
const LOOKS = 240;

export function tested(name: string, test: StepTest): Tested {
  const fit = leastSquares(test);
  return {
    name,
    test,
    fit,
    fitted: fit ? test.times.map((t) => fopdtStep(fit, test.step, t)) : [],
    smith: twoPoint(test, 'smith'),
    sundaresanKrishnaswamy: twoPoint(test, 'sundaresan-krishnaswamy'),
  };
}

/**
 * Steps of the output up and down from the steady state, sized by the exact gain so that the measurement stays within
 * `band` kg/m³, and halved until it does.
 */
export function stepTests(g: Ground, model: Fopdt, band: number): Tested[] {
  const { plant, loops } = g.joined;
  const { spec } = loops[g.loop];
  const u = plant.inputs[spec.inputs.output];
  const span = Math.min(LONGEST, Math.max(SHORTEST, LASTS * (model.lag + model.delay)));
  const calm: Ground = {
    ...g,
    schedule: makeSchedule(plant.inputs, [], 0, span),
    limits: [],
    every: span / LOOKS,
  };
  return ([1, -1] as const).flatMap((side) => {
    const room = ROOM * (side > 0 ? spec.move.high - u : u - spec.move.low);
    let size = Math.min(band / Math.abs(model.gain), room);
    if (!(size > 0)) return [];
    for (let n = 0; n < 6; n++) {
      const step = side * size;
      const { trace } = trial(calm, (s) => ({
        ...quiet(s),
        auto: false,
        modes: [],
        move: { ...s.move, up: Infinity, down: Infinity },
        manual: { times: [0], values: [u + step] },
      }));
      const values = trace.measured.map((v) => v - trace.measured[0]);
      if (values.some((v) => Math.abs(v) > 1.001 * band) && n < 5) {
        size /= 2;
        continue;
      }
      return [tested(side > 0 ? 'up' : 'down', { step, times: trace.times, values })];
    }
    return [];
  });
}

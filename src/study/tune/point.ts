import { type Fitted, fitResponse } from '../../control/identify.ts';
import {
  frequencyResponse,
  type LinearPlant,
  linearise,
  restGains,
  stepGains,
} from '../../control/linearise.ts';
import { logSpace, type Margins, margins } from '../../control/margins.ts';
import { reduced } from '../../control/reduce.ts';
import { OpenLoops, SampledPlant } from '../../control/sampled.ts';
import type { LoopSpec, PidSettings } from '../../control/spec.ts';
import { abs, arg, times, turn } from '../../math/complex.ts';
import type { Complex } from '../../math/eigen.ts';
import type { Plant } from '../../plant/assemble.ts';
import type { F } from '../../solve/system.ts';

/** The plant about one steady state, as the loop meets it. */
export interface Point {
  readonly plant: LinearPlant;
  /** Output per measurement at rest and one hour after a step, in SI; null: something only integrates. */
  readonly restGain: number | null;
  readonly hourGain: number;
  /** FOPDT fitted to the exact response between a tenth of ω180 and ω180; the analyser's delay is not in it. */
  readonly fit: Fitted;
  readonly response: (omega: number) => Complex[];
  readonly loops: OpenLoops;
  margins(s: PidSettings, looks?: number): Margins;
}

const HOUR = 3600;
const FIT_POINTS = 14;
/** rad/s: slower than this is at rest. */
const BOTTOM = 2e-6;

/** Linearisation at (x, w): input 0 is the loop's output, the others are `disturbances`; the output is what it measures. */
export function pointAt(
  plant: Plant,
  spec: LoopSpec,
  x: F,
  w: F,
  disturbances: readonly number[] = [],
): Point {
  const inputs = [spec.inputs.output, ...disturbances];
  const linear = reduced(linearise(plant.system, x, w, plant.parameters, inputs, [spec.measured]));
  const { every, delay, takes } = spec.analyser;
  const loops = new OpenLoops(new SampledPlant(linear, { every, delay, takes, runs: spec.runs }));
  const response = frequencyResponse(linear);
  const rest = restGains(linear)?.[0][0] ?? null;
  const [hour] = stepGains(linear, HOUR);
  return {
    plant: linear,
    restGain: rest,
    hourGain: hour,
    fit: fitted(response, rest ?? hour, delay, loops.top),
    response,
    loops,
    margins: (s, looks) => margins(loops.loop(s), BOTTOM, loops.top, looks),
  };
}

/** ω at which the plant with the analyser's delay lags by half a turn beyond its own sign, or the top. */
function halfTurn(response: (omega: number) => Complex[], gain: number, delay: number, top: number): number {
  const lag = (w: number): number => {
    const g = times(response(w)[0], turn(-w * delay));
    return arg({ re: g.re * Math.sign(gain), im: g.im * Math.sign(gain) });
  };
  let before = 0;
  for (const w of logSpace(1e-5, 4 * top, 120)) {
    const now = lag(w);
    // Beyond half a turn the angle comes back from the other side.
    if (before < -Math.PI / 2 && now > Math.PI / 2) return w;
    before = now;
  }
  return top;
}

function fitted(response: (omega: number) => Complex[], gain: number, delay: number, top: number): Fitted {
  const half = halfTurn(response, gain, delay, top);
  const list = logSpace(0.1 * half, half, FIT_POINTS).map((omega) => ({ omega, g: response(omega)[0] }));
  const first = list[0];
  const lag = Math.sqrt(Math.max(1e-4, (gain / abs(first.g)) ** 2 - 1)) / first.omega;
  return fitResponse(list, { gain, lag: Math.max(60, lag), delay: 60 });
}

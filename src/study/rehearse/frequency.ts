import { FrequencyResponse } from '../../solve/response.ts';
import { steadyState } from '../../solve/steady.ts';
import type { Ground } from './ground.ts';

/** Which periods of a feed's swing reach a limited quantity, by the exact linearisation at the steady state. */
export interface FrequencyView {
  readonly input: string;
  readonly inputUnit: string;
  readonly inputBase: number;
  readonly output: string;
  readonly outputUnit: string;
  readonly outputBase: number;
  /** s, rising. */
  readonly periods: readonly number[];
  /** Amplitude of the output over that of the input, in their units. */
  readonly ratios: readonly number[];
  /** s by which the output comes after the input. */
  readonly lags: readonly number[];
  /** The ratio of a lasting change: what ever longer periods tend to. */
  readonly lasting: number;
  /** s: the period at which half of the lasting change gets through; null: not within the periods shown. */
  readonly half: number | null;
  /** Half the height of the stated upset's swing in the input's unit, and from which period on it reaches the limit [s]; null: never. */
  readonly swing: number;
  readonly reaches: number | null;
}

/** Points over the periods, and what they span [s]. */
const POINTS = 61;
const SHORTEST = 300;
const LONGEST = 10 * 86400;
/** Share of an output's scale that a swing as large as its input must move. */
const NOTHING = 1e-9;
/** A period at which a swing is as good as lasting: 3 years. */
const LASTING = 1e8;

/** For the first feed quantity that an upset changes, and the limit that matters; null where there is no such thing, or the one does not hear of the other. */
export function frequencyView(g: Ground, limit: number): FrequencyView | null {
  const { plant, scenario: s } = g;
  const { system, parameters } = plant;
  const change = g.changes.find((c) => s.feeds.some((f) => c.quantity.startsWith(`${f.name}.`)));
  const l = s.limits[limit];
  if (!change || !l) return null;
  const input = system.inputs.findIndex((i) => i.path === change.quantity);
  const output = system.outputs.findIndex((o) => o.path === `${l.stream}.${l.quantity}`);
  const rest = steadyState(system, plant.inputs, parameters, g.before.state);
  if (!rest.found) return null;
  const y = new Float64Array(system.outputs.length);
  system.output(rest.state, plant.inputs, parameters, y);
  const response = new FrequencyResponse(system, rest.state, plant.inputs, parameters, input);
  const read = (period: number): { ratio: number; angle: number } | null => {
    const h = response.at((2 * Math.PI) / period);
    return (
      h && { ratio: Math.hypot(h.re[output], h.im[output]), angle: Math.atan2(h.im[output], h.re[output]) }
    );
  };
  const lasting = read(LASTING);
  const ratio = SHORTEST ** -1 * LONGEST;
  const periods = Array.from({ length: POINTS }, (_, i) => SHORTEST * ratio ** (i / (POINTS - 1)));
  const points = periods.map(read);
  if (lasting === null || points.some((p) => p === null)) return null;
  // A quantity that does not hear of the feed at all has digits for an answer.
  const heard = NOTHING * system.outputs[output].scale;
  if (!(lasting.ratio * system.inputs[input].scale > heard)) return null;
  const found = points as { ratio: number; angle: number }[];
  const base = plant.inputs[input];
  const { how } = change;
  const swing = Math.abs(
    'by' in how ? (how.relative ? how.by * base : how.by) : 'to' in how ? how.to - base : 0,
  );
  const room = Math.abs(l.value - y[output]);
  const passes = (level: number): number | null =>
    periodAt(
      periods,
      found.map((p) => p.ratio),
      level,
    );
  return {
    input: change.quantity,
    inputUnit: system.inputs[input].unit,
    inputBase: base,
    output: system.outputs[output].path,
    outputUnit: system.outputs[output].unit,
    outputBase: y[output],
    periods,
    ratios: found.map((p) => p.ratio),
    lags: lagsOf(
      periods,
      found.map((p) => p.angle),
      Math.abs(lasting.angle) < Math.PI / 2 ? 0 : Math.PI,
    ),
    lasting: lasting.ratio,
    half: passes(lasting.ratio / 2),
    swing,
    reaches: swing > 0 ? passes(room / swing) : null,
  };
}

/**
 * Angles as lags in time: unwrapped from the longest period, at which the output follows at once (or, where it goes the
 * other way, at half a turn), so that no lag jumps by a whole period.
 */
function lagsOf(periods: readonly number[], angles: readonly number[], lasting: number): number[] {
  const turn = 2 * Math.PI;
  const lags = new Array<number>(periods.length);
  let before = lasting;
  for (let i = periods.length - 1; i >= 0; i--) {
    const angle = angles[i] + turn * Math.round((before - angles[i]) / turn);
    before = angle;
    lags[i] = (-(angle - lasting) / turn) * periods[i];
  }
  return lags;
}

/** The shortest period from which on the ratio is above a level up to the longest; straight lines in logarithms. */
function periodAt(periods: readonly number[], ratios: readonly number[], level: number): number | null {
  let k = ratios.length - 1;
  if (!(ratios[k] > level)) return null;
  while (k >= 0 && ratios[k] > level) k -= 1;
  if (k < 0) return periods[0];
  const share = Math.log(level / ratios[k]) / Math.log(ratios[k + 1] / ratios[k]);
  return periods[k] * (periods[k + 1] / periods[k]) ** share;
}

import { frequencyResponse, linearise, restGains, stepGains } from '../../control/linearise.ts';
import { logSpace } from '../../control/margins.ts';
import { reduced } from '../../control/reduce.ts';
import { abs, arg } from '../../math/complex.ts';
import type { F } from '../../solve/system.ts';
import type { ControlledPlant } from '../control/joined.ts';

/** The exact response of one measurement to one input, every loop held; SI. */
export interface Response {
  readonly from: string;
  readonly fromUnit: string;
  readonly to: string;
  readonly toUnit: string;
  /** At rest, null where something only integrates; and one hour after a step. */
  readonly restGain: number | null;
  readonly hourGain: number;
  /** By the frequencies of `Responses`: |G| and its angle [rad], unwrapped. */
  readonly magnitudes: readonly number[];
  readonly angles: readonly number[];
}

export interface Responses {
  /** rad/s, rising. */
  readonly omegas: readonly number[];
  readonly list: readonly Response[];
}

/** rad/s: periods from a week to a minute. */
const LOWEST = (2 * Math.PI) / (7 * 86400);
const HIGHEST = (2 * Math.PI) / 60;
const POINTS = 33;
const HOUR = 3600;

/**
 * G(jω) of the exact linearisation at (x, w) from what each loop moves, from the wild flows of their stations and from
 * what upsets change (`disturbances`, numbers of inputs), to what each loop measures.
 */
export function responses(
  { plant, loops }: ControlledPlant,
  x: F,
  w: F,
  disturbances: readonly number[],
): Responses {
  const { system, parameters } = plant;
  const moved = loops.flatMap(({ loop, awake, spec }) => {
    if (loop.move.kind === 'set point') return [];
    const own = awake ? spec.inputs.output : system.inputs.findIndex((q) => q.path === loop.move.quantity);
    return [own, ...(spec.inputs.wild < 0 ? [] : [spec.inputs.wild])];
  });
  const inputs = [...new Set([...moved, ...disturbances])].filter((i) => i >= 0);
  const measured = [...new Set(loops.map((l) => l.spec.measured))];
  const omegas = logSpace(LOWEST, HIGHEST, POINTS);
  const list = measured.flatMap((output) => {
    const linear = reduced(linearise(system, x, w, parameters, inputs, [output]));
    const at = frequencyResponse(linear);
    const points = omegas.map(at);
    const rest = restGains(linear);
    const hour = stepGains(linear, HOUR);
    return inputs.map(
      (input, k): Response => ({
        from: system.inputs[input].path,
        fromUnit: system.inputs[input].unit,
        to: system.outputs[output].path,
        toUnit: system.outputs[output].unit,
        restGain: rest?.[0][k] ?? null,
        hourGain: hour[k],
        magnitudes: points.map((p) => abs(p[k])),
        angles: unwrapped(points.map((p) => arg(p[k]))),
      }),
    );
  });
  return { omegas, list };
}

/** Angles that follow each other without a jump of a turn. */
function unwrapped(angles: readonly number[]): number[] {
  const turn = 2 * Math.PI;
  const list: number[] = [];
  for (const a of angles) {
    const before = list.at(-1) ?? a;
    list.push(a + turn * Math.round((before - a) / turn));
  }
  return list;
}

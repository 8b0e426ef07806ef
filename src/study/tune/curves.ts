import { logSpace } from '../../control/margins.ts';
import type { PidSettings } from '../../control/spec.ts';
import { abs, arg } from '../../math/complex.ts';
import type { Candidate } from './candidates.ts';
import { withSettings } from './candidates.ts';
import type { Point } from './point.ts';

/** An open loop over frequency; phase in degrees, unwrapped. */
export interface Curve {
  readonly name: string;
  readonly omega: readonly number[];
  readonly re: readonly number[];
  readonly im: readonly number[];
  readonly magnitude: readonly number[];
  readonly phase: readonly number[];
}

const LOOKS = 160;

export function curveOf(c: Candidate, point: Point, spec: PidSettings): Curve {
  const L = point.loops.loop(withSettings(spec, c.settings));
  const omega = logSpace(point.loops.top * 1e-3, point.loops.top, LOOKS);
  const values = omega.map(L);
  let phase = 0;
  return {
    name: c.name,
    omega,
    re: values.map((q) => q.re),
    im: values.map((q) => q.im),
    magnitude: values.map(abs),
    phase: values.map((q, k) => {
      const now = (arg(q) * 180) / Math.PI;
      phase = k === 0 ? (now > 0 ? now - 360 : now) : phase + wrapped(now - phase);
      return phase;
    }),
  };
}

const wrapped = (d: number): number => d - 360 * Math.round(d / 360);

/** The circle about −1 that a loop with sensitivity Ms stays outside of. */
export const sensitivityCircle = (ms: number): { x: number; y: number }[] =>
  Array.from({ length: 73 }, (_, k) => ({
    x: -1 + Math.cos((k * Math.PI) / 36) / ms,
    y: Math.sin((k * Math.PI) / 36) / ms,
  }));

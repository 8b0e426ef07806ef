import { settle } from '../control/settle.ts';
import type { Candidate } from './candidates.ts';
import { set } from './prove.ts';
import { type Ground, trial } from './trial.ts';

/** The set point that keeps a limit through upsets and noise, and what it costs at rest. */
export interface BackOff {
  readonly limit: number;
  /** Null: none between half the set point and the limit keeps it. */
  readonly setPoint: number | null;
  readonly worst: number;
  /** Standard deviation of the measured outlet under the analyser's noise, without upsets, kg/m³. */
  readonly sigma: number;
  /** Output at rest there, less that at the stated set point; and the flow that goes with it, m³/s. */
  readonly output: number;
  readonly flow: number;
}

const ROUNDS = 6;
const LEAST = 0.5;

export function backOff(g: Ground, best: Candidate, noiseless: Ground): BackOff | null {
  const { plant, loops } = g.joined;
  const { loop, spec } = loops[g.loop];
  const path = loop.measure.of;
  const limit = g.limits.find((l) => `${l.stream}.${l.quantity}` === path && l.side === 'below');
  if (!limit || spec.setPoint.times.length === 0) return null;
  const sigma = deviation(trial(noiseless, set(best)).trace.measured);
  const at = (keepAt: number): { worst: number; output: number; flow: number } | null => {
    const joined = {
      ...g.joined,
      plant: { ...plant, barren: g.initial },
      loops: g.joined.loops.map((l, i) =>
        i === g.loop
          ? {
              ...l,
              loop: { ...l.loop, keepAt, controller: { ...l.loop.controller, auto: true } },
              spec: { ...l.spec, setPoint: { times: [0], values: [keepAt] } },
            }
          : l,
      ),
    };
    const rest = settle(joined);
    if (!rest.found) return null;
    const ground: Ground = {
      ...g,
      joined: { ...joined, plant: { ...plant, inputs: rest.inputs } },
      initial: rest.state,
    };
    // The schedule holds the inputs of the plant alone; what the loops set comes from the devices.
    const base = g.schedule;
    const { output, gate, measurement, setPoint } = spec.inputs;
    const schedule = {
      ...base,
      value(segment: number, t: number, w: Float64Array): void {
        base.value(segment, t, w);
        for (const i of [output, gate, measurement, setPoint]) if (i >= 0) w[i] = rest.inputs[i];
      },
    };
    const run = trial({ ...ground, schedule }, set(best));
    return {
      worst: run.trace.measured.reduce((a, b) => Math.max(a, b), -Infinity),
      output: rest.inputs[output],
      flow: run.trace.moved[0],
    };
  };
  const here = at(loop.keepAt);
  if (here === null) return null;
  const kept = (q: { worst: number }): boolean => q.worst <= limit.value;
  let [low, high] = kept(here) ? [loop.keepAt, limit.value] : [LEAST * loop.keepAt, loop.keepAt];
  let found = kept(here) ? { keepAt: loop.keepAt, ...here } : null;
  if (found === null) {
    const least = at(low);
    if (least && kept(least)) found = { keepAt: low, ...least };
    else
      return {
        limit: limit.value,
        setPoint: null,
        worst: least?.worst ?? Number.NaN,
        sigma,
        output: Number.NaN,
        flow: Number.NaN,
      };
  }
  for (let n = 0; n < ROUNDS; n++) {
    const middle = (low + high) / 2;
    const q = at(middle);
    if (q && kept(q)) {
      low = middle;
      found = { keepAt: middle, ...q };
    } else high = middle;
  }
  return {
    limit: limit.value,
    setPoint: found.keepAt,
    worst: found.worst,
    sigma,
    output: found.output - here.output,
    flow: found.flow - here.flow,
  };
}

function deviation(values: readonly number[]): number {
  const mean = values.reduce((s, v) => s + v, 0) / values.length;
  return Math.sqrt(values.reduce((s, v) => s + (v - mean) ** 2, 0) / values.length);
}

import { limitsAt } from '../../control/limits.ts';
import type { Margins } from '../../control/margins.ts';
import { type Settings, simc } from '../../control/rules.ts';
import { steadyState } from '../../solve/steady.ts';
import type { F } from '../../solve/system.ts';
import type { ControlledPlant } from '../control/joined.ts';
import { modelFor, withSettings } from './candidates.ts';
import { pointAt } from './point.ts';

/** The plant at one point of its operating range, and the chosen settings there. */
export interface MapPoint {
  /** Output of the loop; throughput and grade over those of the scenario. */
  readonly output: number;
  readonly throughput: number;
  readonly grade: number;
  readonly measurement: number;
  /** Null: no steady state there, or its flow is at a limit. */
  readonly gain: number | null;
  readonly lag: number;
  readonly delay: number;
  readonly margins: Margins | null;
  /** SIMC there. */
  readonly local: Settings | null;
}

export interface OperatingMap {
  readonly points: readonly MapPoint[];
  /** Inputs that stand for throughput and grade, by path; null: none found. */
  readonly throughput: string | null;
  readonly grade: string | null;
  /** Smallest and largest gain with its sign at the base throughput and grade. */
  readonly alongOutput: { readonly least: MapPoint; readonly most: MapPoint } | null;
  readonly signChanges: readonly MapPoint[];
  readonly unsafe: readonly MapPoint[];
}

const STEPS = [-1, -0.5, 0, 0.5, 1];
/** Ms beyond which settings are not safe at a point. */
export const UNSAFE = 2;
const LOOKS = 60;

/**
 * Gain, lag, delay and margins over the output of the loop (five values), throughput and grade (three each, in all
 * combinations), each point a steady state with the output held there and its exact linearisation.
 */
export function operatingMap(
  c: ControlledPlant,
  loop: number,
  settings: Settings,
  range: number,
  start: F,
): OperatingMap {
  const { plant, loops } = c;
  const { spec } = loops[loop];
  const { low, high } = spec.move;
  const throughput = throughputOf(c, loop);
  const grade = gradeOf(c, loop, throughput);
  const base = plant.inputs[spec.inputs.output];
  const outputs = [...new Set(STEPS.map((s) => Math.min(high, Math.max(low, base * (1 + range * s)))))];
  const shares = (input: number): number[] => (input < 0 ? [1] : [1, 1 - range, 1 + range]);
  const cases = shares(throughput).flatMap((t) => shares(grade).map((g) => ({ throughput: t, grade: g })));
  const points = cases.flatMap((q): MapPoint[] => {
    let from = start;
    return outputs.map((output): MapPoint => {
      const w = Float64Array.from(plant.inputs);
      if (throughput >= 0) w[throughput] *= q.throughput;
      if (grade >= 0) w[grade] *= q.grade;
      w[spec.inputs.output] = output;
      const none = {
        output,
        ...q,
        measurement: Number.NaN,
        gain: null,
        lag: 0,
        delay: 0,
        margins: null,
        local: null,
      };
      // Where the flow is held at a limit of its own the output moves nothing.
      const limits = limitsAt(spec, 0, w);
      const rest = steadyState(plant.system, w, plant.parameters, from);
      if (!rest.found || output < limits.low || output > limits.high) return none;
      from = Float64Array.from(rest.state);
      const y = new Float64Array(plant.system.outputs.length);
      plant.system.output(rest.state, w, plant.parameters, y);
      const point = pointAt(plant, spec, rest.state, w);
      return {
        output,
        ...q,
        measurement: y[spec.measured],
        gain: point.restGain ?? point.hourGain,
        lag: point.fit.lag,
        delay: point.fit.delay,
        margins: point.margins(withSettings(spec.settings, settings), LOOKS),
        local: simc(modelFor(point.fit, spec)),
      };
    });
  });
  const known = points.filter((p) => p.gain !== null);
  const along = known.filter((p) => p.throughput === 1 && p.grade === 1);
  const size = (p: MapPoint): number => Math.abs(p.gain as number);
  const right = -spec.settings.sense;
  return {
    points,
    throughput: throughput < 0 ? null : plant.system.inputs[throughput].path,
    grade: grade < 0 ? null : plant.system.inputs[grade].path,
    alongOutput:
      along.length < 2
        ? null
        : {
            least: along.reduce((a, b) => (size(b) < size(a) ? b : a)),
            most: along.reduce((a, b) => (size(b) > size(a) ? b : a)),
          },
    signChanges: known.filter((p) => Math.sign(p.gain as number) !== right),
    unsafe: known.filter((p) => p.margins && (!p.margins.stable || p.margins.sensitivity > UNSAFE)),
  };
}

/** The wild flow, or the largest feed of the phase that is measured. */
export function throughputOf({ plant, loops }: ControlledPlant, loop: number): number {
  const { spec, loop: l } = loops[loop];
  if (spec.inputs.wild >= 0) return spec.inputs.wild;
  const { feeds } = plant.scenario;
  const stream = plant.network.streams.get(l.measure.of.slice(0, l.measure.of.lastIndexOf('.')));
  const own = feeds.filter((f) => f.phase === stream?.phase && `${f.name}.flow` !== l.move.quantity);
  const largest = own.reduce<(typeof own)[number] | null>(
    (a, b) => (a === null || b.flow > a.flow ? b : a),
    null,
  );
  return largest === null ? -1 : plant.system.inputs.findIndex((q) => q.path === `${largest.name}.flow`);
}

/** What is measured, in the feed that stands for the throughput. */
export function gradeOf({ plant, loops }: ControlledPlant, loop: number, throughput: number): number {
  if (throughput < 0) return -1;
  const { of } = loops[loop].loop.measure;
  const feed = plant.system.inputs[throughput].path.replace(/\.flow$/, '');
  return plant.system.inputs.findIndex((q) => q.path === `${feed}.${of.slice(of.lastIndexOf('.') + 1)}`);
}

import type { LoopSpec } from '../../control/spec.ts';
import { makeSchedule } from '../../solve/schedule.ts';
import { type Candidate, withSettings } from './candidates.ts';
import { absoluteError, type Ground, type Trial, trial, volumeMoved } from './trial.ts';

/** What a candidate did on the nonlinear plant; SI. */
export interface Proof {
  readonly name: string;
  /** Null: in manual. */
  readonly candidate: Candidate | null;
  readonly trial: Trial;
  /** ∫|PV − SP| through the upsets. */
  readonly iae: number;
  readonly worst: number;
  /** s outside and kg beyond, over all limits on what is measured. */
  readonly outside: number;
  readonly beyond: number;
  /** m³ moved beyond what manual moves. */
  readonly solvent: number;
  readonly travel: number;
  readonly step: StepFigures | null;
  /** Shares of the time in automatic at a limit of the output, and on its slew. */
  readonly atLimit: number;
  readonly slewing: number;
}

/** A set-point step without noise. */
export interface StepFigures {
  readonly from: number;
  readonly to: number;
  /** Share of the step by which it went too far. */
  readonly overshoot: number;
  /** s until within 5 % of the step for good; null: not within the run. */
  readonly settling: number | null;
  readonly iae: number;
}

/** Size of the set-point step, as a share of the set point, and when it comes. */
const STEP = 0.1;
export const STEP_AT = 3600;
const SETTLED = 0.05;

export const quiet = (s: LoopSpec): LoopSpec => ({
  ...s,
  analyser: { ...s.analyser, noise: { absolute: 0 }, bias: 0, dropout: 0 },
});

/** The loop in automatic with a candidate's settings; in manual without. */
export const set =
  (c: Candidate | null) =>
  (s: LoopSpec): LoopSpec =>
    c === null
      ? { ...s, auto: false, modes: [] }
      : { ...s, auto: true, settings: withSettings(s.settings, c.settings) };

export function prove(g: Ground, candidates: readonly Candidate[]): Proof[] {
  const manual = trial(g, set(null));
  const base = volumeMoved(manual.trace);
  const proofs = [
    ...candidates.map((c) => proof(c.name, c, trial(g, set(c)), base, stepFigures(g, set(c)))),
    proof('manual', null, manual, base, null),
  ];
  return proofs.sort((a, b) => rank(a) - rank(b) || a.beyond - b.beyond || a.iae - b.iae);
}

/** Without stability there is nothing to rank; what gave up and references come after what may be used. */
const rank = (p: Proof): number =>
  p.candidate === null ? 2 : p.candidate.margins.stable && p.trial.complete ? 0 : 3;

export function proof(
  name: string,
  candidate: Candidate | null,
  t: Trial,
  base: number,
  step: StepFigures | null,
): Proof {
  const own = t.limits.filter((l) => l.unit === 'kg/m^3');
  const span = Math.max(1, t.history.automatic);
  return {
    name,
    candidate,
    trial: t,
    iae: absoluteError(t.trace),
    worst: t.trace.measured.reduce((a, b) => Math.max(a, b), -Infinity),
    outside: own.reduce((s, l) => s + l.outside, 0),
    beyond: own.reduce((s, l) => s + (l.beyond ?? 0), 0),
    solvent: volumeMoved(t.trace) - base,
    travel: t.history.travel,
    step,
    atLimit: t.history.atLimit / span,
    slewing: t.history.slewing / span,
  };
}

/** The set point stepped down by a tenth: the harder way for a raffinate. */
export function stepTrial(g: Ground, change: (s: LoopSpec) => LoopSpec): Trial {
  const { plant, loops } = g.joined;
  const { horizon } = plant.scenario;
  const spec = loops[g.loop].spec;
  const from = plant.inputs[spec.inputs.setPoint];
  const to = from * (1 - STEP);
  const end = Math.max(horizon, 4 * STEP_AT);
  const calm: Ground = { ...g, schedule: makeSchedule(plant.inputs, [], 0, end), limits: [] };
  return trial(calm, (s) => ({
    ...quiet(change(s)),
    setPoint: { times: [0, STEP_AT, STEP_AT], values: [from, from, to] },
  }));
}

function stepFigures(g: Ground, change: (s: LoopSpec) => LoopSpec): StepFigures | null {
  const { plant, loops } = g.joined;
  const spec = loops[g.loop].spec;
  // Led by another loop it has no set point of its own to step.
  if (spec.setPoint.times.length === 0) return null;
  const from = plant.inputs[spec.inputs.setPoint];
  const to = from * (1 - STEP);
  const { trace } = stepTrial(g, change);
  const after = trace.times.flatMap((t, k) =>
    t > STEP_AT ? [{ t, gap: (trace.measured[k] - to) / (to - from) }] : [],
  );
  const overshoot = Math.max(0, ...after.map((q) => q.gap));
  const late = after.filter((q) => Math.abs(q.gap) > SETTLED).at(-1);
  const settled = late !== undefined && late !== after.at(-1);
  return {
    from,
    to,
    overshoot,
    settling: settled ? (late?.t ?? 0) - STEP_AT : null,
    iae: absoluteError(trace),
  };
}

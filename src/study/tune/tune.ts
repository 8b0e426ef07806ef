import { type Forms, forms } from '../../control/forms.ts';
import type { StepTest } from '../../control/identify.ts';
import type { Fopdt } from '../../control/rules.ts';
import { changesOf } from '../../scenario/loop-changes.ts';
import { Refusal } from '../../scenario/refusal.ts';
import type { Change, Scenario } from '../../scenario/scenario.ts';
import { makeSchedule } from '../../solve/schedule.ts';
import { type ControlledPlant, controlled } from '../control/joined.ts';
import type { LoopAtRest } from '../control/settle.ts';
import { rest } from '../run.ts';
import { type Shade, upsetSchedule } from '../upsets.ts';
import { type Ahead, ahead } from './ahead.ts';
import { type BackOff, backOff } from './back-off.ts';
import { byRules, type Candidate, modelFor } from './candidates.ts';
import { type Curve, curveOf, sensitivityCircle } from './curves.ts';
import { gradeOf, type OperatingMap, operatingMap, throughputOf } from './map.ts';
import { type Optimum, optimum } from './optimum.ts';
import { type Point, pointAt } from './point.ts';
import { type Proof, prove, set, stepTrial } from './prove.ts';
import { type Responses, responses } from './responses.ts';
import { stepTests, type Tested, tested } from './step-test.ts';
import type { Ground, Trial } from './trial.ts';

export interface TuneSettings {
  /** Name of the loop; the first one by default. */
  readonly loop?: string;
  /** Largest sensitivity of the own optimum. */
  readonly sensitivity: number;
  /** Half the width of the operating map, as a share. */
  readonly range: number;
  /** A step test made on the real plant. */
  readonly test?: StepTest;
}

export interface Tuned {
  readonly kind: 'tuned';
  readonly joined: ControlledPlant;
  readonly loop: number;
  readonly atRest: LoopAtRest;
  readonly point: Point;
  readonly tests: readonly Tested[];
  readonly real: Tested | null;
  /** What the settings were chosen by: the plant's model of largest gain, and the same with the loop's own delays. */
  readonly chosenBy: Fopdt;
  readonly model: Fopdt;
  readonly candidates: readonly Candidate[];
  readonly optimum: Optimum;
  readonly proofs: readonly Proof[];
  readonly best: Proof & { readonly candidate: Candidate };
  readonly forms: Forms;
  readonly bestStep: Trial | null;
  readonly responses: Responses;
  readonly map: OperatingMap;
  readonly ahead: readonly Ahead[];
  readonly backOff: BackOff | null;
  readonly shades: readonly Shade[];
  readonly sensitivity: number;
  /** Open loops of the best, of what is set, and of SIMC; and the circle of the sensitivity asked for. */
  readonly curves: readonly Curve[];
  readonly circle: readonly { readonly x: number; readonly y: number }[];
}

export interface NotTuned {
  readonly kind: 'unreachable';
  readonly joined: ControlledPlant;
  readonly loop: number;
  readonly atRest: LoopAtRest;
}

export type TuneResult = Tuned | NotTuned;

/** Step tests stay within this share of the set point. */
const BAND = 0.2;
/** Looks at the curves of a trial. */
const LOOKS = 1200;

/**
 * Chooses and proves the settings of a loop.
 *
 * @throws Refusal where there is no such loop, or its action is wrong for the plant.
 */
export function tune(scenario: Scenario, settings: TuneSettings): TuneResult {
  const all = scenario.loops ?? [];
  const loop = settings.loop === undefined ? 0 : all.findIndex((l) => l.name === settings.loop);
  if (all.length === 0)
    throw new Refusal([{ path: [], message: 'there is no loop to tune; state one under loops' }]);
  if (loop < 0)
    throw new Refusal([
      {
        path: ['loops'],
        message: `no loop is called '${settings.loop}'; there are ${all.map((l) => l.name).join(', ')}`,
      },
    ]);
  // Whatever its mode in the scenario, it is tuned in automatic from the steady state at its set point.
  const s: Scenario = {
    ...scenario,
    start: 'steady',
    loops: all.map((l, i) =>
      i === loop
        ? { ...l, controller: { ...l.controller, auto: true }, changes: changesOf(l, 'set point') }
        : l,
    ),
  };
  const made = controlled(s);
  const settled = rest(made);
  const joined: ControlledPlant = { ...made, plant: { ...made.plant, inputs: settled.inputs } };
  const atRest = settled.loops[loop];
  if (atRest.binds !== null) return { kind: 'unreachable', joined, loop, atRest };
  const { plant } = joined;
  const { spec } = joined.loops[loop];
  const upsets = s.upsets.length > 0 ? s.upsets : assumedUpset(joined, loop);
  const disturbed = [...new Set(upsets.map((u) => u.quantity))].filter(
    (q) => q !== plant.system.inputs[spec.inputs.wild]?.path,
  );
  const numbers = disturbed.map((q) => plant.system.inputs.findIndex((i) => i.path === q));
  const point = pointAt(plant, spec, settled.state, settled.inputs, numbers);
  checkAction(scenario, loop, point);
  const { schedule, shades } = upsetSchedule(plant, upsets, s.horizon);
  const ground: Ground = {
    joined,
    loop,
    initial: settled.state,
    schedule,
    limits: s.limits,
    every: s.horizon / LOOKS,
  };
  const calm: Ground = { ...ground, schedule: makeSchedule(plant.inputs, [], 0, s.horizon), limits: [] };
  const tests = stepTests(ground, point.fit, BAND * all[loop].keepAt);
  const real = settings.test ? tested('real', settings.test) : null;
  const chosenBy = steepest([point.fit, ...tests.flatMap((t) => t.fit ?? [])]);
  const model = modelFor(chosenBy, spec);
  const rules = byRules(model, point, spec);
  const own = optimum(ground, model, point, spec, settings.sensitivity);
  const candidates = [...rules, own];
  const proofs = prove(
    ground,
    candidates.filter((c) => !c.reference && c.margins.stable),
  );
  const best = chosen(proofs, settings.sensitivity);
  const range = all[loop].measure.range;
  const spans = range && { measurement: range[1] - range[0], output: spec.move.high - spec.move.low };
  return {
    kind: 'tuned',
    joined,
    loop,
    atRest,
    point,
    tests,
    real,
    chosenBy,
    model,
    candidates,
    optimum: own,
    proofs,
    best,
    forms: forms(best.candidate.settings, spans),
    bestStep: spec.setPoint.times.length === 0 ? null : stepTrial(ground, set(best.candidate)),
    responses: responses(joined, settled.state, settled.inputs, numbers),
    map: operatingMap(joined, loop, best.candidate.settings, settings.range, settled.state),
    ahead: disturbed.flatMap((q, k) => ahead(ground, point, k, q, best.candidate) ?? []),
    backOff: backOff(ground, best.candidate, calm),
    shades,
    sensitivity: settings.sensitivity,
    curves: candidates
      .filter((c) => [best.name, 'as set', 'SIMC'].includes(c.name))
      .sort((a, b) => Number(b.name === best.name) - Number(a.name === best.name))
      .map((c) => curveOf(c, point, spec.settings)),
    circle: sensitivityCircle(settings.sensitivity),
  };
}

/** Where the scenario has no upset, a feed that is a tenth richer from an eighth of the horizon on. */
function assumedUpset(joined: ControlledPlant, loop: number): Change[] {
  const { plant } = joined;
  const grade = gradeOf(joined, loop, throughputOf(joined, loop));
  if (grade < 0) return [];
  const quantity = plant.system.inputs[grade].path;
  return [
    {
      at: plant.scenario.horizon / 8,
      quantity,
      how: { by: 0.1, relative: true },
      over: 0,
      lasts: null,
      words: `${quantity} +10 % (assumed: the scenario has no upset)`,
    },
  ];
}

/** Tuned on the larger gain: up and down steps and the exact response differ. */
const steepest = (list: readonly Fopdt[]): Fopdt =>
  list.reduce((a, b) => (Math.abs(b.gain) > Math.abs(a.gain) ? b : a));

/** Ranked by what happens above the limit, then by IAE, among those that keep to the sensitivity asked for. */
function chosen(proofs: readonly Proof[], most: number): Proof & { candidate: Candidate } {
  const able = proofs.filter((p): p is Proof & { candidate: Candidate } => p.candidate !== null);
  const robust = able.filter((p) => p.candidate.margins.sensitivity <= most * 1.02);
  return (robust.length > 0 ? robust : able)[0];
}

/**
 * Refuses an action that drives the measurement the wrong way, and a plant that answers one way first and another in the
 * end.
 *
 * @throws Refusal
 */
export function checkAction(s: Scenario, loop: number, point: Pick<Point, 'restGain' | 'hourGain'>): void {
  const l = (s.loops ?? [])[loop];
  const { restGain, hourGain } = point;
  const say = (g: number): string => `${g > 0 ? '+' : ''}${g.toPrecision(3)}`;
  if (restGain !== null && Math.sign(restGain) !== Math.sign(hourGain))
    throw new Refusal([
      {
        path: ['loops', l.name, 'move'],
        message: `one hour after a step the gain is ${say(hourGain)}, at rest ${say(restGain)}: of different sign, so no setting serves both; measure elsewhere or move something else`,
      },
    ]);
  const gain = restGain ?? hourGain;
  const right = gain < 0 ? 'direct' : 'reverse';
  if (l.controller.action !== right)
    throw new Refusal([
      {
        path: ['loops', l.name, 'controller', 'action'],
        message: `wrong action: the gain of the plant is ${say(gain)}, so a measurement that rises needs action: ${right}, got '${l.controller.action}'`,
      },
    ]);
}

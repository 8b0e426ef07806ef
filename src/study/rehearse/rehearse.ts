import type { Plant } from '../../plant/assemble.ts';
import { statedChanges } from '../../scenario/loop-changes.ts';
import { Refusal } from '../../scenario/refusal.ts';
import type { Answer } from '../../scenario/rehearsing.ts';
import type { Change, Scenario } from '../../scenario/scenario.ts';
import type { Event } from '../../solve/integrate.ts';
import type { Stop } from '../../solve/outcome.ts';
import { movedFlows } from '../control/moved.ts';
import { type RunSettings, usual } from '../run.ts';
import { type Shade, upsetSchedule } from '../upsets.ts';
import { type Bounds, bounds, longest, type Triggers, type Unaided, unaided } from './bounds.ts';
import { Branches, type Care } from './branches.ts';
import { type RunFigures, runFigures } from './figures.ts';
import { type FrequencyView, frequencyView } from './frequency.ts';
import { type Ground, ground } from './ground.ts';
import { type Judged, judge } from './judge.ts';
import { type Knowledge, knowledge } from './knowledge.ts';
import { type Plan, plan, type Trigger } from './plan.ts';
import { byScore } from './rank.ts';
import { metAt } from './readings.ts';
import { type Shown, shownCourses } from './shown.ts';

/** What stands in the way of an answer that is not as good as it could be. */
export type Binds =
  /** It keeps all limits: what limits it is how late it may come. */
  | 'lateness'
  /** As written it comes too late; begun earlier it would do. */
  | 'too late'
  /** No start is early enough; a larger one would do. */
  | 'size'
  /** Neither an earlier start nor a larger size keeps the limits. */
  | 'neither'
  /** Its condition is never met. */
  | 'never begun';

export interface AnswerResult {
  readonly answer: Answer;
  readonly plan: Plan;
  readonly figures: RunFigures;
  readonly bounds: Bounds | null;
  readonly binds: Binds;
  /** s of the run: the latest start that keeps all limits; null: there is none, or nothing needs one. */
  readonly latest: number | null;
  /** Worst values by limit even when it begins at the earliest; null where some start keeps all. */
  readonly worstAtOnce: readonly number[] | null;
  /** Events that doing nothing does not have. */
  readonly added: readonly Event[];
}

/** Everything that `rehearse` found; reports need nothing else. SI units and s of the run throughout. */
export interface RehearseResult {
  readonly scenario: Scenario;
  readonly plant: Plant;
  readonly ground: Ground;
  readonly shades: readonly Shade[];
  readonly clamped: readonly { readonly quantity: string; readonly time: number }[];
  readonly nothing: RunFigures;
  /** Best first. */
  readonly answers: readonly AnswerResult[];
  /** s to which a factor on the upset's duration refers. */
  readonly duration: number;
  readonly unaided: Unaided;
  readonly knowledge: readonly Knowledge[];
  readonly frequency: FrequencyView | null;
  /** Index of the limit that matters most: the first that doing nothing breaks, else the one nearest to it. */
  readonly chief: number;
  readonly shown: Shown;
  readonly stop: Stop;
  readonly steps: number;
  readonly settings: Pick<RunSettings, 'integrator' | 'tolerance'>;
}

/** Relative tolerance of scans; what decides is settled at that of the runs. */
const SCAN = 3e-3;

/**
 * Runs the upsets of a scenario against doing nothing and against each of its answers; looks for the latest start, the
 * earliest end and the smallest size of each; says who can know in time.
 *
 * @throws Refusal where there is no upset or no limit to rehearse, or as `assemble`; Incomplete where a steady start is
 * asked for and not found.
 */
export function rehearse(
  scenario: Scenario,
  settings: RunSettings = usual,
  progress: (share: number) => void = () => {},
): RehearseResult {
  const missing = [
    ...(statedChanges(scenario).length === 0
      ? [
          {
            path: ['upsets'],
            message: 'a rehearsal needs an upset; state one, such as {at: 1 h, change: feed.flow, by: +10 %}',
          },
        ]
      : []),
    ...(scenario.limits.length === 0
      ? [
          {
            path: ['limits'],
            message:
              'a rehearsal needs a limit to be kept; state one, such as {keep: raffinate.copper, below: 0.6 g/L}',
          },
        ]
      : []),
  ];
  if (missing.length > 0) throw new Refusal(missing);
  const { integrator, tolerance } = settings;
  const sure = { integrator, tolerance };
  const care: Care = { sure, quick: { integrator, tolerance: Math.max(SCAN, tolerance) } };
  const g = ground(scenario, sure);
  const { plant } = g;
  const outputs = followedOutputs(g);
  const quiet = judge(g, [], sure, outputs);
  const nothing = judge(g, g.changes, sure, outputs);
  const figures = runFigures(g, nothing, quiet, nothing);
  const branches = new Branches(g, g.changes, care);
  const trigger = makeTrigger(g, nothing, sure, outputs);
  const triggers = { sure: trigger, quick: makeTrigger(g, nothing, care.quick, outputs) };
  const list = scenario.rehearsing?.answers ?? [];
  const runs: Judged[] = [];
  const results = list.map((answer, i): AnswerResult => {
    const made = plan(answer, g.upsets, g.horizon, trigger);
    const run = judge(g, [...g.changes, ...made.moves], sure, outputs);
    runs.push(run);
    progress((i + 0.3) / (list.length + 1));
    const result = answerResult(g, answer, made, run, { quiet, nothing }, figures, branches, triggers, care);
    progress((i + 1) / (list.length + 1));
    return result;
  });
  const order = results.map((_, i) => i).sort((a, b) => byScore(results[a], results[b]));
  const chief = chiefLimit(figures);
  const instruments = scenario.rehearsing?.instruments ?? [];
  const { shades, clamped } = upsetSchedule(plant, g.changes, g.horizon);
  return {
    scenario: g.scenario,
    plant,
    ground: g,
    shades,
    clamped,
    nothing: figures,
    answers: order.map((i) => results[i]),
    duration: longest(g),
    unaided: unaided(g, !figures.kept, care),
    knowledge: instruments.map((q) => knowledge(plant, q, nothing.courses, g.first)),
    frequency: frequencyView(g, chief),
    chief,
    shown: shownCourses(
      g,
      nothing,
      order.map((i) => ({ name: list[i].name, run: runs[i] })),
    ),
    stop: nothing.stop,
    steps: nothing.steps,
    settings: sure,
  };
}

/** Outputs that figures, readings and pictures need: what limits are on, what is measured, volumes and levels. */
export function followedOutputs({ plant, joined }: Pick<Ground, 'plant' | 'joined'>): number[] {
  const { scenario: s, system } = plant;
  const moved = movedFlows(plant, joined.loops).map((q) => q.output);
  const wanted = new Set([
    ...s.limits.map((l) => `${l.stream}.${l.quantity}`),
    ...(s.rehearsing?.instruments ?? []).map((q) => q.quantity),
    ...(s.rehearsing?.answers ?? []).flatMap((a) =>
      a.steps.flatMap(({ begins }) => ('when' in begins ? [begins.when.quantity] : [])),
    ),
    ...s.tanks.map((t) => `${t.name}.volume`),
  ]);
  const level = /\.settler\.(interface|band)$/;
  return system.outputs.flatMap((o, i) =>
    wanted.has(o.path) || level.test(o.path) || moved.includes(i) ? [i] : [],
  );
}

/** Conditions are looked up in the run with all that was done before; such runs are made once. */
export function makeTrigger(
  g: Ground,
  nothing: Judged,
  sure: Care['sure'],
  outputs: readonly number[],
): Trigger {
  const made = new Map<string, Judged>();
  return (begin, moves: readonly Change[], from) => {
    if (moves.length === 0) return metAt(g.plant, begin, nothing.courses, from);
    const key = JSON.stringify(moves);
    const run = made.get(key) ?? judge(g, [...g.changes, ...moves], sure, outputs);
    made.set(key, run);
    return metAt(g.plant, begin, run.courses, from);
  };
}

function answerResult(
  g: Ground,
  answer: Answer,
  made: Plan,
  run: Judged,
  others: { readonly quiet: Judged; readonly nothing: Judged },
  nothing: RunFigures,
  branches: Branches,
  triggers: Triggers,
  care: Care,
): AnswerResult {
  const figures = runFigures(g, run, others.quiet, others.nothing);
  const begun = made.starts[0];
  const earliest = Math.max(0, Math.min(g.first, begun ?? g.first));
  // Where nothing breaks a limit, no answer can come too late.
  const found = nothing.kept ? null : bounds(g, answer, branches, triggers, earliest, care);
  const latest = found?.starts[0]?.to ?? null;
  const known = new Set(nothing.events.map((e) => e.name));
  let worstAtOnce: number[] | null = null;
  if (found !== null && found.starts.length === 0) {
    const atOnce = plan(answer, g.upsets, g.horizon, triggers.sure, { start: earliest });
    worstAtOnce = judge(g, [...g.changes, ...atOnce.moves], care.sure, []).limits.map((l) => l.worst.value);
  }
  return {
    answer,
    plan: made,
    figures,
    bounds: found,
    binds:
      begun === null
        ? 'never begun'
        : figures.kept
          ? 'lateness'
          : found !== null && found.starts.length > 0
            ? 'too late'
            : found?.sizes?.length
              ? 'size'
              : 'neither',
    latest,
    worstAtOnce,
    added: figures.events.filter((e) => !known.has(e.name)),
  };
}

/** The limit that is broken first, or where none is, the one of which least is left. */
function chiefLimit({ limits }: RunFigures): number {
  const rank = (i: number): number => {
    const l = limits[i];
    if (!l.kept) return -1e6 + (l.breaks?.time ?? 0) / 1e6;
    return Math.abs(l.limit.value - l.worst.value) / l.limit.value;
  };
  return limits.map((_, i) => i).sort((a, b) => rank(a) - rank(b))[0];
}

import { closure } from '../plant/accounts.ts';
import type { Plant } from '../plant/assemble.ts';
import type { Scenario } from '../scenario/scenario.ts';
import {
  integrate,
  integrateInTurns,
  type Options,
  type Problem,
  type Run,
  type Turns,
  type Watcher,
} from '../solve/integrate.ts';
import { type Steady, steadyState } from '../solve/steady.ts';
import type { F } from '../solve/system.ts';
import { type ControlledPlant, controlled, devicesOf } from './control/joined.ts';
import { loopReports } from './control/report.ts';
import { type Settled, settle } from './control/settle.ts';
import { type Derived, derivedFigures } from './derived.ts';
import { diagrams } from './diagram.ts';
import { type LimitReport, LimitWatch } from './limit-watch.ts';
import { Recorder, type Rows } from './records.ts';
import type { RunResult, Snapshot } from './result.ts';
import { restoreModes, restoreState, saveState } from './saved.ts';
import { trainFigures } from './train-figures.ts';
import { upsetSchedule } from './upsets.ts';
import { realised } from './variation.ts';

export interface RunSettings {
  readonly integrator: string;
  /** Relative; the absolute tolerance of a place is this times 1 % of what it typically holds. */
  readonly tolerance: number;
  /** Called with the share of the horizon that has been computed. */
  readonly progress?: (share: number) => void;
  /** s at which the state is kept besides the end; null: at the end. */
  readonly keepAt?: number;
  /** Takes each record as it comes; it is made when the run is about to begin. */
  readonly rows?: (plant: Plant, derived: readonly Derived[]) => Rows;
  /** Others that follow the run. */
  readonly watchers?: readonly Watcher[];
}

export const usual = { integrator: 'rodas5p', tolerance: 1e-6 } as const;

const MOST_STEPS = 20_000_000;
/** First trial step [s]; the error control finds its own from there. */
const FIRST_STEP = 1;

/** What the integrator is told. */
export const optionsOf = (s: Pick<RunSettings, 'integrator' | 'tolerance'>): Options => ({
  integrator: s.integrator,
  tolerance: { relative: s.tolerance },
  maximumSteps: MOST_STEPS,
  firstStep: FIRST_STEP,
});

/** The computation could not even begin, or came to no end; the message says where and why. */
export class Incomplete extends Error {
  override readonly name = 'Incomplete';
}

/** Runs a scenario from its start to its horizon. */
export function run(s: Scenario, settings: RunSettings = usual): RunResult {
  const { problem, options, watchers, finish } = prepare(s, settings);
  return finish(integrate(problem, options, watchers));
}

/** The same in turns, so that it can be interrupted; what was computed until then is kept. */
export async function runInTurns(s: Scenario, settings: RunSettings, turns: Turns): Promise<RunResult> {
  const { problem, options, watchers, finish } = prepare(s, settings);
  return finish(await integrateInTurns(problem, options, watchers, turns));
}

/** Keeps the state at one moment of a run, from the dense output; at the end where the moment is not reached. */
class StateKeeper implements Watcher {
  kept: object | null = null;
  readonly #plant: Plant;
  readonly #at: number;

  constructor(plant: Plant, at: number) {
    this.#plant = plant;
    this.#at = at;
  }

  step: NonNullable<Watcher['step']> = (step, inputs) => {
    if (this.kept !== null || step.t1 < this.#at || this.#at < step.t0) return;
    const x = new Float64Array(this.#plant.system.places.length);
    step.at(this.#at, x);
    this.kept = saveState(this.#plant, x, this.#at, inputs.modes);
  };

  end: NonNullable<Watcher['end']> = (t, x, _, inputs) => {
    this.kept ??= saveState(this.#plant, x, t, inputs.modes);
  };
}

interface Prepared {
  readonly problem: Problem;
  readonly options: Options;
  readonly watchers: readonly Watcher[];
  finish(run: Run): RunResult;
}

function prepare(s: Scenario, settings: RunSettings): Prepared {
  const background = (s.rehearsing?.variations ?? []).map((v) => realised(v, s.horizon));
  const joined = controlled({ ...s, upsets: [...s.upsets, ...background] });
  const { plant, initial, atRest } = begin(joined);
  const { schedule, courses, shades, clamped } = upsetSchedule(plant, s.upsets, s.horizon, background);
  const devices = devicesOf({ ...joined, plant }, atRest);
  const first = s.upsets.length > 0 ? Math.min(...s.upsets.map((u) => u.at)) : null;
  const before = first === null || first <= 0 ? null : Math.min(first, s.horizon);
  const derived = derivedFigures(plant);
  const moments = before === null ? [] : [before];
  const recorder = new Recorder(plant, s.recordEvery, moments, settings.rows?.(plant, derived) ?? null);
  const limits = s.limits.map((l) => new LimitWatch(plant, l));
  const watchers: Watcher[] = [recorder, ...limits];
  const keeper = new StateKeeper(plant, settings.keepAt ?? s.horizon);
  watchers.push(keeper);
  const { progress } = settings;
  if (progress) watchers.push({ step: (step) => progress(step.t1 / s.horizon) });
  watchers.push(...(settings.watchers ?? []));
  return {
    problem: {
      system: plant.system,
      parameters: plant.parameters,
      schedule,
      initial,
      devices,
      ...startModes(plant),
    },
    options: optionsOf(settings),
    watchers,
    finish(result) {
      const reports = limits.map((l) => l.report());
      const snapshots = snapshotsOf(recorder, before, reports, result.time);
      return {
        plant,
        records: recorder.records,
        limits: reports,
        events: result.events,
        shades,
        courses,
        clamped,
        closures: plant.accounts.map((a) => closure(a, initial, result.state)),
        snapshots,
        diagrams: diagrams(plant, snapshots),
        stop: result.stop,
        complete: result.stop.reason === 'reached-end',
        work: result.work,
        integrator: result.integrator,
        tolerance: settings.tolerance,
        kept: keeper.kept,
        derived,
        figures: trainFigures(plant, recorder.records.rows[recorder.records.rows.length - 1]),
        loops: loopReports(joined, devices, result),
      };
    },
  };
}

/** Start, just before the first upset, the worst moment of the limit that matters, and the end. */
function snapshotsOf(
  recorder: Recorder,
  before: number | null,
  reports: readonly LimitReport[],
  end: number,
): Snapshot[] {
  const { times, rows } = recorder.records;
  const snapshots: Snapshot[] = [{ label: 'start', time: times[0], outputs: rows[0] }];
  const shown = before === null ? undefined : recorder.snapshots.get(before);
  if (shown && before !== null) snapshots.push({ label: 'before the upset', time: before, outputs: shown });
  // A product is below its least content in every start-up, which says less than an outlet above its limit.
  const broke = reports.filter((r) => r.spells.length > 0);
  const broken = broke.find((r) => r.limit.side === 'below') ?? broke[0] ?? reports[0];
  if (broken && broken.worst.time > 0 && broken.worst.time < end)
    snapshots.push({ label: 'worst', time: broken.worst.time, outputs: broken.atWorst });
  if (times.length > 1)
    snapshots.push({ label: 'end', time: times[times.length - 1], outputs: rows[rows.length - 1] });
  return snapshots.sort((a, b) => a.time - b.time);
}

/** What guards had set before a kept state. */
export function startModes(plant: Plant): { modes?: ReadonlyMap<number, number> } {
  const { start } = plant.scenario;
  return typeof start === 'object' ? { modes: restoreModes(plant, start) } : {};
}

/**
 * The state at time zero as the scenario asks for it.
 *
 * @throws Incomplete where a steady start was asked for and none was found.
 */
export function startState(plant: Plant): F {
  const { start } = plant.scenario;
  if (typeof start === 'object') return restoreState(plant, start);
  return start === 'steady' ? steadyOf(plant).state : plant.barren;
}

/** @throws Incomplete naming the vessel that does not come to rest. */
export function steadyOf(plant: Plant): Steady & { found: true } {
  const steady = steadyState(plant.system, plant.inputs, plant.parameters, plant.barren);
  if (steady.found) return steady;
  throw new Incomplete(
    `no steady state found: ${steady.reason}, least of all ${steady.place}; run the scenario from barren and look whether it settles`,
  );
}

export interface Begun {
  readonly plant: Plant;
  readonly initial: F;
  /** Whether the loops have come to rest before the run begins. */
  readonly atRest: boolean;
}

/** The plant and its state at time zero; from a steady start the loops in automatic are at their set points. */
export function begin(c: ControlledPlant): Begun {
  if (c.loops.length === 0 || c.plant.scenario.start !== 'steady')
    return { plant: c.plant, initial: startState(c.plant), atRest: false };
  const { inputs, state } = rest(c);
  return { plant: { ...c.plant, inputs }, initial: state, atRest: true };
}

/** @throws Incomplete naming the vessel that does not come to rest. */
export function rest(c: ControlledPlant): Settled {
  if (c.loops.length === 0) return { ...steadyOf(c.plant), inputs: c.plant.inputs, loops: [] };
  const found = settle(c);
  if (found.found) return found;
  throw new Incomplete(
    `no steady state found with the loops: ${found.reason}, least of all ${found.place}; look at the limits of their outputs`,
  );
}

import { explain } from '../solve/outcome.ts';
import { PERCENTS } from '../study/commission/approach.ts';
import { commission } from '../study/commission/commission.ts';
import { run, usual } from '../study/run.ts';
import { steady } from '../study/steady.ts';
import { finder, plain, working } from './inside.ts';
import type { Scenario } from './scenario.ts';
import type { SimulateOptions, Simulation, StartUp, SteadyState } from './types.ts';

/**
 * Runs a scenario from its start to its horizon.
 *
 * @throws ScenarioRefused where the plant cannot be what it says; NotCompleted where it could not even begin.
 */
export function simulate(scenario: Scenario, options: SimulateOptions = {}): Simulation {
  const { tolerance = usual.tolerance, integrator = usual.integrator, progress } = options;
  if (!(tolerance >= 1e-12 && tolerance <= 1e-2))
    throw new RangeError(`tolerance: expected a number from 1e-12 to 1e-2, got ${tolerance}`);
  const r = working(scenario, (s) => run(s, { tolerance, integrator, ...(progress ? { progress } : {}) }));
  const { outputs } = r.plant.system;
  const find = finder(outputs);
  return {
    complete: r.complete,
    ended: explain(r.stop),
    times: r.records.times,
    quantities: plain(outputs),
    values(path) {
      const i = find(path);
      return Float64Array.from(r.records.rows, (row) => row[i]);
    },
    limits: r.limits.map((l) => ({
      keep: l.path,
      side: l.limit.side,
      limit: l.limit.value,
      unit: l.unit,
      kept: l.spells.length === 0,
      outside: l.outside,
      spells: l.spells.map(({ from, to }) => ({ from, to })),
      worst: Number.isNaN(l.worst.value) ? null : { value: l.worst.value, time: l.worst.time },
      beyond: l.beyond,
    })),
    events: r.events.map(({ time, name, message }) => ({ time, name, message })),
    closure: Math.max(...r.closures.map((c) => c.closure)),
  };
}

/**
 * The steady state of the inputs at time zero.
 *
 * @throws ScenarioRefused as `simulate`; NotCompleted where there is none.
 */
export function findSteady(scenario: Scenario): SteadyState {
  const r = working(scenario, steady);
  const { outputs } = r.plant.system;
  const find = finder(outputs);
  return {
    quantities: plain(outputs),
    value: (path) => r.outputs[find(path)],
    trains: r.figures.flatMap((f) =>
      f.solutes.map(({ solute, recovery, transferred, load }) => ({
        train: f.train,
        solute,
        recovery,
        transferred,
        loading: load,
      })),
    ),
    drifts: r.drifts.map(({ tank, rate }) => ({ tank, rate })),
  };
}

/**
 * The start-up alone, with the inputs of time zero: when all comes good, by the plain start and by each procedure.
 *
 * @throws ScenarioRefused and NotCompleted as `simulate`.
 */
export function findStartUp(scenario: Scenario): StartUp {
  const r = working(scenario, (s) => commission(s, usual));
  return {
    atRest: r.steady,
    onSpec: r.onSpec,
    slowest: r.modes.map((m) => m.time),
    quantities: r.quantities
      .filter((q) => q.quantity.kind !== 'stage')
      .map((q) => ({
        path: q.quantity.path,
        start: q.start,
        final: q.final,
        within: PERCENTS.map((percent, i) => ({ percent, time: q.ofChange[i] })),
      })),
    starts: r.starts.map(({ name, steady: atRest, onSpec }) => ({ name, atRest, onSpec })),
  };
}

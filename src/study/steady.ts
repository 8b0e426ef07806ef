import type { Plant } from '../plant/assemble.ts';
import { NEARLY_EMPTY } from '../plant/book.ts';
import type { Scenario } from '../scenario/scenario.ts';
import type { F } from '../solve/system.ts';
import { controlled } from './control/joined.ts';
import { diagrams } from './diagram.ts';
import { outputsAt } from './records.ts';
import type { SteadyResult } from './result.ts';
import { rest } from './run.ts';
import { trainFigures } from './train-figures.ts';

/** Steady state for the inputs at time zero. @throws Incomplete where none is found. */
export function steady(s: Scenario): SteadyResult {
  const joined = controlled(s);
  const found = rest(joined);
  const plant = { ...joined.plant, inputs: found.inputs };
  const outputs = outputsAt(plant, found.state, plant.inputs);
  const change = new Float64Array(found.state.length);
  plant.system.rhs(found.state, plant.inputs, plant.parameters, change);
  return {
    plant,
    outputs,
    iterations: found.iterations,
    residual: found.residual,
    drifts: drifts(plant, found.state, change),
    figures: trainFigures(plant, outputs),
    diagrams: diagrams(plant, [{ label: 'steady state', time: 0, outputs }]),
    usedUp: usedUp(plant, outputs),
    imbalance: imbalance(plant, change),
    loops: found.loops,
  };
}

function usedUp(plant: Plant, y: F): SteadyResult['usedUp'] {
  const { trains, species } = plant.scenario;
  const at = new Map(plant.system.outputs.map((o, i) => [o.path, i]));
  return trains.flatMap((t) =>
    t.stages.flatMap((_, j) =>
      species.flatMap((name) => {
        const i = at.get(`${t.name}.${j + 1}.mixer.aqueous.${name}`) as number;
        const lacks = y[i] < -1e-6 * plant.system.outputs[i].scale;
        return lacks ? [{ stage: `${t.name}.${j + 1}`, species: name }] : [];
      }),
    ),
  );
}

/** Tanks that gain or lose volume while all else is at rest; `until` is s from then. */
export function drifts(plant: Plant, x: F, change: F): SteadyResult['drifts'] {
  return plant.scenario.tanks.flatMap((t) => {
    const at = plant.system.places.findIndex((p) => p.path === `${t.name}.volume`);
    const rate = at < 0 ? 0 : change[at];
    if (Math.abs(rate) < 1e-12 * t.volume) return [];
    const room = rate > 0 ? t.volume - x[at] : x[at] - NEARLY_EMPTY * t.volume;
    return [{ tank: t.name, rate, until: room / Math.abs(rate) }];
  });
}

/** Boundary in − out at steady state, less what drifting tanks and their bottoms gain, relative to what enters. */
function imbalance(plant: Plant, change: F): number {
  const sum = (list: readonly number[]): number => list.reduce((s, i) => s + change[i], 0);
  return Math.max(
    ...plant.accounts
      .filter((a) => a.unit === 'kg')
      .map((a) => {
        const entered = -sum(a.entered);
        const gained = sum(a.held.filter((i) => plant.system.steady[i] !== 'free'));
        return entered > 0 ? Math.abs(entered - sum(a.left) - gained) / entered : 0;
      }),
  );
}

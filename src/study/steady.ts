import { assemble, type Plant } from '../plant/assemble.ts';
import { NEARLY_EMPTY } from '../plant/book.ts';
import type { Scenario } from '../scenario/scenario.ts';
import type { F } from '../solve/system.ts';
import { diagrams } from './diagram.ts';
import { outputsAt } from './records.ts';
import type { Recovery, SteadyResult } from './result.ts';
import { steadyOf } from './run.ts';

/** Steady state for the inputs at time zero. @throws Incomplete where none is found. */
export function steady(s: Scenario): SteadyResult {
  const plant = assemble(s);
  const found = steadyOf(plant);
  const outputs = outputsAt(plant, found.state, plant.inputs);
  const change = new Float64Array(found.state.length);
  plant.system.rhs(found.state, plant.inputs, plant.parameters, change);
  return {
    plant,
    outputs,
    iterations: found.iterations,
    residual: found.residual,
    drifts: drifts(plant, found.state, change),
    recoveries: recoveries(plant, outputs),
    diagrams: diagrams(plant, [{ label: 'steady state', time: 0, outputs }]),
    imbalance: imbalance(plant, change),
  };
}

function drifts(plant: Plant, x: F, change: F): SteadyResult['drifts'] {
  return plant.scenario.tanks.flatMap((t) => {
    const at = plant.system.places.findIndex((p) => p.path === `${t.name}.volume`);
    const rate = at < 0 ? 0 : change[at];
    if (Math.abs(rate) < 1e-12 * t.volume) return [];
    const room = rate > 0 ? t.volume - x[at] : x[at] - NEARLY_EMPTY * t.volume;
    return [{ tank: t.name, rate, until: room / Math.abs(rate) }];
  });
}

function recoveries(plant: Plant, y: F): Recovery[] {
  const { scenario: s, system } = plant;
  const read = (path: string): number => y[system.outputs.findIndex((o) => o.path === path)];
  return s.trains.flatMap((t) =>
    s.solutes.flatMap((solute, i): Recovery[] => {
      if (!t.equilibrium[i]) return [];
      const rate = (stream: string): number => read(`${stream}.flow`) * read(`${stream}.${solute}`);
      const transferred = rate(t.organic.to) - rate(t.organic.from);
      const offered = transferred >= 0 ? rate(t.aqueous.from) : rate(t.organic.from);
      return [
        { train: t.name, solute, transferred, share: offered > 0 ? Math.abs(transferred) / offered : 0 },
      ];
    }),
  );
}

/** Boundary in − out at steady state, relative to what enters: it vanishes but for tanks that drift. */
function imbalance(plant: Plant, change: F): number {
  const sum = (list: readonly number[]): number => list.reduce((s, i) => s + change[i], 0);
  return Math.max(
    ...plant.accounts
      .filter((a) => a.unit === 'kg')
      .map((a) => {
        const entered = -sum(a.entered);
        return entered > 0 ? Math.abs(entered - sum(a.left)) / entered : 0;
      }),
  );
}

import type { Plant } from '../../plant/assemble.ts';
import { equilibriumAt } from '../../plant/isotherm.ts';
import type { Scenario } from '../../scenario/scenario.ts';
import type { F } from '../../solve/system.ts';
import { controlled } from '../control/joined.ts';
import type { Settled } from '../control/settle.ts';
import { outputsAt } from '../records.ts';
import { Incomplete, rest } from '../run.ts';
import { restoreState } from '../saved.ts';
import { drifts } from '../steady.ts';
import { type TrainFigures, trainFigures } from '../train-figures.ts';
import { type LoopSense, loopSenses } from './loop-sense.ts';
import { type Suspicious, suspicious } from './suspicious.ts';

/** The plant as understood, with what it comes to at the inputs of time zero. SI. */
export interface Checked {
  readonly plant: Plant;
  /** Why there is no steady state; null: there is one. */
  readonly restless: string | null;
  readonly figures: readonly TrainFigures[];
  readonly factors: readonly Factors[];
  /** Value of each limited quantity at rest, in the order of the limits; null: not known. */
  readonly limited: readonly (number | null)[];
  readonly drifts: readonly { readonly tank: string; readonly rate: number; readonly until: number }[];
  readonly loops: readonly LoopSense[];
  readonly suspicious: readonly Suspicious[];
}

/** Slope of the equilibrium by slope of the operating line, stage by stage. */
export interface Factors {
  readonly train: string;
  readonly solute: string;
  /** D·O/A where the organic takes up, A/(D·O) where it gives; null where the aqueous holds none. */
  readonly stages: readonly (number | null)[];
  readonly extracts: boolean;
}

/**
 * Assembles the plant and looks at it at rest.
 *
 * @throws Refusal as `assemble` does.
 */
export function check(s: Scenario): Checked {
  const joined = controlled(s);
  const { plant } = joined;
  if (typeof s.start === 'object') restoreState(plant, s.start);
  const found = settled(() => rest(joined));
  if ('why' in found)
    return {
      plant,
      restless: found.why,
      figures: [],
      factors: [],
      limited: s.limits.map(() => null),
      drifts: [],
      loops: [],
      suspicious: suspicious(plant, null),
    };
  const atRest = { ...plant, inputs: found.inputs };
  const y = outputsAt(atRest, found.state, found.inputs);
  const change = new Float64Array(found.state.length);
  plant.system.rhs(found.state, found.inputs, plant.parameters, change);
  const figures = trainFigures(atRest, y);
  return {
    plant,
    restless: null,
    figures,
    factors: factors(atRest, figures, y),
    limited: s.limits.map((l) => {
      const i = plant.system.outputs.findIndex((o) => o.path === `${l.stream}.${l.quantity}`);
      return i < 0 || !Number.isFinite(y[i]) ? null : y[i];
    }),
    drifts: drifts(plant, found.state, change),
    loops: loopSenses(s, found),
    suspicious: suspicious(plant, figures),
  };
}

function settled(find: () => Settled): Settled | { readonly why: string } {
  try {
    return find();
  } catch (e) {
    if (e instanceof Incomplete) return { why: e.message };
    throw e;
  }
}

/** Extraction factors at the equilibrium of each mixer's own aqueous, with the flows of its stage. */
function factors(plant: Plant, figures: readonly TrainFigures[], y: F): Factors[] {
  const { solutes, species, trains } = plant.scenario;
  const at = new Map(plant.system.outputs.map((o, i) => [o.path, i]));
  const read = (path: string): number => y[at.get(path) ?? -1] ?? 0;
  return trains.flatMap((t, i) =>
    figures[i].solutes.map(({ solute, transferred }): Factors => {
      const k = solutes.indexOf(solute);
      const star = equilibriumAt(plant, t, k, 'organic');
      const extracts = transferred >= 0;
      return {
        train: t.name,
        solute,
        extracts,
        stages: t.stages.map((_, j) => {
          const mixer = `${t.name}.${j + 1}.mixer`;
          const aqueous = [...solutes, ...species].map((n) => read(`${mixer}.aqueous.${n}`));
          const { set } = plant.designs[i].stages[j];
          const organic = solutes.map((n) => read(`${mixer}.organic.${n}`));
          const factor = (star(aqueous, organic) / aqueous[k]) * (set.organic / set.aqueous);
          return Number.isFinite(factor) && factor > 0 ? (extracts ? factor : 1 / factor) : null;
        }),
      };
    }),
  );
}

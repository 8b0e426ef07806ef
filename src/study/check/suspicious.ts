import type { Plant } from '../../plant/assemble.ts';
import { bandThickness } from '../../plant/facts.ts';
import type { Stage, Train } from '../../scenario/scenario.ts';
import type { TrainFigures } from '../train-figures.ts';
import { type UsualName, usual } from './usual.ts';

/** A figure that most plants do not have. */
export interface Suspicious {
  readonly what: UsualName;
  readonly train: string;
  /** Stages that have it, from 1; of `of` stages in all. */
  readonly stages: readonly number[];
  readonly of: number;
  /** The one farthest out, SI. */
  readonly value: number;
  readonly low: number;
  readonly high: number;
  readonly tooHigh: boolean;
  /** Solute that it is of, where there are several. */
  readonly solute: string | null;
}

/** One figure of every stage; null: there is none. */
type Figures = readonly (number | null)[];

/** Figures of the design, and with `rest` those at the steady state, that lie outside of what is usual. */
export function suspicious(plant: Plant, rest: readonly TrainFigures[] | null): Suspicious[] {
  return plant.scenario.trains.flatMap((t, i) => {
    const found = (what: UsualName, values: Figures, solute: string | null = null): Suspicious[] =>
      outside(t, what, values, solute);
    const settles = t.stages.map((q) => q.settler.parts > 0);
    const design = plant.designs[i].stages;
    const both = design.map((d) => d.entering.aqueous + d.entering.organic);
    const settled = (value: (q: Stage, j: number) => number | null): Figures =>
      t.stages.map((q, j) => (settles[j] ? value(q, j) : null));
    const thickness = t.stages.map((q, j) => bandThickness(q, design[j]));
    const single = plant.scenario.solutes.length === 1;
    return [
      ...found(
        'mixerTime',
        settled((q, j) => q.mixer.volume / both[j]),
      ),
      ...found(
        'mixerRatio',
        settled((_, j) => design[j].entering.organic / design[j].entering.aqueous),
      ),
      ...found(
        'settlerLoad',
        settled((q, j) => (q.settler.area === null ? null : both[j] / q.settler.area)),
      ),
      ...found('band', thickness),
      ...found(
        'bandShare',
        settled(({ mixer, settler }, j) => {
          const thick = thickness[j];
          const depth = settler[mixer.continuity] / (settler.area ?? Number.NaN);
          return thick === null ? null : thick / depth;
        }),
      ),
      ...found(
        'tipSpeed',
        t.stages.map(({ mixer: { transfer } }) =>
          transfer.given === 'impeller'
            ? Math.PI * transfer.impeller.speed * transfer.impeller.diameter
            : null,
        ),
      ),
      ...(rest?.[i].solutes ?? []).flatMap((q) => [
        ...found('efficiency', q.efficiency.map(meaningful), single ? null : q.solute),
        ...found('load', [q.load], single ? null : q.solute),
      ]),
    ];
  });
}

/** An efficiency outside of 0 to 1 says that next to nothing is to be done in that stage. */
const meaningful = (e: number | null): number | null => (e !== null && e > 0 && e < 1 ? e : null);

function outside(t: Train, what: UsualName, values: Figures, solute: string | null): Suspicious[] {
  const { low, high } = usual[what];
  const out = values.flatMap((value, j) =>
    value !== null && (value < low || value > high) ? [{ value, stage: j + 1 }] : [],
  );
  return [false, true].flatMap((tooHigh): Suspicious[] => {
    const own = out.filter((q) => q.value > high === tooHigh);
    if (own.length === 0) return [];
    const sorted = own.map((q) => q.value).sort((a, b) => a - b);
    const value = tooHigh ? sorted[sorted.length - 1] : sorted[0];
    // A loading belongs to the train, not to its first stage.
    const of = values.length < t.stages.length ? 1 : t.stages.length;
    return [{ what, train: t.name, stages: own.map((q) => q.stage), of, value, low, high, tooHigh, solute }];
  });
}

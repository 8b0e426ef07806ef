import { usualInversion } from '../scenario/plain.ts';
import type { Phase } from '../scenario/scenario.ts';
import type { Plant } from './assemble.ts';
import { recycled } from './design.ts';

/** What a train looks like at its design flows; SI. Ranges over its stages where they differ: [least, most]. */
export interface TrainFacts {
  readonly train: string;
  readonly stages: number;
  readonly aqueous: number;
  readonly organic: number;
  readonly ratio: number;
  readonly mixerResidence: readonly [number, number];
  /** Total flow, recycle included, per settler area, m³/(m²·s); null where no area is given. */
  readonly specificFlow: readonly [number, number] | null;
  /** m³ of each phase in all mixers and settlers. */
  readonly held: { readonly aqueous: number; readonly organic: number };
}

export function trainFacts(plant: Plant): TrainFacts[] {
  const { scenario: s, network } = plant;
  const flowOf = (stream: string): number => {
    const source = network.flowSource(stream);
    return source.kind === 'feed' ? s.feeds[source.index].flow : (s.tanks[source.index].flow as number);
  };
  return s.trains.map((t) => {
    const aqueous = flowOf(t.aqueous.from);
    const organic = flowOf(t.organic.from);
    const back = recycled(t, { aqueous, organic });
    const both = aqueous + organic + back.aqueous + back.organic;
    const range = (list: number[]): [number, number] => [Math.min(...list), Math.max(...list)];
    const areas = t.stages.flatMap((q) => (q.settler.area === null ? [] : [q.settler.area]));
    const share = (organic + back.organic) / both;
    const sum = (f: (i: number) => number): number => t.stages.reduce((n, _, i) => n + f(i), 0);
    return {
      train: t.name,
      stages: t.stages.length,
      aqueous,
      organic,
      ratio: organic / aqueous,
      mixerResidence: range(t.stages.map((q) => q.mixer.volume / both)),
      specificFlow: areas.length === t.stages.length ? range(areas.map((a) => both / a)) : null,
      held: {
        aqueous: sum((i) => t.stages[i].mixer.volume * (1 - share) + t.stages[i].settler.aqueous),
        organic: sum((i) => t.stages[i].mixer.volume * share + t.stages[i].settler.organic),
      },
    };
  });
}

/** Mixers without inversion of their own whose continuous phase is, at design, less than the usual limits ask for. */
export function thinMixers(plant: Plant): { stage: string; continuity: Phase; share: number }[] {
  return plant.scenario.trains.flatMap((t, i) =>
    t.stages.flatMap(({ mixer }, j) => {
      const { continuity } = mixer;
      const share = plant.designs[i].stages[j].mixer[continuity] / mixer.volume;
      if (mixer.inversion !== null || share >= usualInversion.low) return [];
      return [{ stage: `${t.name}.${j + 1}`, continuity, share }];
    }),
  );
}

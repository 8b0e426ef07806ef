import { usualInversion } from '../scenario/plain.ts';
import type { Phase, Stage } from '../scenario/scenario.ts';
import type { Plant } from './assemble.ts';
import { type StageDesign, setFlows } from './design.ts';
import { otherPhase } from './flow.ts';

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
  /** m of dispersion band at these flows; null where no stage has one. */
  readonly band: readonly [number, number] | null;
  /** m³ of each phase in all mixers and settlers. */
  readonly held: { readonly aqueous: number; readonly organic: number };
}

export function trainFacts(plant: Plant): TrainFacts[] {
  const { scenario: s, network } = plant;
  const set = setFlows(s, network);
  return s.trains.map((t, i) => {
    const { stages } = plant.designs[i];
    const enters = (phase: Phase): number =>
      [t[phase].from, ...t.stages.flatMap((_, j) => network.sides(i, j, phase))].reduce(
        (n, q) => n + set.stream(q).flow,
        0,
      );
    const aqueous = enters('aqueous');
    const organic = enters('organic');
    const both = stages.map((d) => d.set.aqueous + d.set.organic + d.recycled.aqueous + d.recycled.organic);
    const range = (list: number[]): [number, number] => [Math.min(...list), Math.max(...list)];
    const loads = t.stages.flatMap((q, j) => (q.settler.area === null ? [] : [both[j] / q.settler.area]));
    const bands = t.stages.flatMap((q, j) => bandThickness(q, stages[j]) ?? []);
    const held = (phase: Phase): number =>
      t.stages.reduce((n, q, j) => n + stages[j].mixer[phase] + q.settler[phase], 0);
    return {
      train: t.name,
      stages: t.stages.length,
      aqueous,
      organic,
      ratio: organic / aqueous,
      mixerResidence: range(t.stages.map((q, j) => q.mixer.volume / both[j])),
      specificFlow: loads.length === t.stages.length ? range(loads) : null,
      band: bands.length > 0 ? range(bands) : null,
      held: { aqueous: held('aqueous'), organic: held('organic') },
    };
  });
}

/** m of the dispersion band of a stage at rest under the design flows; null without a band. */
export function bandThickness({ mixer, settler: { band, area } }: Stage, d: StageDesign): number | null {
  if (band === null || area === null) return null;
  return d.band[otherPhase(mixer.continuity)] / (area * band.holdUp);
}

/** Flow of every stream as feeds and pumps set it, m³/s. */
export function streamFlows({ scenario, network }: Plant): Map<string, number> {
  const set = setFlows(scenario, network);
  return new Map([...network.streams.keys()].map((name) => [name, set.stream(name).flow]));
}

/** Trains in which no solute has an equilibrium: nothing transfers there. */
export const idleTrains = ({ scenario: s }: Plant): string[] =>
  s.trains.filter((t) => t.equilibrium.every((law) => law === null)).map((t) => t.name);

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

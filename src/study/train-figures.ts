import type { Plant } from '../plant/assemble.ts';
import { equilibriumAt } from '../plant/isotherm.ts';
import type { Law, Train } from '../scenario/scenario.ts';
import type { F } from '../solve/system.ts';

/** What people look for in a train at one moment, SI. */
export interface TrainFigures {
  readonly train: string;
  /** Organic to aqueous, as they pass through. */
  readonly advance: number;
  /** m³/s of organic that leaves with the aqueous outlet, and per m³/s of it. */
  readonly solventLost: number;
  readonly specificLoss: number;
  readonly stages: readonly StageFigures[];
  readonly solutes: readonly SoluteFigures[];
}

export interface StageFigures {
  /** Organic to aqueous in the mixer, recycle and carry-over included. */
  readonly mixerRatio: number;
  /** s: mixer and layers, by phase. */
  readonly mixerResidence: number;
  readonly aqueousHeld: number;
  readonly organicHeld: number;
  /** m³/(m²·s) of all that enters the settler; null without an area. */
  readonly settlerLoad: number | null;
}

export interface SoluteFigures {
  readonly solute: string;
  /** kg/s from the aqueous to the organic, negative where it is stripped. */
  readonly transferred: number;
  /** Share of what enters with the phase that gives. */
  readonly recovery: number;
  /** kg/m³, loaded less lean organic. */
  readonly netTransfer: number;
  /** Share of what the organic can hold; null where the law has no ceiling. */
  readonly load: number | null;
  /** Murphree efficiency of the aqueous, stage by stage: (c_in − c)/(c_in − c*); null where there is nothing to do. */
  readonly efficiency: readonly (number | null)[];
}

/** Figures of all trains from a row of outputs. */
export function trainFigures(plant: Plant, y: F): TrainFigures[] {
  const at = new Map(plant.system.outputs.map((o, i) => [o.path, i]));
  const read = (path: string): number => y[at.get(path) ?? -1] ?? 0;
  return plant.scenario.trains.map((t, i): TrainFigures => {
    const flow = (name: string): number => read(`${name}.flow`);
    const solventLost = read(`${t.aqueous.to}.carried organic`);
    const out = flow(t.aqueous.to);
    return {
      train: t.name,
      advance: flow(t.organic.from) / flow(t.aqueous.from),
      solventLost,
      specificLoss: out > 0 ? solventLost / out : 0,
      stages: t.stages.map((_, j) => stageFigures(plant, i, j, read)),
      solutes: plant.scenario.solutes.flatMap((solute, k) => {
        const law = t.equilibrium[k];
        return law ? [soluteFigures(plant, t, k, solute, law, read)] : [];
      }),
    };
  });
}

type Read = (path: string) => number;

function stageFigures(plant: Plant, train: number, j: number, read: Read): StageFigures {
  const t = plant.scenario.trains[train];
  const { mixer, settler } = t.stages[j];
  const d = plant.designs[train].stages[j];
  const share =
    read(`${t.name}.${j + 1}.mixer.organic_share`) || d.mixer.organic / (d.mixer.organic + d.mixer.aqueous);
  const entering = d.entering.aqueous + d.entering.organic;
  return {
    mixerRatio: share / (1 - share),
    mixerResidence: mixer.volume / entering,
    aqueousHeld: (d.mixer.aqueous + d.band.aqueous + d.layer.aqueous) / d.entering.aqueous,
    organicHeld: (d.mixer.organic + d.band.organic + d.layer.organic) / d.entering.organic,
    settlerLoad: settler.area === null ? null : entering / settler.area,
  };
}

function soluteFigures(
  plant: Plant,
  t: Train,
  k: number,
  solute: string,
  law: Law,
  read: Read,
): SoluteFigures {
  const rate = (name: string): number => read(`${name}.flow`) * read(`${name}.${solute}`);
  const transferred = rate(t.organic.to) - rate(t.organic.from);
  const offered = transferred >= 0 ? rate(t.aqueous.from) : rate(t.organic.from);
  const loaded = read(`${t.organic.to}.${solute}`);
  const ceiling =
    law.law === 'langmuir' ? law.capacity : law.law === 'exchange' ? law.extractant / law.perSolute : null;
  const star = equilibriumAt(plant, t, k, 'aqueous');
  const { solutes, species } = plant.scenario;
  return {
    solute,
    transferred,
    recovery: offered > 0 ? Math.abs(transferred) / offered : 0,
    netTransfer: loaded - read(`${t.organic.from}.${solute}`),
    load: ceiling === null ? null : loaded / ceiling,
    efficiency: t.stages.map((_, j) => {
      const mixer = `${t.name}.${j + 1}.mixer`;
      const aqueous = [...solutes, ...species].map((n) => read(`${mixer}.aqueous.${n}`));
      const organic = solutes.map((n) => read(`${mixer}.organic.${n}`));
      const before =
        j === 0 ? read(`${t.aqueous.from}.${solute}`) : read(`${t.name}.${j}.settler.aqueous.${solute}`);
      const possible = before - star(aqueous, organic);
      return Math.abs(possible) > 1e-9 * Math.max(before, 1e-9) ? (before - aqueous[k]) / possible : null;
    }),
  };
}

import type { Plant } from '../plant/assemble.ts';
import { recycled } from '../plant/design.ts';
import { forBoth } from '../plant/flow.ts';
import { equilibriumAt } from '../plant/isotherm.ts';
import type { Law, Phase } from '../scenario/scenario.ts';
import type { F } from '../solve/system.ts';
import { loadOf, type Separation, separation } from './separation.ts';
import { StageInlets } from './stage-inlets.ts';
import { trainStreams } from './train-streams.ts';

/** What people look for in a train at one moment, SI. */
export interface TrainFigures {
  readonly train: string;
  /** Organic to aqueous, as they pass through. */
  readonly advance: number;
  /** m³/s of organic that leaves with the aqueous outlet, and per m³/s of it. */
  readonly solventLost: number;
  readonly specificLoss: number;
  /** s: all that the train holds of a phase, by what enters it of that phase; null while nothing flows. */
  readonly held: Readonly<Record<Phase, number | null>>;
  readonly stages: readonly StageFigures[];
  readonly solutes: readonly SoluteFigures[];
  /** The side that the efficiencies are of; null where the stages differ. */
  readonly side: Phase | null;
  /** How its solutes are told apart; null where fewer than two transfer. */
  readonly separation: Separation | null;
}

export interface StageFigures {
  /** Organic to aqueous in the mixer, recycle and carry-over included. */
  readonly mixerRatio: number | null;
  /** s: mixer and layers, by phase. Null while nothing flows. */
  readonly mixerResidence: number | null;
  readonly aqueousHeld: number | null;
  readonly organicHeld: number | null;
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
  /**
   * Murphree efficiency stage by stage, on the side that its mixer is stated for: (c_in − c)/(c_in − c*); null where
   * there is nothing to do.
   */
  readonly efficiency: readonly (number | null)[];
}

/** Figures of all trains from a row of outputs. */
export function trainFigures(plant: Plant, y: F): TrainFigures[] {
  const at = new Map(plant.system.outputs.map((o, i) => [o.path, i]));
  const known = (path: string): number | undefined => y[at.get(path) ?? -1];
  const read = (path: string): number => known(path) ?? 0;
  const now = new StageInlets(plant, read);
  return plant.scenario.trains.map((t, i): TrainFigures => {
    const flow = (name: string): number => read(`${name}.flow`);
    const solventLost = read(`${t.aqueous.to}.carried organic`);
    const out = flow(t.aqueous.to);
    return {
      train: t.name,
      advance: flow(t.organic.from) / flow(t.aqueous.from),
      solventLost,
      specificLoss: out > 0 ? solventLost / out : 0,
      held: forBoth((phase) => {
        const volume = t.stages.reduce((n, _, j) => n + heldIn(plant, i, j, known)[phase], 0);
        return finite(volume / trainStreams(t, i, plant.network, phase).in.reduce((n, q) => n + flow(q), 0));
      }),
      stages: t.stages.map((_, j) => stageFigures(plant, i, j, now, known)),
      solutes: t.equilibrium.flatMap((law, k) => (law ? [soluteFigures(plant, i, k, law, now, read)] : [])),
      side: t.stages.every((q) => q.mixer.side === t.stages[0].mixer.side) ? t.stages[0].mixer.side : null,
      separation: separation(plant, t, read),
    };
  });
}

const finite = (v: number): number | null => (Number.isFinite(v) ? v : null);

type Read = (path: string) => number;

function stageFigures(
  plant: Plant,
  train: number,
  j: number,
  now: StageInlets,
  read: (path: string) => number | undefined,
): StageFigures {
  const t = plant.scenario.trains[train];
  const { mixer, settler } = t.stages[j];
  const d = plant.designs[train].stages[j];
  const share = shareIn(plant, train, j, read);
  const through = forBoth((phase) => now.flows.stage(train, phase, j).enters);
  const back = recycled(t, through);
  // What neighbours carry over and send back goes with the flow, as at design.
  const entering = forBoth((phase) => {
    const beside = d.set[phase] > 0 ? (d.entering[phase] - d.recycled[phase]) / d.set[phase] : 1;
    return Math.max(0, through[phase] * beside + back[phase]);
  });
  const held = heldIn(plant, train, j, read);
  const both = entering.aqueous + entering.organic;
  return {
    mixerRatio: finite(share / (1 - share)),
    mixerResidence: finite(mixer.volume / both),
    aqueousHeld: finite(held.aqueous / entering.aqueous),
    organicHeld: finite(held.organic / entering.organic),
    settlerLoad: settler.area === null ? null : both / settler.area,
  };
}

type Known = (path: string) => number | undefined;

/** Organic share of a mixer as it is, or at design where it does not move. */
function shareIn(plant: Plant, train: number, j: number, read: Known): number {
  const t = plant.scenario.trains[train];
  const d = plant.designs[train].stages[j];
  return read(`${t.name}.${j + 1}.mixer.organic_share`) ?? d.mixer.organic / t.stages[j].mixer.volume;
}

/** m³ that a stage holds of each phase. */
function heldIn(plant: Plant, train: number, j: number, read: Known): Readonly<Record<Phase, number>> {
  const t = plant.scenario.trains[train];
  const { mixer, settler } = t.stages[j];
  const d = plant.designs[train].stages[j];
  const share = shareIn(plant, train, j, read);
  return forBoth((phase) => {
    const depth = read(`${t.name}.${j + 1}.settler.${phase}_depth`);
    if (depth === undefined || settler.area === null) return d.mixer[phase] + d.band[phase] + d.layer[phase];
    return mixer.volume * (phase === 'organic' ? share : 1 - share) + d.band[phase] + depth * settler.area;
  });
}

function soluteFigures(
  plant: Plant,
  train: number,
  k: number,
  law: Law,
  now: StageInlets,
  read: Read,
): SoluteFigures {
  const t = plant.scenario.trains[train];
  const solute = plant.scenario.solutes[k];
  const rate = (names: readonly string[]): number =>
    names.reduce((n, name) => n + read(`${name}.flow`) * read(`${name}.${solute}`), 0);
  const organic = trainStreams(t, train, plant.network, 'organic');
  const transferred = rate(organic.out) - rate(organic.in);
  const offered =
    transferred >= 0 ? rate(trainStreams(t, train, plant.network, 'aqueous').in) : rate(organic.in);
  const loaded = read(`${t.organic.to}.${solute}`);
  const star = forBoth((phase) => equilibriumAt(plant, t, k, phase));
  const { solutes, species } = plant.scenario;
  return {
    solute,
    transferred,
    recovery: offered > 0 ? Math.abs(transferred) / offered : 0,
    netTransfer: loaded - read(`${t.organic.from}.${solute}`),
    load: loadOf(law, loaded),
    efficiency: t.stages.map(({ mixer: { side } }, j) => {
      const mixer = `${t.name}.${j + 1}.mixer`;
      const aqueous = [...solutes, ...species].map((n) => read(`${mixer}.aqueous.${n}`));
      const organic = solutes.map((n) => read(`${mixer}.organic.${n}`));
      const before = now.content(train, side, j, solute);
      const possible = before - star[side](aqueous, organic);
      const after = (side === 'aqueous' ? aqueous : organic)[k];
      return Math.abs(possible) > 1e-9 * Math.max(before, 1e-9) ? (before - after) / possible : null;
    }),
  };
}

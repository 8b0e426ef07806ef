import { numbers } from '../plant/algebra.ts';
import type { Plant } from '../plant/assemble.ts';
import { recycled } from '../plant/design.ts';
import { forBoth } from '../plant/flow.ts';
import { Flows } from '../plant/flows.ts';
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
  /** Murphree efficiency of the aqueous, stage by stage: (c_in − c)/(c_in − c*); null where there is nothing to do. */
  readonly efficiency: readonly (number | null)[];
}

/** Figures of all trains from a row of outputs. */
export function trainFigures(plant: Plant, y: F): TrainFigures[] {
  const at = new Map(plant.system.outputs.map((o, i) => [o.path, i]));
  const known = (path: string): number | undefined => y[at.get(path) ?? -1];
  const read = (path: string): number => known(path) ?? 0;
  const now = flowsNow(plant, read);
  return plant.scenario.trains.map((t, i): TrainFigures => {
    const flow = (name: string): number => read(`${name}.flow`);
    const solventLost = read(`${t.aqueous.to}.carried organic`);
    const out = flow(t.aqueous.to);
    return {
      train: t.name,
      advance: flow(t.organic.from) / flow(t.aqueous.from),
      solventLost,
      specificLoss: out > 0 ? solventLost / out : 0,
      stages: t.stages.map((_, j) => stageFigures(plant, i, j, now, known)),
      solutes: plant.scenario.solutes.flatMap((solute, k) => {
        const law = t.equilibrium[k];
        return law ? [soluteFigures(plant, t, k, solute, law, read)] : [];
      }),
    };
  });
}

const finite = (v: number): number | null => (Number.isFinite(v) ? v : null);

type Read = (path: string) => number;

/** Flows as feeds, pumps and branches set them at the moment of a row of outputs. */
function flowsNow({ scenario: s, network }: Plant, read: Read): Flows<number> {
  const flows: Flows<number> = new Flows(s, network, {
    ...numbers,
    origin: (m) => read(`${m.kind === 'feed' ? s.feeds[m.index].name : s.tanks[m.index].to}.flow`),
    take: (b, whole) => Math.min(whole, read(`${b.name}.flow`)),
    rest: (whole, takes) => whole - numbers.add(...takes),
  });
  return flows;
}

function stageFigures(
  plant: Plant,
  train: number,
  j: number,
  now: Flows<number>,
  read: (path: string) => number | undefined,
): StageFigures {
  const t = plant.scenario.trains[train];
  const { mixer, settler } = t.stages[j];
  const d = plant.designs[train].stages[j];
  const path = `${t.name}.${j + 1}`;
  const share = read(`${path}.mixer.organic_share`) ?? d.mixer.organic / mixer.volume;
  const through = forBoth((phase) => now.stage(train, phase, j).enters);
  const back = recycled(t, through);
  // What neighbours carry over and send back goes with the flow, as at design.
  const entering = forBoth((phase) => {
    const beside = d.set[phase] > 0 ? (d.entering[phase] - d.recycled[phase]) / d.set[phase] : 1;
    return Math.max(0, through[phase] * beside + back[phase]);
  });
  const held = forBoth((phase) => {
    const depth = read(`${path}.settler.${phase}_depth`);
    if (depth === undefined || settler.area === null) return d.mixer[phase] + d.band[phase] + d.layer[phase];
    return mixer.volume * (phase === 'organic' ? share : 1 - share) + d.band[phase] + depth * settler.area;
  });
  const both = entering.aqueous + entering.organic;
  return {
    mixerRatio: finite(share / (1 - share)),
    mixerResidence: finite(mixer.volume / both),
    aqueousHeld: finite(held.aqueous / entering.aqueous),
    organicHeld: finite(held.organic / entering.organic),
    settlerLoad: settler.area === null ? null : both / settler.area,
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

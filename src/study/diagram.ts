import type { Plant } from '../plant/assemble.ts';
import { otherPhase } from '../plant/flow.ts';
import { equilibriumAt, isotherm } from '../plant/isotherm.ts';
import { route } from '../plant/route.ts';
import type { Scenario, Train } from '../scenario/scenario.ts';
import type { F } from '../solve/system.ts';
import type { Snapshot } from './result.ts';

/** Operating diagram of one solute in one train; kg/m³. */
export interface Diagram {
  readonly train: string;
  readonly solute: string;
  /** Whether other solutes shape the curve: then it runs from stage to stage, and need not begin at zero. */
  readonly competing: boolean;
  /** What the isotherm is drawn along, in words. */
  readonly along: string;
  readonly moments: readonly Moment[];
}

export interface Moment {
  readonly label: string;
  readonly time: number;
  /** Equilibrium curve: organic over aqueous. */
  readonly isotherm: readonly Point[];
  /** Streams that pass between the stages, from the feed end to the raffinate end: (aqueous, organic). */
  readonly operating: readonly Point[];
  /** Mixer of each stage: (aqueous, organic). */
  readonly stages: readonly Point[];
}

export interface Point {
  readonly x: number;
  readonly y: number;
}

/** Points of a curve, closer together near zero, where isotherms are steep. */
const POINTS = 80;

/** Diagrams of every train and solute that transfers there, at the moments given. */
export function diagrams(plant: Plant, snapshots: readonly Snapshot[]): Diagram[] {
  const { scenario: s, system } = plant;
  const at = new Map(system.outputs.map((o, i) => [o.path, i]));
  const read = (y: F, path: string): number => y[at.get(path) as number];
  return s.trains.flatMap((t) =>
    s.solutes.flatMap((solute, i): Diagram[] => {
      const law = t.equilibrium[i];
      if (!law) return [];
      const moments = snapshots.map(({ label, time, outputs: y }): Moment => {
        const vessel = (j: number, unit: string, phase: string): number =>
          read(y, `${t.name}.${j}.${unit}.${phase}.${solute}`);
        const feed = read(y, `${t.aqueous.from}.${solute}`);
        const solvent = read(y, `${t.organic.from}.${solute}`);
        const leaving = (j: number): Point => ({
          x: vessel(j + 1, 'settler', 'aqueous'),
          y: vessel(j + 1, 'settler', 'organic'),
        });
        const operating = operatingLine(
          t,
          { x: feed, y: solvent },
          t.stages.map((_, j) => leaving(j)),
        );
        const stages = Array.from(
          { length: t.stages.length },
          (_, j): Point => ({
            x: vessel(j + 1, 'mixer', 'aqueous'),
            y: vessel(j + 1, 'mixer', 'organic'),
          }),
        );
        const components = [...s.solutes, ...s.species];
        const entering = components.map((c) => read(y, `${t.aqueous.from}.${c}`));
        if (competes(s, t)) {
          const mixers = t.stages.map((_, j) =>
            components.map((c) => read(y, `${t.name}.${j + 1}.mixer.aqueous.${c}`)),
          );
          return {
            label,
            time,
            isotherm: alongStages(plant, t, i, [entering, ...mixers]),
            operating,
            stages,
          };
        }
        const drawn = [...operating.filter((p) => Number.isFinite(p.x)), ...stages];
        const reach = 1.08 * Math.max(...drawn.map((p) => p.x), 1e-9);
        const curve = isotherm(plant, t, i, entering);
        const xs = Array.from({ length: POINTS + 1 }, (_, k) => reach * (k / POINTS) ** 2);
        return { label, time, isotherm: xs.map((x) => ({ x, y: curve(x) })), operating, stages };
      });
      return [{ train: t.name, solute, competing: competes(s, t), along: along(plant, t, i), moments }];
    }),
  );
}

/**
 * Streams that pass each other. Counter-current: what leaves a stage and what comes towards it. Co-current: what leaves
 * each stage, from what enters. Cross-current: for each stage a line of its own from what enters to what leaves.
 */
function operatingLine(t: Train, entering: Point, leaving: readonly Point[]): Point[] {
  const { arrangement: a } = t;
  if (a.kind === 'counter-current')
    return [entering, ...leaving].map((p, j) => ({ x: p.x, y: (leaving[j] ?? entering).y }));
  if (a.kind === 'co-current') return [entering, ...leaving];
  const order = route(t, otherPhase(a.fresh)).order;
  return order.flatMap((j, k): Point[] => {
    const before = k === 0 ? entering : leaving[order[k - 1]];
    const from = a.fresh === 'organic' ? { x: before.x, y: entering.y } : { x: entering.x, y: before.y };
    return [from, leaving[j], BREAK];
  });
}

/** Ends a line, so that the next one begins anew. */
const BREAK: Point = { x: Number.NaN, y: Number.NaN };

/** Whether several solutes transfer in a train, so that the curve of one depends on the others. */
const competes = (s: Scenario, t: Train): boolean =>
  s.solutes.filter((_, i) => t.equilibrium[i] !== null).length > 1;

/** Equilibrium of one solute where all others are as they are from stage to stage, between these by straight lines. */
function alongStages(
  plant: Plant,
  t: Train,
  solute: number,
  aqueous: readonly (readonly number[])[],
): Point[] {
  const star = equilibriumAt(plant, t, solute, 'organic');
  const none = plant.scenario.solutes.map(() => 0);
  const pieces = Math.max(2, Math.ceil(POINTS / aqueous.length));
  return aqueous.slice(1).flatMap((to, j) => {
    const from = aqueous[j];
    return Array.from({ length: pieces + (j === aqueous.length - 2 ? 1 : 0) }, (_, k): Point => {
      const c = from.map((v, q) => v + ((to[q] - v) * k) / pieces);
      return { x: c[solute], y: star(c, none) };
    });
  });
}

function along(plant: Plant, t: Train, solute: number): string {
  const { scenario: s } = plant;
  if (competes(s, t)) return 'equilibrium with all else dissolved as it is from stage to stage';
  const released = s.releases[solute].flatMap((r, k) => (r !== 0 ? [s.species[k]] : []));
  return released.length > 0
    ? `isotherm at the ${released.join(', ')} that the transfer itself sets free`
    : 'isotherm';
}

import type { Plant } from '../plant/assemble.ts';
import { isotherm } from '../plant/isotherm.ts';
import type { F } from '../solve/system.ts';
import type { Snapshot } from './result.ts';

/** Operating diagram of one solute in one train; kg/m³. */
export interface Diagram {
  readonly train: string;
  readonly solute: string;
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
      const n = t.stages.length;
      const moments = snapshots.map(({ label, time, outputs: y }): Moment => {
        const vessel = (j: number, unit: string, phase: string): number =>
          read(y, `${t.name}.${j}.${unit}.${phase}.${solute}`);
        const feed = read(y, `${t.aqueous.from}.${solute}`);
        const solvent = read(y, `${t.organic.from}.${solute}`);
        const operating = Array.from(
          { length: n + 1 },
          (_, j): Point => ({
            x: j === 0 ? feed : vessel(j, 'settler', 'aqueous'),
            y: j === n ? solvent : vessel(j + 1, 'settler', 'organic'),
          }),
        );
        const stages = Array.from(
          { length: n },
          (_, j): Point => ({
            x: vessel(j + 1, 'mixer', 'aqueous'),
            y: vessel(j + 1, 'mixer', 'organic'),
          }),
        );
        const reach = 1.08 * Math.max(...operating.map((p) => p.x), ...stages.map((p) => p.x), 1e-9);
        const entering = [...s.solutes, ...s.species].map((c) => read(y, `${t.aqueous.from}.${c}`));
        const curve = isotherm(plant, t, i, entering);
        const xs = Array.from({ length: POINTS + 1 }, (_, k) => reach * (k / POINTS) ** 2);
        return { label, time, isotherm: xs.map((x) => ({ x, y: curve(x) })), operating, stages };
      });
      return [{ train: t.name, solute, along: along(plant, i, law.law), moments }];
    }),
  );
}

function along(plant: Plant, solute: number, law: string): string {
  const { scenario: s } = plant;
  const released = s.releases[solute].flatMap((r, k) => (r !== 0 ? [s.species[k]] : []));
  const others = s.solutes.length > 1 && (law === 'langmuir' || law === 'exchange') ? ', solute alone' : '';
  if (released.length > 0)
    return `isotherm at the ${released.join(', ')} that the transfer itself sets free${others}`;
  return `isotherm${others}`;
}

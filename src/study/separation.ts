import type { Plant } from '../plant/assemble.ts';
import { equilibriumAt } from '../plant/isotherm.ts';
import type { Law, Train } from '../scenario/scenario.ts';

/** What competition between the solutes of a train comes to at one moment. */
export interface Separation {
  /** Share of what the organic can hold that all solutes together take of the loaded organic; null without a ceiling. */
  readonly load: number | null;
  readonly factors: readonly SeparationFactor[];
  readonly crowding: readonly Crowding[];
}

/** β = (c_o/c_a of one)/(c_o/c_a of the other), mixer by mixer; the one is that which is extracted more strongly. */
export interface SeparationFactor {
  readonly one: string;
  readonly other: string;
  readonly stages: readonly (number | null)[];
}

/**
 * Where the loaded organic leaves: what equilibrium lets the organic hold of a solute beside the others, over what it
 * would hold of it from the same aqueous without them.
 */
export interface Crowding {
  readonly solute: string;
  readonly share: number | null;
}

type Read = (path: string) => number;

/** Null where fewer than two solutes transfer. */
export function separation(plant: Plant, t: Train, read: Read): Separation | null {
  const { solutes, species } = plant.scenario;
  const own = solutes.flatMap((_, i) => (t.equilibrium[i] ? [i] : []));
  if (own.length < 2) return null;
  const at = (j: number, phase: string, name: string): number =>
    read(`${t.name}.${j + 1}.mixer.${phase}.${name}`);
  const ratio = (j: number, i: number): number => at(j, 'organic', solutes[i]) / at(j, 'aqueous', solutes[i]);
  const loads = own.map((i) => loadOf(t.equilibrium[i] as Law, read(`${t.organic.to}.${solutes[i]}`)));
  const pairs = own.flatMap((a, k) => own.slice(k + 1).map((b) => [a, b] as const));
  const aqueous = [...solutes, ...species].map((n) => at(0, 'aqueous', n));
  return {
    load: loads.every((v) => v !== null) ? loads.reduce<number>((n, v) => n + (v as number), 0) : null,
    factors: pairs.map(([a, b]) => {
      const [one, other] = ratio(0, a) >= ratio(0, b) ? [a, b] : [b, a];
      return {
        one: solutes[one],
        other: solutes[other],
        stages: t.stages.map((_, j) => finite(ratio(j, one) / ratio(j, other))),
      };
    }),
    crowding: own.map((i) => {
      const star = equilibriumAt(plant, t, i, 'organic');
      const none = solutes.map(() => 0);
      const alone = aqueous.map((c, k) => (k < solutes.length && k !== i ? 0 : c));
      return { solute: solutes[i], share: finite(star(aqueous, none) / star(alone, none)) };
    }),
  };
}

/** Share of its ceiling that a solute takes of the organic; null where its law has none. */
export function loadOf(law: Law, organic: number): number | null {
  if (law.law === 'langmuir') return organic / law.capacity;
  return law.law === 'exchange' ? (organic * law.perSolute) / law.extractant : null;
}

const finite = (v: number): number | null => (Number.isFinite(v) && v > 0 ? v : null);

import type { Plant } from '../plant/assemble.ts';
import { type Diagram, diagrams } from './diagram.ts';
import type { Records } from './records.ts';
import type { Snapshot } from './result.ts';

/** Moments evenly spread over a run, with the operating diagrams at each of them. */
export interface Frames {
  readonly snapshots: readonly Snapshot[];
  readonly diagrams: readonly Diagram[];
}

/** Figures that the moments may hold in all: of larger plants there are fewer moments. */
const MOST_FIGURES = 30_000;
const MOST_MOMENTS = 49;
const LEAST_MOMENTS = 13;

/** Moments among the records of a run, its start and its end included. */
export function framesOf(plant: Plant, { times, rows }: Records): Frames {
  const stages = plant.scenario.trains.reduce((n, t) => n + t.stages.length, 0);
  const solutes = plant.scenario.solutes.length;
  const afford = Math.floor(MOST_FIGURES / (solutes * (8 * stages + 60 * plant.scenario.trains.length)));
  const count = Math.min(times.length, Math.max(LEAST_MOMENTS, Math.min(MOST_MOMENTS, afford)));
  const snapshots = Array.from({ length: count }, (_, i): Snapshot => {
    const k = count === 1 ? 0 : Math.round((i * (times.length - 1)) / (count - 1));
    return { label: '', time: times[k], outputs: rows[k] };
  });
  return { snapshots, diagrams: diagrams(plant, snapshots) };
}

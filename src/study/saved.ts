import type { Plant } from '../plant/assemble.ts';
import { heldVolumes } from '../plant/held.ts';
import { Refusal } from '../scenario/refusal.ts';
import type { SavedState } from '../scenario/scenario.ts';
import type { F } from '../solve/system.ts';

/** Format of a saved state; raised when older files can no longer be read. */
export const STATE_FORMAT = 1;

/** Differences named in a refusal; more only hide the first. */
const MOST_NAMED = 5;

/** A state as it is kept in a file: every place by its path, in SI. */
export function saveState(plant: Plant, x: F, time: number, modes: ReadonlyMap<number, number>): object {
  return {
    upsettle_state: STATE_FORMAT,
    title: plant.scenario.title,
    topology: plant.system.topology,
    time_s: time,
    places: plant.system.places.map((p) => p.path),
    values: Array.from(x),
    volumes_m3: Array.from(heldVolumes(plant, x), (v) => (Number.isFinite(v) ? v : null)),
    modes: Object.fromEntries([...modes].map(([i, v]) => [plant.system.inputs[i].path, v])),
  };
}

/** Modes of a kept state (continuity, pumps that ran dry) on the inputs of a plant. */
export const restoreModes = (plant: Plant, saved: SavedState): Map<number, number> =>
  new Map(
    plant.system.inputs.flatMap((q, i): [number, number][] =>
      Object.hasOwn(saved.modes, q.path) ? [[i, saved.modes[q.path]]] : [],
    ),
  );

/**
 * A kept state on the places of a plant. Boundary totals start at zero again. A hold-up that was no state in the
 * earlier run, because no flow moved there, starts at rest. Where a vessel has another size, or holds a phase in another
 * share, the concentrations are those that were kept.
 *
 * @throws Refusal naming the places in which the two plants differ.
 */
export function restoreState(plant: Plant, saved: SavedState): F {
  const known = new Map(saved.places.map((p, i) => [p, saved.values[i]]));
  const x = Float64Array.from(plant.barren);
  const missing: string[] = [];
  plant.system.places.forEach((p, i) => {
    if (p.kind === 'total') {
      x[i] = 0;
      return;
    }
    const value = known.get(p.path);
    if (value !== undefined) x[i] = value;
    else if (!isRestingHoldup(p.path)) missing.push(p.path);
  });
  const own = new Set(plant.system.places.map((p) => p.path));
  const extra = saved.places.filter((p) => !own.has(p) && !isTotal(p) && !isRestingHoldup(p));
  if (missing.length === 0 && extra.length === 0) return resized(plant, saved, x);
  const list = (what: string, paths: readonly string[]): string[] =>
    paths.length === 0
      ? []
      : [
          `${what} ${paths.slice(0, MOST_NAMED).join(', ')}${paths.length > MOST_NAMED ? ` and ${paths.length - MOST_NAMED} more` : ''}`,
        ];
  const message = `the state in ${saved.file} is of another plant: ${[...list('it lacks', missing), ...list('it has in excess', extra)].join('; ')}; keep one of this plant with run --save-state`;
  throw new Refusal([{ path: ['start', 'saved'], message }]);
}

const isRestingHoldup = (path: string): boolean => /\.mixer\.organic\.volume$/.test(path);
const isTotal = (path: string): boolean => /\.(in|out)\./.test(path);

/** Amounts in the ratio of the volumes that they stand in now and stood in then. */
function resized(plant: Plant, saved: SavedState, x: F): F {
  const then = new Map(saved.places.map((p, i) => [p, saved.volumes?.[i] ?? Number.NaN]));
  const scale = (kind: 'volume' | 'amount', now: F): void => {
    plant.system.places.forEach((p, i) => {
      const ratio = now[i] / (then.get(p.path) ?? Number.NaN);
      if (p.kind === kind && Number.isFinite(ratio)) x[i] *= ratio;
    });
  };
  // Hold-ups first: what the amounts stand in follows from them.
  scale('volume', heldVolumes(plant, x));
  scale('amount', heldVolumes(plant, x));
  return x;
}

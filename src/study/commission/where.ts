import type { Plant } from '../../plant/assemble.ts';
import type { Mode } from '../../solve/modes.ts';

/** A slow mode in the words of the plant. */
export interface SlowMode {
  /** s in which it falls by e; negative where it grows. */
  readonly time: number;
  /** s of one swing; null where it swings so slowly that it does not show. */
  readonly period: number | null;
  /** What is on its way: a solute, a species, or the levels. */
  readonly of: string;
  /** Shares of what is on its way, by place, largest first. */
  readonly lives: readonly { readonly where: string; readonly share: number }[];
}

/** A mode that falls to a hundredth before it has turned by a quarter does not swing to any eye. */
const SHOWS = Math.PI / 2 / Math.log(100);

/** In which vessels a mode lives: by the amounts of what it moves most, relative to what the plant holds of it. */
export function describe(plant: Plant, mode: Mode, state: Float64Array): SlowMode {
  const { places } = plant.system;
  const size = (i: number): number => Math.hypot(mode.shape.re[i], mode.shape.im[i]);
  const kinds = new Map<string, { moved: number; held: number; members: number[] }>();
  places.forEach((p, i) => {
    if (p.kind === 'total') return;
    const name = p.kind === 'volume' ? 'levels' : p.path.slice(p.path.lastIndexOf('.') + 1);
    const kind = kinds.get(name) ?? { moved: 0, held: 0, members: [] };
    kind.moved += size(i);
    kind.held += Math.abs(state[i]);
    kind.members.push(i);
    kinds.set(name, kind);
  });
  const weight = (k: { moved: number; held: number }): number => (k.held > 0 ? k.moved / k.held : 0);
  // What is bound to a solute moves with it: acid that is set free follows the copper, and not the other way round.
  const bySolutesFirst = [...kinds].sort(
    ([a, p], [b, q]) =>
      weight(q) * (plant.scenario.species.includes(b) ? 0.5 : 1) -
      weight(p) * (plant.scenario.species.includes(a) ? 0.5 : 1),
  );
  const [name, kind] = bySolutesFirst[0];
  const shares = new Map<string, number>();
  for (const i of kind.members) {
    const where = whereabouts(places[i].path, plant);
    shares.set(where, (shares.get(where) ?? 0) + size(i) / (kind.moved || 1));
  }
  const swings = mode.frequency > SHOWS * Math.abs(mode.rate);
  return {
    time: -1 / mode.rate,
    period: swings ? (2 * Math.PI) / mode.frequency : null,
    of: name,
    lives: [...shares].map(([where, share]) => ({ where, share })).sort((a, b) => b.share - a.share),
  };
}

/** `extraction.2.settler.1.organic.copper` → organic layers of extraction. */
function whereabouts(path: string, plant: Plant): string {
  const [first, second, unit, ...rest] = path.split('.');
  if (second === 'mixer') return `${unit} of ${first}`;
  if (plant.scenario.tanks.some((t) => t.name === first))
    return path.startsWith(`${first}.bottoms`) ? `bottoms of ${first}` : first;
  if (unit === 'mixer') return `mixers of ${first}`;
  if (unit === 'band') return `bands of ${first}`;
  const phase = rest.find((q) => q === 'aqueous' || q === 'organic');
  return `${phase === undefined ? '' : `${phase} `}layers of ${first}`;
}

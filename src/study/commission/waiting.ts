import type { Plant } from '../../plant/assemble.ts';
import type { Records } from '../records.ts';
import { PERCENTS } from './approach.ts';
import { allCome, type ComesGood, type OnSpec } from './good.ts';
import type { Kept } from './kept.ts';

/** What an outlet makes until it is good. */
export interface OffSpec {
  readonly outlet: string;
  /** s; null: not within the run, and all of the run is counted. */
  readonly until: number | null;
  /** By its limits, or where it has none by 5 % of its change. */
  readonly by: 'limit' | 'change';
  /** m³ */
  readonly volume: number;
  /** kg by solute. */
  readonly solutes: readonly number[];
  /** Whether one of its limits is an upper one: then what it holds is lost. */
  readonly loses: boolean;
}

/** What the waiting costs, until all outlets are good. */
export interface Waiting {
  /** s counted. */
  readonly until: number;
  readonly outlets: readonly OffSpec[];
  /** m³ of organic fed, and of organic that left with other streams. */
  readonly solventFed: number;
  readonly solventLost: number;
  /** J; null where no agitator says what it draws and no power is stated. */
  readonly energy: number | null;
  readonly costs: readonly { readonly of: string; readonly amount: number }[];
  readonly currency: string;
}

/** When each outlet is good: by its limits or, where it has none, by 5 % of its change. */
export type GoodTimes = readonly Pick<OffSpec, 'outlet' | 'until' | 'by' | 'loses'>[];

/** When each outlet is good. */
export function goodTimes(plant: Plant, list: readonly ComesGood[], limits: readonly OnSpec[]): GoodTimes {
  const band = PERCENTS.indexOf(5);
  return plant.network.outlets.map(({ name }) => {
    const same = alike(plant, name);
    const own = limits.filter((l) => same.includes(l.limit.stream));
    const solutes = list.filter(
      (q) => q.quantity.of === name && plant.scenario.solutes.includes(q.quantity.component),
    );
    const moving = solutes.filter((q) => q.change !== null || q.final === null);
    return {
      outlet: name,
      until: own.length > 0 ? allCome(own.map((l) => l.from)) : allCome(moving.map((q) => q.ofChange[band])),
      by: own.length > 0 ? 'limit' : 'change',
      loses: own.some((l) => l.limit.side === 'below'),
    };
  });
}

/** A stream and those that it is split off: what holds for one holds for all. */
function alike(plant: Plant, name: string): string[] {
  const { network, scenario } = plant;
  const maker = network.streams.get(name)?.maker;
  if (maker?.kind !== 'split') return [name];
  return [name, ...alike(plant, scenario.splits[maker.index].stream)];
}

/** Boundary totals at the times at which outlets came good → what was made, fed and lost until then. */
export function waiting(
  plant: Plant,
  good: GoodTimes,
  ran: number,
  kept: ReadonlyMap<number, Kept>,
  records: Records,
): Waiting {
  const { scenario: s, network, system } = plant;
  const at = new Map(system.places.map((p, i) => [p.path, i]));
  const total = (t: number, path: string): number => {
    const i = at.get(path);
    return i === undefined ? 0 : (kept.get(t)?.state[i] ?? 0);
  };
  const until = allCome(good.map((q) => q.until)) ?? ran;
  const outlets = good.map((q): OffSpec => {
    const t = q.until ?? ran;
    return {
      ...q,
      volume: total(t, `${q.outlet}.out.volume`),
      solutes: s.solutes.map((n) => total(t, `${q.outlet}.out.${n}`)),
    };
  });
  const fed = (name: string): number => -total(until, `${name}.in.volume`);
  const organicFeeds = s.feeds.filter((f) => f.phase === 'organic');
  const aqueousOutlets = network.outlets.filter((q) => q.phase === 'aqueous');
  const prices = s.commissioning?.prices ?? null;
  const energy = energyUntil(plant, until, records, prices?.power ?? null);
  const costs: { of: string; amount: number }[] = [];
  if (prices) {
    for (const [name, each] of prices.streams) {
      const out = outlets.find((q) => q.outlet === name);
      costs.push({ of: name, amount: each * (out ? out.volume : fed(name)) });
    }
    s.solutes.forEach((n, k) => {
      const each = prices.solutes.get(n);
      const lost = outlets.filter((q) => q.loses).reduce((sum, q) => sum + q.solutes[k], 0);
      if (each !== undefined) costs.push({ of: `${n} in off-spec outlets`, amount: each * lost });
    });
    if (prices.energy !== null && energy !== null)
      costs.push({ of: 'energy', amount: prices.energy * energy });
  }
  return {
    until,
    outlets,
    solventFed: organicFeeds.reduce((sum, f) => sum + fed(f.name), 0),
    solventLost: aqueousOutlets.reduce(
      (sum, q) => sum + total(until, `${q.name}.out.carried organic volume`),
      0,
    ),
    energy,
    costs,
    currency: prices?.currency ?? '',
  };
}

/** J that agitators draw by their impellers, by the trapezoidal rule over the records, and what is stated besides. */
function energyUntil(
  plant: Plant,
  until: number,
  { times, rows }: Records,
  power: number | null,
): number | null {
  const drawn = plant.system.outputs.flatMap((o, i) => (o.unit === 'W' ? [i] : []));
  if (drawn.length === 0 && power === null) return null;
  let sum = (power ?? 0) * until;
  const at = (k: number): number => drawn.reduce((q, i) => q + rows[k][i], 0);
  for (let k = 1; k < times.length && times[k - 1] < until; k++) {
    const part = Math.min(1, (until - times[k - 1]) / (times[k] - times[k - 1] || 1));
    sum += part * (times[k] - times[k - 1]) * ((at(k - 1) + at(k)) / 2);
  }
  return sum;
}

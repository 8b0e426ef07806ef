import type { Plant } from '../../plant/assemble.ts';
import { trainFacts } from '../../plant/facts.ts';
import type { Limit } from '../../scenario/scenario.ts';
import { PERCENTS, TAIL } from './approach.ts';
import type { Followed } from './follow.ts';
import type { Watched } from './watched.ts';

/** When one quantity comes good for good; s, null where it does not. */
export interface ComesGood {
  readonly quantity: Watched;
  /** kg/m³ */
  readonly start: number;
  readonly final: number | null;
  /** What its bands are parts of: |final − start|, null where it hardly moves. */
  readonly change: number | null;
  /** By PERCENTS: within that part of the change (null as well where it hardly moves). */
  readonly ofChange: readonly (number | null)[];
  /** By PERCENTS: within that part of the final value. */
  readonly ofFinal: readonly (number | null)[];
  /** Within the repeatability of an assay. */
  readonly repeatable: number | null;
  /** Farthest beyond the final value, as a share of the change. */
  readonly overshoot: { readonly share: number; readonly time: number } | null;
  /** s in which the last of the deviation was seen to fall by e. */
  readonly tail: number | null;
  /** s in which its train's holding of its phase (a tank: its own) passes once; null while nothing flows. */
  readonly turnover: number | null;
}

/** When a limit is kept for good by stream that is made of plant feed. */
export interface OnSpec {
  readonly limit: Limit;
  readonly path: string;
  readonly unit: string;
  /** s; null: not within the run. */
  readonly from: number | null;
  /** It had not been outside for long before: only the first aqueous turnover was waited for. */
  readonly neverOutside: boolean;
  /** s of the first aqueous turnover; null: not within the run. */
  readonly turned: number | null;
  /** Value at rest; null without a steady state. */
  readonly final: number | null;
}

/** Overshoots smaller than this share of the change are digits. */
const SEEN = 1e-3;
const finite = (t: number | undefined): number | null => (t !== undefined && Number.isFinite(t) ? t : null);

export function comesGood(f: Followed): ComesGood[] {
  const { approach, start, rest } = f;
  const turnovers = turnoversOf(f);
  const rested = 'state' in rest;
  return f.quantities.map((quantity, k): ComesGood => {
    const own = approach.last[k];
    const from = start[quantity.output];
    const final = rested ? rest.outputs[quantity.output] : null;
    const change = f.changes[k];
    const at = (i: number): number | null => (f.settled ? finite(own[i]) : null);
    const n = PERCENTS.length;
    const beyond = approach.beyond[k];
    const [early, late] = [at(n), at(n + 1)];
    const falls = Math.log(TAIL[0] / TAIL[1]);
    const tail =
      early !== null && late !== null && late > early && change !== null ? (late - early) / falls : null;
    return {
      quantity,
      start: from,
      final,
      change,
      ofChange: PERCENTS.map((_, i) => (change === null ? null : at(i))),
      ofFinal: PERCENTS.map((_, i) => (final === null || final === 0 ? null : at(n + TAIL.length + i))),
      repeatable: own.length > 2 * n + TAIL.length ? at(2 * n + TAIL.length) : null,
      overshoot:
        change !== null && beyond && beyond.by > SEEN * change
          ? { share: beyond.by / change, time: beyond.time }
          : null,
      tail,
      turnover: turnovers(quantity),
    };
  });
}

/** s in which the holding that belongs to a quantity passes once. */
function turnoversOf({ plant, rest, start }: Followed): (q: Watched) => number | null {
  const facts = new Map(trainFacts(plant).map((t) => [t.train, t]));
  const y = 'state' in rest ? rest.outputs : start;
  const at = new Map(plant.system.outputs.map((o, i) => [o.path, i]));
  return (q) => {
    if (q.train !== null) {
      const t = facts.get(q.train);
      return t === undefined ? null : finite(t.held[q.phase] / t[q.phase]);
    }
    const tank = plant.scenario.tanks.find((t) => t.name === q.of);
    if (tank === undefined) return null;
    return finite(y[at.get(`${tank.name}.volume`) ?? -1] / y[at.get(`${tank.to}.flow`) ?? -1]);
  };
}

/**
 * A limit counts as kept only for good, and only for stream made of plant feed: at least one aqueous turnover of the
 * train after the feed began. A barren raffinate is below its limit from the first minute and proves nothing.
 */
export function onSpec(f: Followed): OnSpec[] {
  const { plant, approach, quantities, rest } = f;
  const { scenario: s, system } = plant;
  return s.limits.map((limit, i): OnSpec => {
    const makers = trainsOf(plant, limit.stream);
    // A plant that starts at rest or from a kept state is full of what plant feed has made.
    const fresh = s.start === 'barren' || s.start === 'empty';
    const turned = fresh
      ? Math.max(0, ...approach.turned.filter((_, k) => makers.size === 0 || makers.has(k)))
      : 0;
    const last = approach.last[quantities.length + i][0];
    const { output } = approach.lines[quantities.length + i];
    return {
      limit,
      path: system.outputs[output].path,
      unit: system.outputs[output].unit,
      from: finite(Math.max(last, turned)),
      neverOutside: last === 0,
      turned: finite(turned),
      final: 'state' in rest ? rest.outputs[output] : null,
    };
  });
}

/** The trains that make a stream, through however many blends, splits and tanks. */
function trainsOf({ scenario: s, network }: Plant, name: string): Set<number> {
  const found = new Set<number>();
  const seen = new Set<string>();
  const queue = [s.tanks.find((t) => t.name === name)?.from ?? name];
  for (const stream of queue) {
    if (seen.has(stream)) continue;
    seen.add(stream);
    const maker = network.streams.get(stream)?.maker;
    if (maker?.kind === 'train' || maker?.kind === 'draw') found.add(maker.index);
    else if (maker?.kind === 'tank') queue.push(s.tanks[maker.index].from);
    else if (maker) queue.push(...network.behind(stream));
  }
  return found;
}

/** The time at which all of a list has come; null where one does not. */
export const allCome = (times: readonly (number | null)[]): number | null =>
  times.includes(null) ? null : Math.max(0, ...(times as number[]));

/** What a plant is judged by: its outlets, or in a laboratory without any its vessels. */
export function judged(list: readonly ComesGood[]): ComesGood[] {
  const outlets = list.filter((q) => q.quantity.kind === 'outlet');
  return outlets.length > 0 ? outlets : list.filter((q) => q.quantity.kind === 'tank');
}

/**
 * When every outlet is within a number of per cent of its change, or of its final value, for good; what hardly moves is
 * not waited for.
 */
export function outletsWithin(
  list: readonly ComesGood[],
  percent: (typeof PERCENTS)[number],
  of: 'ofChange' | 'ofFinal' = 'ofChange',
): number | null {
  const band = PERCENTS.indexOf(percent);
  const own = judged(list).filter((q) => q.final !== null && q.change !== null);
  return allCome(own.filter((q) => of === 'ofChange' || q.final !== 0).map((q) => q[of][band]));
}

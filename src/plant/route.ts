import type { Phase, Train } from '../scenario/scenario.ts';

/** The way of a phase through the stages of a train. */
export interface Route {
  /** Stages in the order in which the phase passes them. */
  readonly order: readonly number[];
  /** Share of the train's stream that enters a stage from outside. */
  readonly enters: readonly number[];
  /** Where it comes from: a stage, or null where only from outside. */
  before(stage: number): number | null;
  /** Where it goes: a stage, or null where out of the train. */
  after(stage: number): number | null;
}

/**
 * Counter-current: the aqueous passes the stages upwards, the organic downwards. Co-current: both upwards.
 * Cross-current: the fresh phase enters and leaves at every stage, the other one keeps its way.
 */
export function route(t: Train, phase: Phase): Route {
  const found = known.get(t)?.[phase];
  if (found) return found;
  const made = { aqueous: routeOf(t, 'aqueous'), organic: routeOf(t, 'organic') };
  known.set(t, made);
  return made[phase];
}

const known = new WeakMap<Train, Readonly<Record<Phase, Route>>>();

function routeOf(t: Train, phase: Phase): Route {
  const n = t.stages.length;
  const { arrangement: a } = t;
  const up = Array.from({ length: n }, (_, j) => j);
  if (a.kind === 'cross-current' && a.fresh === phase)
    return { order: up, enters: a.shares, before: () => null, after: () => null };
  const step = phase === 'aqueous' || a.kind === 'co-current' ? 1 : -1;
  const order = step > 0 ? up : up.reverse();
  const inside = (j: number): number | null => (j >= 0 && j < n ? j : null);
  return {
    order,
    enters: order.map((_, j) => (j === order[0] ? 1 : 0)),
    before: (j) => inside(j - step),
    after: (j) => inside(j + step),
  };
}

/** Stages at which a phase leaves the train. */
export const ends = (r: Route): number[] => r.order.filter((j) => r.after(j) === null);

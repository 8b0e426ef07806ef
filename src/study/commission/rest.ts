import type { Plant } from '../../plant/assemble.ts';
import { NEARLY_EMPTY } from '../../plant/book.ts';
import { type Mode, slowModes } from '../../solve/modes.ts';
import { steadyState } from '../../solve/steady.ts';
import type { F } from '../../solve/system.ts';
import { outputsAt } from '../records.ts';

/** A tank that only fills or empties while all else is at rest. */
export interface Drift {
  readonly tank: string;
  /** m³/s */
  readonly rate: number;
  /** s from the start until it is full or empty. */
  readonly until: number;
}

/** Where a plant comes to rest with given inputs. */
export interface Rest {
  readonly state: F;
  readonly inputs: F;
  readonly outputs: F;
  /** Slowest first. */
  readonly modes: readonly Mode[];
  readonly drifts: readonly Drift[];
}

/** Why there is none, in words. */
export interface NoRest {
  readonly reason: string;
}

/** A mode that grows faster than this share of the slowest decay drives the plant away from its rest. */
const GROWS = 1e-9;

/**
 * The steady state that belongs to a state: the one that the plant would reach from it, inventories and modes of pumps
 * and mixers as they are there; by the steady solver, so that no slow tail can fool it.
 */
export function restFrom(plant: Plant, x: F, w: F, time: number, modes: number): Rest | NoRest {
  const { system, parameters } = plant;
  const found = steadyState(system, w, parameters, x);
  if (!found.found) return { reason: `${found.reason}, least of all ${found.place}` };
  const { state } = found;
  const change = new Float64Array(state.length);
  system.rhs(state, w, parameters, change);
  return {
    state,
    inputs: Float64Array.from(w),
    outputs: outputsAt(plant, state, w),
    modes: modes > 0 ? slowModes(system, state, w, parameters, modes) : [],
    drifts: drifts(plant, state, change, time),
  };
}

/** Whether a small disturbance grows: then the steady state is there, but no plant stays in it. */
export const repels = (r: Rest): boolean => r.modes.some((m) => m.rate > GROWS);

/** s in which the slowest mode falls by e; 0 where nothing moves. */
export function slowest(r: Rest): number {
  const decays = r.modes.filter((m) => m.rate < 0);
  return decays.length === 0 ? 0 : 1 / Math.min(...decays.map((m) => -m.rate));
}

function drifts(plant: Plant, x: F, change: F, time: number): Drift[] {
  return plant.scenario.tanks.flatMap((t) => {
    const at = plant.system.places.findIndex((p) => p.path === `${t.name}.volume`);
    if (at < 0 || plant.system.steady[at] !== 'hold') return [];
    const rate = change[at];
    if (Math.abs(rate) < 1e-12 * t.volume) return [];
    const room = rate > 0 ? t.volume - x[at] : x[at] - NEARLY_EMPTY * t.volume;
    return [{ tank: t.name, rate, until: time + Math.max(0, room) / Math.abs(rate) }];
  });
}

import type { Plant } from '../../plant/assemble.ts';
import { type Mode, slowModes } from '../../solve/modes.ts';
import { steadyState } from '../../solve/steady.ts';
import type { F } from '../../solve/system.ts';
import type { LoopAtRest } from '../control/settle.ts';
import { outputsAt } from '../records.ts';
import { drifts } from '../steady.ts';

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
  /** How the loops stand there; none where no loop is in automatic. */
  readonly loops: readonly LoopAtRest[];
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
    drifts: drifts(plant, state, change).map((d) => ({ ...d, until: time + Math.max(0, d.until) })),
    loops: [],
  };
}

/** Whether a small disturbance grows: then the steady state is there, but no plant stays in it. */
export const repels = (r: Rest): boolean => r.modes.some((m) => m.rate > GROWS);

/** s in which the slowest mode falls by e; 0 where nothing moves. */
export function slowest(r: Rest): number {
  const decays = r.modes.filter((m) => m.rate < 0);
  return decays.length === 0 ? 0 : 1 / Math.min(...decays.map((m) => -m.rate));
}

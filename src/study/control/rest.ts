import type { SampledLoop } from '../../control/loop.ts';
import type { F } from '../../solve/system.ts';
import type { ControlledPlant } from './joined.ts';
import { type LoopAtRest, type SettleFrom, settle } from './settle.ts';

/** Inputs as the loops leave them at rest, and how the loops stand there. */
export interface RestUnderLoops {
  readonly inputs: F;
  readonly loops: readonly LoopAtRest[];
}

/**
 * Where the loops drive the inputs in the end, from a run as it is at some moment; null: to no rest. With no loop in
 * automatic the inputs stay as they are.
 */
export function restUnderLoops(
  c: ControlledPlant,
  devices: readonly Pick<SampledLoop, 'name' | 'automatic'>[],
  from: Pick<SettleFrom, 'inputs' | 'state' | 'time'>,
): RestUnderLoops | null {
  if (!devices.some((d) => d.automatic)) return { inputs: from.inputs, loops: [] };
  const automatic = (name: string): boolean => devices.some((d) => d.name === name && d.automatic);
  const found = settle(c, { ...from, automatic });
  return found.found ? { inputs: found.inputs, loops: found.loops } : null;
}

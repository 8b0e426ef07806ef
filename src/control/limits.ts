import type { F } from '../solve/system.ts';
import { valueAt } from './line.ts';
import type { LoopSpec } from './spec.ts';

/**
 * Limits of a loop's output at a moment: those of the output itself, and inside them those that the flow of a ratio leaves
 * with the wild flow as it is, R between flow_low/A and flow_high/A. A limit of the flow comes before one of the ratio.
 */
export function limitsAt(
  { move, limits, inputs }: Pick<LoopSpec, 'move' | 'limits' | 'inputs'>,
  t: number,
  w: F,
): { low: number; high: number } {
  const low = limits ? valueAt(limits.low, t) : move.low;
  const high = Math.max(low, limits ? valueAt(limits.high, t) : move.high);
  const wild = inputs.wild < 0 ? 0 : w[inputs.wild];
  if (!(wild > 0)) return { low, high };
  const [least, most] = [move.flowLow / wild, move.flowHigh / wild];
  const within = (v: number): number => Math.min(most, Math.max(least, v));
  return { low: within(low), high: within(high) };
}

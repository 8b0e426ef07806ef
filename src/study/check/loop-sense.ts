import type { Scenario } from '../../scenario/scenario.ts';
import { steadyState } from '../../solve/steady.ts';
import { controlled, outputsOf } from '../control/joined.ts';
import type { Settled } from '../control/settle.ts';

/** Which way a loop drives its measurement. */
export interface LoopSense {
  readonly name: string;
  /** kg/m³ per output of the loop, at rest; null: not to be found. */
  readonly gain: number | null;
  /** Whether what it does about a deviation lessens it; null where the gain is not known or nothing. */
  readonly right: boolean | null;
  /** Whether its output stands at a limit, or in manual; null: neither. */
  readonly binds: 'low' | 'high' | null;
  readonly output: number;
}

/** Share of the range of an output by which it is moved to and fro. */
const NUDGE = 2e-3;
/** Of the set point over the whole range of the output: a smaller effect is none. */
const NO_EFFECT = 1e-6;

/**
 * The gain of every loop at the steady state `at` of the scenario, from two steady states beside it. Loops in manual
 * are looked at as if they were in automatic: that is when it matters which way they drive.
 */
export function loopSenses(s: Scenario, at: Settled): LoopSense[] {
  const loops = s.loops ?? [];
  if (loops.length === 0) return [];
  const c = controlled({
    ...s,
    loops: loops.map((l) => ({ ...l, controller: { ...l.controller, auto: true } })),
  });
  const { system, parameters } = c.plant;
  const inputs = Float64Array.from(c.plant.inputs);
  c.loops.forEach((l, i) => {
    if (l.inner < 0) inputs[l.spec.inputs.output] = at.loops[i].output;
  });
  const here = steadyState(system, inputs, parameters, c.plant.barren);
  const slope = (output: number, nudge: number, measured: readonly number[]): number[] | null => {
    if (!here.found) return null;
    const side = (sign: number): number[] | null => {
      const w = Float64Array.from(inputs);
      w[output] += sign * nudge;
      const found = steadyState(system, w, parameters, here.state);
      if (!found.found) return null;
      const y = outputsOf(c.plant, found.state, w);
      return measured.map((i) => y[i]);
    };
    const [up, down] = [side(1), side(-1)];
    return up && down && up.map((v, k) => (v - down[k]) / (2 * nudge));
  };
  return c.loops.map((l, i) => {
    const { move, keepAt } = l.loop;
    // An outer loop moves the measurement of the loop that it leads.
    const own = l.inner < 0 ? l : c.loops[l.inner];
    const nudge = NUDGE * (own.loop.move.high - own.loop.move.low);
    const found = slope(own.spec.inputs.output, nudge, [l.spec.measured, own.spec.measured]);
    const gain = found && (l.inner < 0 ? found[0] : found[0] / found[1]);
    const known = gain !== null && Number.isFinite(gain) ? gain : null;
    const nothing = known === null || Math.abs(known) * (move.high - move.low) < NO_EFFECT * keepAt;
    return {
      name: l.loop.name,
      gain: known,
      right: nothing ? null : l.spec.settings.sense * (known as number) < 0,
      binds: at.loops[i].binds,
      output: at.loops[i].output,
    };
  });
}

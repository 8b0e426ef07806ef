import { limitsAt } from '../../control/limits.ts';
import { valueAt } from '../../control/line.ts';
import { crossing } from '../../math/roots.ts';
import { type Steady, steadyState } from '../../solve/steady.ts';
import type { F } from '../../solve/system.ts';
import { type ControlledPlant, type JoinedLoop, outputsOf } from './joined.ts';

/** A loop at the steady state. */
export interface LoopAtRest {
  readonly name: string;
  readonly measurement: number;
  readonly setPoint: number;
  readonly output: number;
  /** Which limit keeps it from its set point; null: none does, or it is in manual. */
  readonly binds: 'low' | 'high' | null;
  readonly automatic: boolean;
}

export interface Settled {
  /** Inputs with the outputs that the loops come to. */
  readonly inputs: F;
  readonly state: F;
  readonly iterations: number;
  readonly residual: number;
  readonly loops: readonly LoopAtRest[];
}

export type SettleResult = ({ readonly found: true } & Settled) | (Steady & { readonly found: false });

/** Outputs looked at between the limits for a crossing of the set point. */
const LOOKS = 8;
/** Loops that touch each other are settled in turn. */
const SWEEPS = 40;
const DIGITS = 1e-11;
/** A measurement this near to its set point, relative to it, is there. */
const THERE = 1e-10;

/** Where the search begins, and how the loops stand; as the scenario starts them by default. */
export interface SettleFrom {
  readonly inputs: F;
  readonly state: F;
  readonly automatic: (loop: string) => boolean;
  /** s at which set points and limits count. */
  readonly time: number;
}

const asStarted = (c: ControlledPlant): SettleFrom => ({
  inputs: c.plant.inputs,
  state: c.plant.barren,
  automatic: (name) => c.loops.some((l) => l.loop.name === name && l.loop.controller.auto),
  time: 0,
});

/**
 * The steady state with every loop in automatic at its set point, its output the unknown; where no output between the
 * limits does that, at the limit to which its action drives it. An outer loop is led to its set point by the output of
 * the loop that it leads, whose own set point follows.
 */
export function settle(c: ControlledPlant, from: SettleFrom = asStarted(c)): SettleResult {
  const { plant } = c;
  const w = Float64Array.from(from.inputs);
  let state = Float64Array.from(from.state);
  const automatic = (l: JoinedLoop): boolean => from.automatic(l.loop.name);
  const keepsAt = ({ spec, loop }: JoinedLoop): number =>
    spec.setPoint.times.length === 0 ? loop.keepAt : valueAt(spec.setPoint, from.time);
  let iterations = 0;
  let failed: (Steady & { found: false }) | null = null;
  let residual = 0;
  const rest = (): boolean => {
    const found = steadyState(plant.system, w, plant.parameters, state);
    if (!found.found) {
      failed = found;
      return false;
    }
    state = Float64Array.from(found.state);
    iterations += found.iterations;
    residual = found.residual;
    return true;
  };
  const measured = (l: JoinedLoop): number => outputsOf(plant, state, w)[l.spec.measured];
  const binds = new Map<JoinedLoop, 'low' | 'high'>();
  const led = new Map<JoinedLoop, Asked>();
  if (!rest() && failed) return failed;
  const active = c.loops.filter((l) => automatic(l) && l.inner < 0);
  const leaders = active.map((l) => leaderOf(c, l, automatic));
  for (let sweep = 0; sweep < SWEEPS; sweep++) {
    let moved = false;
    for (const [k, l] of active.entries()) {
      const judge = leaders[k] ?? l;
      const keep = keepsAt(judge);
      const gap = (): number => measured(judge) - keep;
      if (
        sweep > 0 &&
        (binds.has(l) || led.has(judge) || Math.abs(gap()) <= THERE * keep) &&
        active.length === 1
      )
        break;
      if (sweep > 0 && !binds.has(l) && !led.has(judge) && Math.abs(gap()) <= THERE * Math.max(keep, 1e-9))
        continue;
      const before = w[l.spec.inputs.output];
      const limits = limitsAt(l.spec, from.time, w);
      let bound = reachSetPoint(l, limits, senseOf(l, judge), gap, w, rest);
      const asked = judge === l ? null : outOfReach(judge, measured(l));
      if (asked && bound !== 'failed') {
        // The outer loop may not ask for that: at its limit it leads the inner one there.
        led.set(judge, asked);
        const own = l.spec.settings.sense;
        bound = reachSetPoint(l, limits, own, () => measured(l) - asked.value, w, rest);
      }
      if (bound === null) binds.delete(l);
      else if (bound !== 'failed') binds.set(l, bound);
      else if (failed) return failed;
      if (Math.abs(w[l.spec.inputs.output] - before) > DIGITS * (l.loop.move.high - l.loop.move.low))
        moved = true;
    }
    if (!moved) break;
  }
  const y = outputsOf(plant, state, w);
  for (const l of active) {
    // The schedule's flow, from which changes of it count, is the flow that the loop has come to.
    const { flow, wild, output } = l.spec.inputs;
    const { flowLow, flowHigh } = l.spec.move;
    if (flow >= 0) w[flow] = Math.min(flowHigh, Math.max(flowLow, w[output] * (wild < 0 ? 1 : w[wild])));
  }
  for (const l of c.loops) {
    w[l.spec.inputs.measurement] = y[l.spec.measured];
    // What an outer loop asks of the loop that it leads is what that one has come to.
    if (l.inner >= 0 && automatic(l)) {
      const led = c.loops[l.inner];
      w[led.spec.inputs.setPoint] = Math.min(
        l.loop.move.high,
        Math.max(l.loop.move.low, y[led.spec.measured]),
      );
    }
  }
  return {
    found: true,
    inputs: w,
    state,
    iterations,
    residual,
    loops: c.loops.map((l) => ({
      name: l.loop.name,
      measurement: y[l.spec.measured],
      setPoint: w[l.spec.inputs.setPoint],
      output: w[l.spec.inputs.output],
      binds: led.get(l)?.at ?? binds.get(l.inner >= 0 ? c.loops[l.inner] : l) ?? null,
      automatic: automatic(l),
    })),
  };
}

/** A limit of an outer loop's output that the inner measurement lies beyond. */
interface Asked {
  readonly at: 'low' | 'high';
  readonly value: number;
}

function outOfReach({ loop: { move } }: JoinedLoop, measurement: number): Asked | null {
  if (measurement < move.low) return { at: 'low', value: move.low };
  return measurement > move.high ? { at: 'high', value: move.high } : null;
}

/** The loop in automatic that moves the set point of this one. */
function leaderOf(
  c: ControlledPlant,
  l: JoinedLoop,
  automatic: (l: JoinedLoop) => boolean,
): JoinedLoop | null {
  const index = c.loops.indexOf(l);
  return c.loops.find((o) => o.inner === index && automatic(o)) ?? null;
}

/** Which way the output goes when the judged measurement is too high. */
const senseOf = (l: JoinedLoop, judge: JoinedLoop): number =>
  judge === l ? l.spec.settings.sense : -l.spec.settings.sense * judge.spec.settings.sense;

function reachSetPoint(
  l: JoinedLoop,
  { low, high }: { readonly low: number; readonly high: number },
  sense: number,
  gap: () => number,
  w: F,
  rest: () => boolean,
): 'low' | 'high' | 'failed' | null {
  const { output } = l.spec.inputs;
  let broken = false;
  const at = (u: number): number => {
    w[output] = u;
    if (!rest()) broken = true;
    return broken ? Number.NaN : gap();
  };
  const points: { u: number; g: number }[] = [];
  // From where it is outwards: what is nearest is found first, and each look starts from its neighbour.
  const here = Math.min(high, Math.max(low, w[output]));
  const first = { u: here, g: at(here) };
  if (broken) return 'failed';
  if (first.g === 0) return null;
  for (const end of first.g * sense > 0 ? [high, low] : [low, high]) {
    let from = first;
    if (w[output] !== first.u) at(first.u);
    for (let k = 1; k <= LOOKS; k++) {
      const u = first.u + ((end - first.u) * k) / LOOKS;
      if (u === from.u) break;
      const g = at(u);
      // Beyond where the plant can run there is nothing to look for.
      if (broken) {
        broken = false;
        w[output] = from.u;
        if (!rest()) return 'failed';
        break;
      }
      points.push({ u, g });
      if (Math.sign(g) !== Math.sign(from.g)) {
        const found = crossing((v) => at(v), from.u, u, Math.abs(DIGITS * (high - low)));
        at(found);
        return broken ? 'failed' : null;
      }
      from = { u, g };
    }
  }
  const bound = first.g * sense > 0 ? 'high' : 'low';
  at(bound === 'high' ? high : low);
  return broken ? 'failed' : bound;
}

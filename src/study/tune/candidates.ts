import type { Margins } from '../../control/margins.ts';
import {
  amigo,
  cohenCoon,
  type Fopdt,
  lambda,
  type Settings,
  simc,
  zieglerNichols,
} from '../../control/rules.ts';
import type { LoopSpec, PidSettings } from '../../control/spec.ts';
import { abs } from '../../math/complex.ts';
import type { Point } from './point.ts';

export interface Candidate {
  readonly name: string;
  readonly settings: Settings;
  readonly margins: Margins;
  /** Printed for reference, and never put forward. */
  readonly reference: boolean;
}

export const withSettings = (s: PidSettings, q: Settings): PidSettings => ({ ...s, ...q });

/** The model that settings are chosen by: the loop's own delays added to the plant's. */
export function modelFor(p: Fopdt, spec: LoopSpec): Fopdt {
  const { every, delay, takes } = spec.analyser;
  const held = every / 2;
  return {
    gain: Math.abs(p.gain),
    lag: p.lag + spec.settings.filter,
    delay: p.delay + delay + held + (takes === 'composite' ? every / 2 : 0),
  };
}

/** Settings by published rules with their margins on the exact response. */
export function byRules(model: Fopdt, point: Point, spec: LoopSpec): Candidate[] {
  const make = (name: string, settings: Settings, reference = false): Candidate => ({
    name,
    settings,
    reference,
    margins: point.margins(withSettings(spec.settings, settings)),
  });
  const swings = ultimate(point, spec);
  const { gain, integralTime, derivativeTime } = spec.settings;
  return [
    make('as set', { gain, integralTime, derivativeTime }),
    make('SIMC', simc(model)),
    make('lambda', lambda(model)),
    make('AMIGO', amigo(model)),
    ...(swings ? [make('Ziegler-Nichols', zieglerNichols(swings.gain, swings.period), true)] : []),
    make('Cohen-Coon', cohenCoon(model), true),
  ];
}

/** Gain and period at which the loop under proportional control swings for ever, or null. */
export function ultimate(point: Point, spec: LoopSpec): { gain: number; period: number } | null {
  const p = point.margins({ ...spec.settings, gain: 1, integralTime: 1e12, derivativeTime: 0 });
  if (!Number.isFinite(p.gain) || Number.isNaN(p.crossover180)) return null;
  return { gain: p.gain, period: (2 * Math.PI) / p.crossover180 };
}

/** Integral times looked at, as multiples of the model's lag. */
const SHARES = [0.15, 0.2, 0.27, 0.36, 0.48, 0.64, 0.85, 1.1, 1.5, 2.1];
const BISECTIONS = 28;
const FREQUENCIES = 90;

/**
 * For each integral time the largest gain with max |1/(1 + L)| ≤ Ms, by bisection from the stable side. Least IAE among
 * them is looked for on the nonlinear plant; for a load that the loop takes without swinging IAE = IE ∝ Ti/Kc, which
 * orders them beforehand (K. J. Åström, H. Panagopoulos and T. Hägglund, Automatica 34, 585 (1998), from memory).
 */
export function onTheBound(model: Fopdt, point: Point, spec: LoopSpec, mostSensitive: number): Settings[] {
  const { top } = point.loops;
  const grid = Array.from({ length: FREQUENCIES }, (_, k) => top * 1e-3 ** (1 - k / (FREQUENCIES - 1)));
  return SHARES.map((share): Settings => {
    const integralTime = share * model.lag;
    const unit = point.loops.loop({ ...spec.settings, gain: 1, integralTime, derivativeTime: 0 });
    const L = grid.map(unit);
    const fits = (gain: number): boolean =>
      L.every((q) => abs({ re: 1 + gain * q.re, im: gain * q.im }) * mostSensitive >= 1) &&
      // A larger gain than the one that swings for ever can have small sensitivities again.
      L.every((q, k) => k === 0 || !encircles(L[k - 1], q, gain));
    let low = 0;
    let high = 20 / model.gain;
    for (let n = 0; n < BISECTIONS; n++) {
      const mid = (low + high) / 2;
      if (fits(mid)) low = mid;
      else high = mid;
    }
    return { gain: low, integralTime, derivativeTime: 0 };
  }).sort((a, b) => a.integralTime / a.gain - b.integralTime / b.gain);
}

/** Whether the line from a to b crosses the negative real axis beyond −1. */
function encircles(a: { re: number; im: number }, b: { re: number; im: number }, gain: number): boolean {
  if (Math.sign(a.im) === Math.sign(b.im)) return false;
  const t = a.im / (a.im - b.im);
  return gain * (a.re + t * (b.re - a.re)) < -1;
}

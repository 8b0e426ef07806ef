import type { Fopdt, Settings } from '../../control/rules.ts';
import type { LoopSpec } from '../../control/spec.ts';
import { type Candidate, onTheBound, withSettings } from './candidates.ts';
import type { Point } from './point.ts';
import { quiet } from './prove.ts';
import { absoluteError, type Ground, trial } from './trial.ts';

export interface Optimum extends Candidate {
  /** kg/m³·s without noise, the worst of the sampling phases. */
  readonly iae: number;
  /** What keeps it from being faster. */
  readonly binds: string;
  readonly tried: readonly { readonly settings: Settings; readonly iae: number }[];
}

/** Moments of an upset within the analyser's interval at which it is tried. */
const PHASES = [0, 0.2, 0.4, 0.6, 0.8];
/** Settings on the bound that are tried on the nonlinear plant, the most promising first. */
const TRIED = 4;

/**
 * Least IAE through the scenario's upsets, the worst of five sampling phases, with the exact sensitivity no more than
 * asked for: the bound is traced on the exact response, the best on it found by runs of the nonlinear plant.
 */
export function optimum(
  g: Ground,
  model: Fopdt,
  point: Point,
  spec: LoopSpec,
  mostSensitive: number,
): Optimum {
  const bound = onTheBound(model, point, spec, mostSensitive).filter((s) => s.gain > 0);
  let least = Infinity;
  const iae = (settings: Settings): number => {
    let worst = 0;
    for (const phase of PHASES) {
      const { trace } = trial({ ...g, limits: [] }, (s) => {
        const made = quiet({ ...s, auto: true, settings: withSettings(s.settings, settings) });
        const first = spec.analyser.first + phase * spec.analyser.every;
        return { ...made, analyser: { ...made.analyser, first } };
      });
      worst = Math.max(worst, absoluteError(trace));
      // One phase worse than the worst of another setting is enough to know.
      if (worst > least) return worst;
    }
    least = worst;
    return worst;
  };
  const tried = bound.slice(0, TRIED).map((settings) => ({ settings, iae: iae(settings) }));
  const best = tried.reduce((a, b) => (b.iae < a.iae ? b : a));
  const times = bound.map((s) => s.integralTime);
  const edge =
    best.settings.integralTime <= Math.min(...times) || best.settings.integralTime >= Math.max(...times);
  return {
    name: 'own optimum',
    settings: best.settings,
    reference: false,
    margins: point.margins(withSettings(spec.settings, best.settings)),
    iae: best.iae,
    binds: edge ? 'sensitivity and the range of integral times looked at' : `sensitivity ${mostSensitive}`,
    tried,
  };
}

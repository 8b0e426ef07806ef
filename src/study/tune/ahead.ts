import type { AnalyserSpec } from '../../control/analyser.ts';
import { fitResponse } from '../../control/identify.ts';
import { restGains, stepGains } from '../../control/linearise.ts';
import { logSpace } from '../../control/margins.ts';
import type { FeedforwardSpec } from '../../control/spec.ts';
import { abs } from '../../math/complex.ts';
import type { Candidate } from './candidates.ts';
import type { Point } from './point.ts';
import { type Proof, proof, set } from './prove.ts';
import { type Ground, trial, volumeMoved } from './trial.ts';

/** Feedforward from one measured disturbance: what would be ideal, what of it can be had, what it brings. */
export interface Ahead {
  readonly from: string;
  /** Static gain −G_d/G_p at rest, output per unit of the disturbance. */
  readonly gain: number;
  /** s of the lead-lag, and the delay by which the plant's own path is longer than the disturbance's. */
  readonly lead: number;
  readonly lag: number;
  readonly late: number;
  /** Whether the ideal could be had: the path of the output is no slower than the disturbance's. */
  readonly realisable: boolean;
  readonly analyser: AnalyserSpec;
  readonly assumed: boolean;
  /** With the static gain alone, and with the lead-lag. */
  readonly proof: Proof;
  readonly shaped: Proof;
}

/** Where no analyser is stated for it: one every half hour, ten minutes late, without noise. */
const ASSUMED: AnalyserSpec = {
  every: 1800,
  first: 1800,
  delay: 600,
  takes: 'grab',
  noise: { absolute: 0 },
  bias: 0,
  dropout: 0,
  onBad: 'hold',
};
/** Longest lead over lag that is not noise alone (common practice). */
const MOST_LEAD = 4;

/** `number` is the input among the point's disturbances, `path` its name, which an output carries too. */
export function ahead(g: Ground, point: Point, number: number, path: string, best: Candidate): Ahead | null {
  const { plant, loops } = g.joined;
  const { loop } = loops[g.loop];
  const measured = plant.system.outputs.findIndex((o) => o.path === path);
  if (measured < 0) return null;
  const rest = restGains(point.plant)?.[0] ?? stepGains(point.plant, 24 * 3600);
  const [gp, gd] = [rest[0], rest[1 + number]];
  if (!(Math.abs(gp) > 0) || !(Math.abs(gd) > 0)) return null;
  const gain = -gd / gp;
  // Slower than an hour lies what feedback does anyway.
  const list = logSpace(3e-5, 1.5e-3, 12).map((omega) => ({ omega, g: point.response(omega)[1 + number] }));
  const weak = list.some((q) => abs(q.g) < 1e-9 * Math.abs(gd));
  const fd = fitResponse(weak ? list.slice(0, 5) : list, {
    gain: gd,
    lag: point.fit.lag,
    delay: point.fit.delay,
  });
  const stated = loop.feedforward?.from === path ? loop.feedforward : null;
  const analyser = stated?.analyser ?? ASSUMED;
  const late = point.fit.delay - (fd.delay - analyser.delay - analyser.every / 2);
  // Over these frequencies a lag far beyond the plant's own is not told from an integrator.
  const lag = Math.min(Math.max(fd.lag, 1), MOST_LEAD * point.fit.lag);
  const lead = Math.min(point.fit.lag, MOST_LEAD * lag);
  const made: FeedforwardSpec = {
    measured,
    weighedBy: -1,
    analyser,
    seed: stated?.seed ?? 2,
    gain,
    lead: 0,
    lag: 0,
    form: 'add',
  };
  const base = volumeMoved(trial(g, set(null)).trace);
  const proved = (name: string, feedforward: FeedforwardSpec): Proof =>
    proof(
      name,
      best,
      trial(g, (s) => ({ ...set(best)(s), feedforward })),
      base,
      null,
    );
  return {
    from: path,
    gain,
    lead,
    lag,
    late: Math.max(0, late),
    realisable: late <= 0,
    analyser,
    assumed: stated === null,
    proof: proved(`${best.name} + static feedforward`, made),
    shaped: proved(`${best.name} + lead-lag feedforward`, { ...made, lead, lag }),
  };
}

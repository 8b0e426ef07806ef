import type { OutputCourse } from './output-course.ts';
import type { Beside, Pid } from './pid.ts';
import type { LoopSpec } from './spec.ts';

/** How a controller that runs on a scan goes on over a stretch on which its error stays. */
export interface Segment {
  /** s at which it has to be planned anew. */
  readonly until: number;
  integral(t: number): number;
}

/** Looks ahead for the moment at which demand and output meet. */
const LOOKS = 64;
const BISECTIONS = 60;
/** s: the shortest piece between two events of a scan. */
const SHORTEST = 1e-3;
/** While the set point ramps, the error is taken anew so many times between two samples. */
const PARTS = 20;

/**
 * PI on the held value between two results, the scan followed as the straight line through its steps. With the error e
 * constant the demand is u = factor·(P + I) + added, I' = Kc·e/Ti, while the output follows it. At a limit or on a ramp of
 * the slew the output is a + c·t and I' = (r(t) − I)/Ti with r linear in t: I = r(t) − c'·Ti + (I₀ − r(0) + c'·Ti)·e^(−t/Ti).
 */
export function follow(
  t: number,
  pid: Pid,
  sp: number,
  s: LoopSpec,
  out: OutputCourse,
  beside: Beside,
): Segment {
  const { gain, integralTime: Ti } = s.settings;
  const { up, down } = s.move;
  const { low, high } = out;
  const horizon =
    t + (s.setPoint.times.length > 0 && ramping(s, t) ? s.analyser.every / PARTS : 4 * s.analyser.every);
  const start = pid.integral;
  const rate = (gain * pid.error(sp)) / Ti;
  const demand = (integral: number): number =>
    beside.factor * (pid.proportional(sp) + integral) + beside.added;
  const slope = beside.factor * rate;
  let now = out.at(t);
  const wish = demand(start);
  // Without a slew the output is where the demand is, as far as the limits let it.
  if (!Number.isFinite(up) && wish > now) now = out.clamp(wish);
  if (!Number.isFinite(down) && wish < now) now = out.clamp(wish);
  // Nearer than this they have met: what a slew does in a few of the shortest pieces, or it would chase the demand for ever.
  const fastest = Math.max(...[up, down].map((v) => (Number.isFinite(v) ? v : 0)));
  const slack = Math.max(1e-9 * (high - low), 5 * SHORTEST * fastest);
  const follows = Math.abs(wish - now) <= slack && slope <= up && -slope <= down;
  if (follows && !(wish >= high - slack && slope > 0) && !(wish <= low + slack && slope < 0)) {
    out.course(t, wish, slope);
    const room = slope > 0 ? (high - wish) / slope : slope < 0 ? (low - wish) / slope : Infinity;
    return { until: Math.min(t + room, horizon), integral: (q) => start + rate * (q - t) };
  }
  const ahead = wish > now + slack || (Math.abs(wish - now) <= slack && slope > 0);
  const atLimit = ahead ? now >= high - slack : now <= low + slack;
  const climb = atLimit ? 0 : ahead ? up : -down;
  out.course(t, now, climb);
  const r0 = pid.reset(sp, now, beside);
  const c = climb / beside.factor;
  const integral = (q: number): number => {
    const d = q - t;
    return r0 + c * (d - Ti) + (start - r0 + c * Ti) * Math.exp(-d / Ti);
  };
  const room = climb > 0 ? (high - now) / climb : climb < 0 ? (low - now) / climb : Infinity;
  const end = Math.min(t + room, horizon);
  const gap = (q: number): number => demand(integral(q)) - (now + climb * (q - t));
  return { until: meeting(gap, t, end, ahead ? 1 : -1), integral };
}

const ramping = (s: LoopSpec, t: number): boolean => {
  const { times, values } = s.setPoint;
  const k = times.findIndex((q) => q > t);
  return k > 0 && values[k] !== values[k - 1];
};

/** The first moment at which `gap` has changed its sign, or the end. */
function meeting(gap: (t: number) => number, from: number, to: number, side: 1 | -1): number {
  let lo = from;
  for (let k = 1; k <= LOOKS; k++) {
    let hi = from + ((to - from) * k) / LOOKS;
    if (side * gap(hi) >= 0) {
      lo = hi;
      continue;
    }
    for (let n = 0; n < BISECTIONS; n++) {
      const mid = (lo + hi) / 2;
      if (side * gap(mid) >= 0) lo = mid;
      else hi = mid;
    }
    return Math.max(hi, from + SHORTEST);
  }
  return to;
}

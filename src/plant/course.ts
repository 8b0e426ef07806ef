import type { Change } from '../scenario/scenario.ts';

/** Corners of one quantity over time; two equal times are a jump. */
export interface Line {
  readonly times: number[];
  readonly values: number[];
  readonly clampedAt: number | null;
}

/**
 * One quantity over time: value = base·(1 + Σp) + Σa, where base is the last `to` or `follow` in force, the p are
 * relative and the a absolute changes, each weighted by its ramp. A `to` that ends gives back the base before it.
 *
 * The value is exact at every corner and a straight line between: only where a ramp of the base and a relative
 * ramp overlap does that differ from the product, which bends there.
 */
export function track(
  initial: number,
  changes: readonly Change[],
  horizon: number,
  most = Number.POSITIVE_INFINITY,
): Line {
  const list = [...changes].sort((a, b) => a.at - b.at);
  const corners = list.flatMap((c) => {
    const ends = c.lasts === null ? [] : [c.at + c.lasts, c.at + c.lasts + c.over];
    return [c.at, c.at + c.over, ...ends, ...('follow' in c.how ? c.how.follow.times : [])];
  });
  const times = [...new Set([0, ...corners.filter((t) => t > 0 && t < horizon), horizon])].sort(
    (a, b) => a - b,
  );
  // Only what has begun and is not yet over has a weight: an upset an hour for a year is no sum over the year.
  let inForce: Change[] = [];
  let begun = 0;
  const value = (t: number, side: -1 | 1): number => {
    let base = initial;
    let relative = 1;
    let absolute = 0;
    for (const c of inForce) {
      const weight = share(c, t, side);
      if ('by' in c.how) {
        if (c.how.relative) relative += weight * c.how.by;
        else absolute += weight * c.how.by;
      } else base += weight * (('to' in c.how ? c.how.to : interpolate(c.how.follow, t, side)) - base);
    }
    return base * relative + absolute;
  };
  const line = { times: [] as number[], values: [] as number[] };
  const push = (t: number, v: number): void => {
    line.times.push(t);
    line.values.push(v);
  };
  for (const t of times) {
    for (; begun < list.length && list[begun].at <= t; begun++) inForce.push(list[begun]);
    inForce = inForce.filter((c) => c.lasts === null || c.at + c.lasts + c.over >= t);
    const [left, right] = [value(t, -1), value(t, 1)];
    if (t > 0 && left !== right) push(t, left);
    push(t, right);
  }
  return clampAt(most, clampAt(0, line));
}

/** How far a change is in force, 0 … 1, just before (−1) or just after (1) a time. */
function share(c: Change, t: number, side: -1 | 1): number {
  const ramp = (from: number): number => {
    if (c.over > 0) return Math.min(1, Math.max(0, (t - from) / c.over));
    return t > from || (t === from && side > 0) ? 1 : 0;
  };
  return ramp(c.at) - (c.lasts === null ? 0 : ramp(c.at + c.lasts));
}

function interpolate(
  data: { readonly times: readonly number[]; readonly values: readonly number[] },
  t: number,
  side: -1 | 1,
): number {
  const { times, values } = data;
  let lo = 0;
  let hi = times.length - 1;
  if (t < times[0] || (t === times[0] && times[1] > t)) return values[0];
  if (t > times[hi] || (t === times[hi] && times[hi - 1] < t)) return values[hi];
  // Two equal times are a jump: on its left the row before it counts, on its right the row after.
  while (hi - lo > 1) {
    const mid = (lo + hi) >> 1;
    if (times[mid] < t || (side > 0 && times[mid] === t)) lo = mid;
    else hi = mid;
  }
  if (times[hi] === times[lo]) return side > 0 ? values[hi] : values[lo];
  return values[lo] + ((values[hi] - values[lo]) * (t - times[lo])) / (times[hi] - times[lo]);
}

/** No flow and no concentration is negative, no share more than all: the line is cut there, with corners where it meets. */
function clampAt(
  bound: number,
  line: { times: number[]; values: number[]; clampedAt?: number | null },
): Line {
  const upper = bound > 0;
  const past = (v: number): boolean => (upper ? v > bound : v < bound);
  const before = line.clampedAt ?? null;
  if (!line.values.some(past)) return { ...line, clampedAt: before };
  const times: number[] = [];
  const values: number[] = [];
  let clampedAt: number | null = null;
  const push = (t: number, v: number): void => {
    times.push(t);
    values.push(upper ? Math.min(bound, v) : Math.max(bound, v));
  };
  line.times.forEach((t, i) => {
    const v = line.values[i];
    const [t0, v0] = [line.times[i - 1], line.values[i - 1]];
    const crosses = i > 0 && past(v) !== past(v0) && t > t0;
    // Rounding must not carry the crossing beyond the corner.
    const met = crosses ? Math.min(t, t0 + ((t - t0) * (v0 - bound)) / (v0 - v)) : t;
    if (crosses) push(met, bound);
    if (past(v)) clampedAt ??= met;
    push(t, v);
  });
  return { times, values, clampedAt: before === null ? clampedAt : Math.min(before, clampedAt ?? before) };
}

/** The most that an input can be: a share is at most all. */
export const mostOf = ({ path, unit }: { readonly path: string; readonly unit: string }): number =>
  unit === '' && (path.endsWith('.share') || path.includes('.removal of ')) ? 1 : Number.POSITIVE_INFINITY;

import type { Samples } from '../../scenario/commissioning.ts';
import type { Records } from '../records.ts';
import type { ComesGood } from './good.ts';

/** Two samples a gap apart whose results are equal within the repeatability, and what that proves. */
export interface Pair {
  /** s */
  readonly gap: number;
  /** s: when the second of two is first taken from which on all such pairs are equal; null: not within the run. */
  readonly equalFrom: number | null;
  /** How far from its final value the stream still is then, as a share of that. */
  readonly left: number | null;
  /** What the slowest decay allows: repeatability/(e^(gap/slowest) − 1). */
  readonly allowed: number;
}

/** When samples can be trusted, and which to take. */
export interface SamplePlan {
  readonly repeatability: number;
  readonly gap: number;
  /** By stream, in the order in which they can be trusted; s, null: not within the run. */
  readonly trusted: readonly { readonly path: string; readonly from: number | null }[];
  /** The stream that can be trusted last, on which pairs are judged. */
  readonly last: string;
  readonly pairs: readonly Pair[];
  /** Where to sample, and when [s]; the last two confirm that it is over. */
  readonly points: readonly string[];
  readonly times: readonly number[];
  /** Expected results by time and point, kg/m³. */
  readonly expected: readonly (readonly number[])[];
}

/** Sampling times that a person is asked to keep. */
const MOST = 9;
/** Distances that clocks of people have, s. */
const NEAT = [1, 5, 10, 30, 60, 300, 900, 1800, 3600];

/**
 * Two results y(t) and y(t + gap) that agree within r·y say that the deviation has fallen by less than r·y in between;
 * with a slowest decay of T, δ(t) − δ(t + gap) = δ(t + gap)·(e^(gap/T) − 1), so no more than r/(e^(gap/T) − 1) of the
 * final value is left. With a short gap that proves next to nothing.
 */
export const provedByPair = (repeatability: number, gap: number, slowest: number): number =>
  repeatability / Math.expm1(gap / slowest);

/** @param list quantities to be sampled, solutes of outlets and tanks; @param turned s of the first aqueous turnover. */
export function samplePlan(
  { repeatability, gap }: Samples,
  list: readonly ComesGood[],
  records: Records,
  slowest: number,
  turned: number,
): SamplePlan | null {
  const moving = list.filter((q) => q.change !== null && q.final !== null && q.final !== 0);
  if (moving.length === 0 || !(slowest > 0)) return null;
  const order = [...moving].sort((a, b) => (a.repeatable ?? Infinity) - (b.repeatable ?? Infinity));
  const last = order[order.length - 1];
  const span = records.times[records.times.length - 1];
  const done = last.repeatable ?? span;
  const neat = NEAT.reduce((a, b) => (b <= slowest / 10 ? b : a), NEAT[0]);
  const up = (t: number): number => Math.ceil(t / neat - 1e-9) * neat;
  const times: number[] = [];
  const first = Math.min(turned, done);
  const apart = Math.max(gap, slowest * Math.LN2, (done - first) / (MOST - 2));
  for (let t = first; t < done - apart / 2; t += apart) times.push(up(t));
  times.push(up(done), up(done + gap));
  const distinct = [...new Set(times)];
  const read = (q: ComesGood, t: number): number =>
    interpolate(records, q.quantity.output, t) ?? (q.final as number);
  return {
    repeatability,
    gap,
    trusted: order.map((q) => ({ path: q.quantity.path, from: q.repeatable })),
    last: last.quantity.path,
    pairs: [gap / 4, gap].map((g) => pair(last, g, repeatability, records, slowest, turned)),
    points: order.map((q) => q.quantity.path),
    times: distinct,
    expected: distinct.map((t) => order.map((q) => read(q, t))),
  };
}

function pair(q: ComesGood, gap: number, r: number, records: Records, slowest: number, turned: number): Pair {
  const { times, rows } = records;
  const y = (t: number): number => interpolate(records, q.quantity.output, t) as number;
  let equalFrom: number | null = null;
  for (let k = times.length - 1; k >= 0 && times[k] >= gap + turned; k--) {
    const now = rows[k][q.quantity.output];
    if (Math.abs(now - y(times[k] - gap)) > r * Math.abs(now)) break;
    equalFrom = times[k];
  }
  const final = q.final as number;
  return {
    gap,
    equalFrom,
    left: equalFrom === null ? null : Math.abs(y(equalFrom) - final) / Math.abs(final),
    allowed: provedByPair(r, gap, slowest),
  };
}

/** A straight line between records; null outside of them. */
export function interpolate({ times, rows }: Records, output: number, t: number): number | null {
  let lo = 0;
  let hi = times.length - 1;
  if (!(t >= times[0] && t <= times[hi])) return null;
  while (hi - lo > 1) {
    const mid = (lo + hi) >> 1;
    if (times[mid] <= t) lo = mid;
    else hi = mid;
  }
  const [a, b] = [rows[lo][output], rows[hi][output]];
  return times[hi] === times[lo] ? a : a + ((b - a) * (t - times[lo])) / (times[hi] - times[lo]);
}

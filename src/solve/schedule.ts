import type { F, Schedule } from './system.ts';

/** One input over time: straight lines between corners, constant before the first and after the last. */
export interface Track {
  readonly input: number;
  /** Corner times [s], not decreasing; two equal times are a jump (left value first). */
  readonly times: readonly number[];
  readonly values: readonly number[];
}

/** Corners closer than this many units in the last place are one corner. */
const SAME_CORNER = 100 * Number.EPSILON;

/**
 * Schedule from the initial inputs and tracks for those that move.
 *
 * @throws RangeError where the horizon is not after the start or a track is malformed.
 */
export function makeSchedule(initial: F, tracks: readonly Track[], from: number, to: number): Schedule {
  if (!(to > from)) throw new RangeError(`the end ${to} s is not after the start ${from} s`);
  for (const t of tracks) {
    if (t.times.length === 0) throw new RangeError(`the track of input ${t.input} has no corner`);
    if (t.times.length !== t.values.length || t.times.some((v, i) => i > 0 && v < t.times[i - 1]))
      throw new RangeError(`the track of input ${t.input} is not in the order of time`);
  }
  const corners = tracks.flatMap((t) => t.times.filter((v) => v > from && v < to));
  const times = [from, ...corners, to].sort((a, b) => a - b);
  const distinct = times.filter(
    (v, i) => i === 0 || v - times[i - 1] > SAME_CORNER * Math.max(1, Math.abs(v)),
  );
  if (distinct[distinct.length - 1] < to) distinct[distinct.length - 1] = to;
  const segments = distinct.length - 1;
  const start = tracks.map(() => new Float64Array(segments));
  const slope = tracks.map(() => new Float64Array(segments));
  tracks.forEach((track, q) => {
    let at = 0;
    for (let s = 0; s < segments; s++) {
      const a = distinct[s];
      const b = distinct[s + 1];
      const middle = (a + b) / 2;
      while (at < track.times.length && track.times[at] <= middle) at += 1;
      const rate = slopeBetween(track, at);
      slope[q][s] = rate;
      start[q][s] = valueAt(track, at, a, rate);
    }
  });
  const inputs = tracks.map((t) => t.input);
  return {
    times: Float64Array.from(distinct),
    value(segment, t, w) {
      w.set(initial);
      const dt = t - distinct[segment];
      for (let q = 0; q < inputs.length; q++) w[inputs[q]] = start[q][segment] + slope[q][segment] * dt;
    },
    slope(segment, dw) {
      dw.fill(0);
      for (let q = 0; q < inputs.length; q++) dw[inputs[q]] = slope[q][segment];
    },
  };
}

/** Slope on the piece that ends at corner `next`. */
function slopeBetween(t: Track, next: number): number {
  if (next === 0 || next === t.times.length) return 0;
  return (t.values[next] - t.values[next - 1]) / (t.times[next] - t.times[next - 1]);
}

function valueAt(t: Track, next: number, time: number, rate: number): number {
  if (next === 0) return t.values[0];
  return t.values[next - 1] + rate * (time - t.times[next - 1]);
}

import type { Plant } from '../../plant/assemble.ts';
import type { Begin, Instrument } from '../../scenario/rehearsing.ts';
import { normalNumbers } from '../variation.ts';
import type { Courses } from './course.ts';

/** A result of an instrument. */
export interface Reading {
  /** s at which the sample was taken (a composite: finished), and at which its result is there. */
  readonly sampled: number;
  readonly known: number;
  /** kg/m³ */
  readonly value: number;
}

/** What a sample that ends at a time holds, without noise and bias: the outlet then, or its mean since the sample before. */
export function sampleOf(q: Instrument, output: number, courses: Courses, t: number): number {
  return q.takes === 'grab' ? courses.value(output, t) : courses.mean(output, t - q.every, t);
}

/** Standard deviation [kg/m³] of a reading about a true value. */
export const deviationOf = ({ noise }: Instrument, value: number): number =>
  'share' in noise ? noise.share * Math.abs(value) : noise.absolute;

/**
 * Results of an instrument over a run, on its own clock: samples at first + k·every. Noise goes by the number of the
 * sample, so that two runs meet the same noise; failed results do not appear.
 */
export function readings(plant: Plant, index: number, courses: Courses): Reading[] {
  const q = (plant.scenario.rehearsing?.instruments ?? [])[index];
  const output = plant.system.outputs.findIndex((o) => o.path === q.quantity);
  const normal = normalNumbers(index + 1);
  const fails = normalNumbers(1000 + index);
  const list: Reading[] = [];
  for (let k = 0; q.first + k * q.every <= courses.to; k++) {
    const sampled = q.first + k * q.every;
    const z = normal();
    const failed = q.dropout > 0 && cumulativeNormal(fails()) < q.dropout;
    if (failed) continue;
    const true_ = sampleOf(q, output, courses, sampled);
    list.push({ sampled, known: sampled + q.delay, value: true_ + q.bias + z * deviationOf(q, true_) });
  }
  return list;
}

/** s at which a condition is first met in a run, not before `from`; null: not at all. Then the time after it is added. */
export function metAt(
  plant: Plant,
  { when, after }: Extract<Begin, { when: unknown }>,
  courses: Courses,
  from: number,
): number | null {
  const beyond = (v: number): boolean => (when.side === 'above' ? v > when.value : v < when.value);
  if (when.instrument !== null) {
    const first = readings(plant, when.instrument, courses).find((r) => r.known >= from && beyond(r.value));
    return first === undefined ? null : first.known + after;
  }
  const output = plant.system.outputs.findIndex((o) => o.path === when.quantity);
  const times = [from, ...courses.looks().filter((t) => t > from), courses.to];
  const k = times.findIndex((t) => beyond(courses.value(output, t)));
  if (k <= 0) return k < 0 ? null : from + after;
  let [a, b] = [times[k - 1], times[k]];
  while (b - a > 1) {
    const middle = (a + b) / 2;
    if (beyond(courses.value(output, middle))) b = middle;
    else a = middle;
  }
  return b + after;
}

/**
 * Distribution function of the normal distribution, to 7.5e-8: M. Abramowitz and I. A. Stegun, Handbook of Mathematical
 * Functions (1964), eq. 26.2.17 (from memory).
 */
export function cumulativeNormal(z: number): number {
  const t = 1 / (1 + 0.2316419 * Math.abs(z));
  const series =
    t * (0.31938153 + t * (-0.356563782 + t * (1.781477937 + t * (-1.821255978 + t * 1.330274429))));
  const tail = (Math.exp((-z * z) / 2) / Math.sqrt(2 * Math.PI)) * series;
  return z >= 0 ? 1 - tail : tail;
}

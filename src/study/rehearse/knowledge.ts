import type { Plant } from '../../plant/assemble.ts';
import type { Instrument } from '../../scenario/rehearsing.ts';
import type { Courses } from './course.ts';
import { cumulativeNormal, deviationOf, sampleOf } from './readings.ts';

/** When people can know of an upset by one instrument while nobody does anything. Times in s of the run. */
export interface Knowledge {
  readonly instrument: string;
  readonly quantity: string;
  /** kg/m³ that a reading must pass; null: any departure that noise cannot explain. */
  readonly warn: number | null;
  /** With the luckiest and the unluckiest moment of sampling; null: not within the run. */
  readonly earliest: number | null;
  readonly latest: number | null;
  /** Share of results that would warn without any upset. */
  readonly falseAlarms: number;
}

/** A warning counts as seen when all results so far had it in so many of a hundred cases. */
const SURE = 0.95;
/** Moments of sampling tried within one interval, besides those just beside the passing of the level. */
const PHASES = 60;
/** s beside the passing of the level. */
const BESIDE = 0.5;
/** Without a level: standard deviations of noise, and share of the value, that are no longer taken for nothing. */
const STRIKING = 3;
const VISIBLE = 0.01;

/**
 * How early an instrument tells of an upset that begins at `begins`. A result warns with the probability p = Φ((y − warn)/σ)
 * that its noise does not hide it; what has been seen by the k-th result is 1 − Π(1 − p). Every moment of sampling
 * within the interval is equally possible, so the earliest and the latest of them are told.
 */
export function knowledge(plant: Plant, q: Instrument, courses: Courses, begins: number): Knowledge {
  const output = plant.system.outputs.findIndex((o) => o.path === q.quantity);
  const calm = courses.value(output, courses.from - 1);
  const warns = warning(q, calm);
  const seen = (phase: number): number | null => {
    let unseen = 1;
    for (let t = begins + phase; t <= courses.to; t += q.every) {
      unseen *= 1 - (1 - q.dropout) * warns(sampleOf(q, output, courses, t));
      if (1 - unseen >= SURE) return t + q.delay;
    }
    return null;
  };
  const phases = Array.from({ length: PHASES }, (_, i) => ((i + 1) / PHASES) * q.every);
  // The best moment is just after the level is passed, the worst just before it.
  const passes = firstPassing(q, output, courses, begins, warns);
  if (passes !== null)
    for (const t of [passes + BESIDE, passes - BESIDE]) {
      const phase = (((t - begins) % q.every) + q.every) % q.every;
      phases.push(phase === 0 ? q.every : phase);
    }
  const times = phases.map(seen);
  const known = times.filter((t): t is number => t !== null);
  return {
    instrument: q.name,
    quantity: q.quantity,
    warn: q.warn,
    earliest: known.length === 0 ? null : Math.min(...known),
    latest: known.length < times.length ? null : Math.max(...known),
    falseAlarms: warns(calm),
  };
}

/** Probability that a result warns, by the true value of its sample. */
function warning(q: Instrument, calm: number): (value: number) => number {
  const step = (distance: number, spread: number): number =>
    spread > 0 ? cumulativeNormal(distance / spread) : distance > 0 ? 1 : 0;
  if (q.warn !== null) {
    const { warn } = q;
    const side = warn >= calm ? 1 : -1;
    return (value) => step(side * (value + q.bias - warn), deviationOf(q, value));
  }
  const band = Math.max(STRIKING * deviationOf(q, calm), VISIBLE * Math.abs(calm));
  return (value) => {
    const spread = deviationOf(q, value);
    return step(value - calm - band, spread) + step(calm - value - band, spread);
  };
}

/** s at which a sample first warns as likely as not, sampled at any moment. */
function firstPassing(
  q: Instrument,
  output: number,
  courses: Courses,
  begins: number,
  warns: (value: number) => number,
): number | null {
  const p = (t: number): number => warns(sampleOf(q, output, courses, t));
  const times = [begins, ...courses.looks().filter((t) => t > begins), courses.to];
  const k = times.findIndex((t) => p(t) > 0.5);
  if (k <= 0) return k < 0 ? null : begins;
  let [a, b] = [times[k - 1], times[k]];
  while (b - a > 0.5) {
    const middle = (a + b) / 2;
    if (p(middle) > 0.5) b = middle;
    else a = middle;
  }
  return b;
}

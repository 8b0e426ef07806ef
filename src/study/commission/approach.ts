import type { Plant } from '../../plant/assemble.ts';
import { trainFacts } from '../../plant/facts.ts';
import type { Limit } from '../../scenario/scenario.ts';
import type { Watcher } from '../../solve/integrate.ts';
import type { F } from '../../solve/system.ts';
import { LOOKS, type Point, StepCourse } from './course.ts';
import type { Watched } from './watched.ts';

/** A stretch of values that counts as good: |value − middle| ≤ half, or the good side of a limit. */
export type Band =
  | { readonly middle: number; readonly half: number }
  | { readonly bound: number; readonly side: 'below' | 'above' };

/** One output and the bands that it is held against. */
export interface Line {
  readonly output: number;
  readonly bands: readonly Band[];
  /** Where it comes to rest, and from where it came; null where it does not. */
  readonly final: number | null;
  readonly start: number;
}

/** Farthest beyond its final value, as seen from where it started. */
export interface Beyond {
  readonly by: number;
  readonly time: number;
}

/**
 * Follows outputs through a run and keeps, for each band, when it was last outside: the time from which it is good for
 * good. Looks at each step at equal distances and follows the course between by the polynomial through them, turning
 * points included, so that no time is earlier than a later excursion. Also counts what each train has been fed.
 */
export class ApproachWatch implements Watcher {
  readonly lines: readonly Line[];
  /** Last time outside, by line and band: 0 where it never was, Infinity where it still is. */
  readonly last: readonly Float64Array[];
  readonly beyond: (Beyond | null)[];
  /** By train: when one aqueous inventory of it has passed since the start; Infinity: not yet. */
  readonly turned: Float64Array;
  readonly #plant: Plant;
  readonly #values: Float64Array;
  readonly #x: F;
  readonly #w: F;
  readonly #y: F;
  readonly #flows: readonly number[];
  readonly #held: readonly number[];
  readonly #fed: Float64Array;

  constructor(plant: Plant, lines: readonly Line[]) {
    const { system, scenario: s } = plant;
    this.#plant = plant;
    this.lines = lines;
    this.last = lines.map((l) => new Float64Array(l.bands.length));
    this.beyond = lines.map(() => null);
    this.#values = new Float64Array(lines.length * LOOKS);
    this.#x = new Float64Array(system.places.length);
    this.#w = new Float64Array(system.inputs.length);
    this.#y = new Float64Array(system.outputs.length);
    this.#flows = s.trains.map((t) => system.outputs.findIndex((o) => o.path === `${t.aqueous.from}.flow`));
    this.#held = trainFacts(plant).map((f) => f.held.aqueous);
    this.#fed = new Float64Array(s.trains.length);
    this.turned = new Float64Array(s.trains.length).fill(Number.POSITIVE_INFINITY);
  }

  step: NonNullable<Watcher['step']> = (step, inputs) => {
    const span = step.t1 - step.t0;
    const flows = this.#flows.map(() => new Float64Array(LOOKS));
    for (let i = 0; i < LOOKS; i++) {
      const t = i === LOOKS - 1 ? step.t1 : step.t0 + (span * i) / (LOOKS - 1);
      step.at(t, this.#x);
      inputs.value(t, this.#w);
      this.#plant.system.output(this.#x, this.#w, this.#plant.parameters, this.#y);
      for (let k = 0; k < this.lines.length; k++) this.#values[k * LOOKS + i] = this.#y[this.lines[k].output];
      for (let q = 0; q < flows.length; q++) flows[q][i] = this.#flows[q] < 0 ? 0 : this.#y[this.#flows[q]];
    }
    for (let k = 0; k < this.lines.length; k++) this.#follow(k, step.t0, span);
    for (let q = 0; q < flows.length; q++) this.#feed(q, flows[q], step.t0, span);
  };

  #follow(k: number, t0: number, span: number): void {
    const line = this.lines[k];
    const course = new StepCourse(this.#values, k * LOOKS);
    const points = course.points();
    line.bands.forEach((band, b) => {
      const isOut = outside(band);
      for (let i = points.length - 1; i >= 0; i--) {
        if (!isOut(points[i].v)) continue;
        this.last[k][b] =
          i === points.length - 1
            ? Number.POSITIVE_INFINITY
            : t0 + span * entry(course, band, points[i], points[i + 1]);
        return;
      }
      // Inside from here on: what was outside until this step ended its spell where the step began.
      if (this.last[k][b] === Number.POSITIVE_INFINITY) this.last[k][b] = t0;
    });
    if (line.final === null || line.final === line.start) return;
    const way = Math.sign(line.final - line.start);
    for (const p of points) {
      const by = way * (p.v - line.final);
      if (by > (this.beyond[k]?.by ?? 0)) this.beyond[k] = { by, time: t0 + span * p.s };
    }
  }

  /** Boole's rule of six points, 5h/288·(19, 75, 50, 50, 75, 19). */
  #feed(q: number, flow: F, t0: number, span: number): void {
    const h = span / (LOOKS - 1);
    const ends = 19 * (flow[0] + flow[5]) + 75 * (flow[1] + flow[4]) + 50 * (flow[2] + flow[3]);
    const more = ((5 * h) / 288) * ends;
    const before = this.#fed[q];
    this.#fed[q] += more;
    if (this.turned[q] < Number.POSITIVE_INFINITY || this.#fed[q] < this.#held[q]) return;
    this.turned[q] = t0 + (span * (this.#held[q] - before)) / more;
  }
}

/** Whether a value lies outside a band. */
const outside = (b: Band): ((v: number) => boolean) => {
  if ('half' in b) return (v) => Math.abs(v - b.middle) > b.half;
  return b.side === 'below' ? (v) => v > b.bound : (v) => v < b.bound;
};

const entry = (course: StepCourse, b: Band, from: Point, to: Point): number =>
  'half' in b ? course.entry(b.middle, b.half, from.s, to.s) : course.passes(b.bound, from.s, to.s);

/** The line of a limit. */
export function limitLine(plant: Plant, l: Limit, start: F): Line {
  const output = plant.system.outputs.findIndex((o) => o.path === `${l.stream}.${l.quantity}`);
  return { output, bands: [{ bound: l.value, side: l.side }], final: null, start: start[output] };
}

/** Bands in per cent that people speak of, and two more that show the tail. */
export const PERCENTS = [10, 5, 2, 1] as const;
export const TAIL = [0.5, 0.1] as const;
/** A change below this share of the value is none: a band of one per cent of it would lie in the digits of the run. */
const HARDLY = 1e-3;

/** How far it is from start to final; null where it hardly moves. */
export function changeOf(start: number, final: number, scale: number): number | null {
  const change = Math.abs(final - start);
  return change > HARDLY * Math.max(Math.abs(start), Math.abs(final)) && change > 1e-6 * scale
    ? change
    : null;
}

/**
 * The line of a watched quantity: bands of the change (PERCENTS, then TAIL), of the final value (PERCENTS), and of
 * `repeatability`. `change` may be that of another start, so that two starts are held against one measure.
 */
export function watchedLine(
  q: Watched,
  start: F,
  final: F | null,
  change: number | null,
  repeatability: number | null,
): Line {
  const f = final === null ? null : final[q.output];
  if (f === null) return { output: q.output, bands: [], final: null, start: start[q.output] };
  const around = (half: number): Band => ({ middle: f, half });
  return {
    output: q.output,
    start: start[q.output],
    final: f,
    bands: [
      // Where it hardly moves there is no change to take a part of: any value will do.
      ...[...PERCENTS, ...TAIL].map((p) =>
        around(change === null ? Number.POSITIVE_INFINITY : (p / 100) * change),
      ),
      ...PERCENTS.map((p) => around((p / 100) * Math.abs(f))),
      ...(repeatability === null ? [] : [around(repeatability * Math.abs(f))]),
    ],
  };
}

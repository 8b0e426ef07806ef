import { movedFlows } from '../control/moved.ts';
import type { Course as InputCourse } from '../upsets.ts';
import { upsetSchedule } from '../upsets.ts';
import type { Ground } from './ground.ts';
import type { Judged } from './judge.ts';

/** One output in one run; values at the times of `Shown`, in the System's unit. */
export interface ShownLine {
  /** Name of the answer; null: nothing done. */
  readonly answer: string | null;
  readonly path: string;
  readonly values: readonly number[];
}

/** What pictures draw: courses of the limited quantities in every run, and of levels where they move. */
export interface Shown {
  /** s */
  readonly times: readonly number[];
  readonly limited: readonly ShownLine[];
  readonly levels: readonly ShownLine[];
  /** Flows that loops set, where they move. */
  readonly moved: readonly ShownLine[];
  /** Inputs as upsets and the moves of each answer change them. */
  readonly inputs: readonly { readonly answer: string | null; readonly courses: readonly InputCourse[] }[];
}

const POINTS = 480;
/** A level that moves by less than this share of its scale is at rest. */
const AT_REST = 1e-6;

/** Courses over the span of the rehearsal, from just before the first upset. */
export function shownCourses(
  g: Ground,
  nothing: Judged,
  answers: readonly { readonly name: string; readonly run: Judged }[],
): Shown {
  const runs = [
    { name: null, run: nothing },
    ...answers.map((a) => ({ name: a.name as string | null, run: a.run })),
  ];
  const { from, to } = nothing.courses;
  const worst = runs.flatMap(({ run }) => run.limits.map((l) => l.worst.time));
  const even = Array.from({ length: POINTS + 1 }, (_, i) => from + ((to - from) * i) / POINTS);
  const times = [...new Set([...even, ...worst.filter((t) => t >= from && t <= to)])].sort((a, b) => a - b);
  const outputs = g.plant.system.outputs;
  const limited = [...new Set(g.scenario.limits.map((l) => `${l.stream}.${l.quantity}`))];
  const line = (answer: string | null, run: Judged, output: number): ShownLine => ({
    answer,
    path: outputs[output].path,
    values: times.map((t) => run.courses.value(output, t)),
  });
  const levels = nothing.courses.outputs.filter((o) => /\.(volume|interface|band)$/.test(outputs[o].path));
  const moved = movedFlows(g.plant, g.joined.loops);
  const lines = (list: readonly number[]): ShownLine[] =>
    list
      .filter((o) =>
        runs.some(({ run }) => {
          const { least, most } = run.courses.extremes(o);
          return most - least > AT_REST * outputs[o].scale;
        }),
      )
      .flatMap((o) => runs.map(({ name, run }) => line(name, run, o)));
  return {
    times,
    limited: runs.flatMap(({ name, run }) =>
      limited.map((path) =>
        line(
          name,
          run,
          outputs.findIndex((o) => o.path === path),
        ),
      ),
    ),
    levels: lines(levels),
    moved: lines(moved.map((q) => q.output)),
    inputs: runs.map(({ name, run }) => ({
      answer: name,
      courses: upsetSchedule(g.plant, [...g.background, ...run.changes], g.horizon).courses.filter(
        (c) => !moved.some((q) => q.quantity === c.quantity),
      ),
    })),
  };
}

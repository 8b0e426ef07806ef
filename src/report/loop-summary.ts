import type { LoopReport } from '../study/control/report.ts';
import type { LoopAtRest } from '../study/control/settle.ts';

/** What loops did in a run, SI. */
export const loopFigures = (r: LoopReport): object => ({
  name: r.name,
  automatic_at_end: r.automaticAtEnd,
  output_at_end: r.outputAtEnd,
  measurement_at_end_kg_per_m3: r.measurementAtEnd,
  travel: r.travel,
  automatic_s: r.automatic,
  at_limit_s: r.atLimit,
  slewing_s: r.slewing,
});

/** The same with what was measured; a failed result is null. */
export const loopsOfRun = (list: readonly LoopReport[]): object[] =>
  list.map((r) => ({
    ...loopFigures(r),
    results: r.results.map((q) => ({ time_s: q.time, value_kg_per_m3: q.value })),
  }));

export const loopsAtRest = (list: readonly LoopAtRest[]): object[] =>
  list.map((q) => ({
    name: q.name,
    automatic: q.automatic,
    measurement_kg_per_m3: q.measurement,
    set_point_kg_per_m3: q.setPoint,
    output: q.output,
    binds: q.binds,
  }));

/** The unit in which a span of time is shown. */
export interface TimeUnit {
  readonly name: string;
  readonly seconds: number;
}

export function timeUnit(span: number): TimeUnit {
  if (span >= 10 * 86400) return { name: 'd', seconds: 86400 };
  if (span >= 3 * 3600) return { name: 'h', seconds: 3600 };
  if (span >= 180) return { name: 'min', seconds: 60 };
  return { name: 's', seconds: 1 };
}

/** A tick distance from the usual ones that gives about `wanted` ticks. */
export function tickStep(span: number, wanted: number, unit: TimeUnit): number {
  const steps =
    unit.name === 'h' ? [0.5, 1, 2, 3, 4, 6, 12, 24, 48] : [0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 50, 100, 200];
  return steps.find((s) => span / s <= wanted) ?? span / wanted;
}

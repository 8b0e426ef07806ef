/** Corners of a quantity over time: straight between them, constant outside; two equal times are a jump. */
export interface Line {
  readonly times: readonly number[];
  readonly values: readonly number[];
}

/** The last corner at or before `t`; −1: none. Of two at one time the later counts. */
function before(line: Line, t: number): number {
  let k = -1;
  while (k + 1 < line.times.length && line.times[k + 1] <= t) k += 1;
  return k;
}

/** Value just after `t`. */
export function valueAt(line: Line, t: number): number {
  const k = before(line, t);
  if (k < 0) return line.values[0];
  if (k + 1 === line.times.length) return line.values[k];
  return line.values[k] + slopeOf(line, t) * (t - line.times[k]);
}

/** Slope just after `t`. */
export function slopeOf(line: Line, t: number): number {
  const k = before(line, t);
  if (k < 0 || k + 1 === line.times.length) return 0;
  return (line.values[k + 1] - line.values[k]) / (line.times[k + 1] - line.times[k]);
}

/** The next corner after `t`, or Infinity. */
export const cornerAfter = (line: Line, t: number): number => line.times.find((c) => c > t) ?? Infinity;

import { BadData, elapsed, headerUnit, numbers, readTable } from './csv.ts';

/** A step test on a real plant: s after the step, deviation from before it in SI, and the step itself. */
export interface ReadStepTest {
  readonly step: number;
  readonly times: readonly number[];
  readonly values: readonly number[];
}

/** Changes of the output below this share of its largest are no step. */
const STEADY = 1e-3;

/**
 * A CSV file with the time in the first column, the output of the loop in the second (a ratio as a plain number, or a
 * flow with its unit) and the measured concentration in the third. Before the step there is at least one row.
 *
 * @throws BadData where it is not such a file, or the output does not step.
 */
export function readStepTest(file: string): ReadStepTest {
  const t = readTable('.', file);
  if (t.header.length < 3)
    throw new BadData(
      `${t.file}:1: expected three columns: time, output, measurement; got ${t.header.length}`,
    );
  const clock = elapsed(t, 0);
  const unitless = !/[[(].*[\])]|m\^?3|m³|L\//.test(t.header[1]);
  const factor = unitless || /\[-\]/.test(t.header[1]) ? 1 : headerUnit(t, 1, 'a flow by volume').factor;
  const output = numbers(t, 1).map((v) => v * factor);
  const content = headerUnit(t, 2, 'a concentration').factor;
  const measured = numbers(t, 2).map((v) => v * content);
  const size = output.reduce((m, v) => Math.max(m, Math.abs(v - output[0])), 0);
  const at = output.findIndex((v) => Math.abs(v - output[0]) > 0.5 * size);
  if (at < 1 || !(size > STEADY * Math.abs(output[0])))
    throw new BadData(
      `${t.file}:${t.rows[0].line}: the output does not step; begin the file with rows before the step`,
    );
  const mean = (list: readonly number[]): number => list.reduce((s, v) => s + v, 0) / list.length;
  const before = mean(measured.slice(0, at));
  const rest = output.slice(at);
  const moved = rest.findIndex((v) => Math.abs(v - rest[0]) > 0.2 * size);
  const end = moved < 0 ? output.length : at + moved;
  if (end - at < 8)
    throw new BadData(
      `${t.file}:${t.rows[at].line}: only ${end - at} rows after the step, before the output moves again; hold it longer, or take more samples`,
    );
  return {
    step: mean(output.slice(at, end)) - mean(output.slice(0, at)),
    times: clock.slice(at, end).map((v) => v - clock[at]),
    values: measured.slice(at, end).map((v) => v - before),
  };
}

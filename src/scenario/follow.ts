import type { z } from 'zod';
import {
  BadData,
  columnIndex,
  elapsed,
  headerUnit,
  optionalNumbers,
  readTable,
  stamped,
  type Table,
} from './csv.ts';
import { either, figure, object, positive, text, word } from './fields.ts';
import { clockWords } from './moment.ts';
import type { Kind } from './units.ts';

/** `{file: plant.csv, column: "Cu g/L", gaps: hold, gap_from: 30 min, refuse_gap: 4 h}` */
export const followSchema = object({
  file: text(),
  column: text(),
  time: text().optional().describe('column of the time; the first by default'),
  by_clock: either.optional().describe('time stamps are the plant clock of time_zero'),
  gaps: word(['interpolate', 'hold']).optional().describe('what lies between two rows that are far apart'),
  gap_from: figure(['a time'], positive).optional().describe('rows farther apart than this are a gap'),
  refuse_gap: figure(['a time'], positive).optional().describe('a longer gap is refused'),
});
export type RawFollow = z.output<typeof followSchema>;

/** Plant data over time: s from the start of the file's clock or of the run, and the unit's own values as read. */
export interface Data {
  readonly table: Table;
  readonly kind: Kind;
  readonly times: readonly number[];
  readonly values: readonly number[];
}

/** Values that differ from a straight line by less than this share of the largest lie on it. */
const COLLINEAR = 1e-9;

/**
 * One column of a historian export over time. A blank cell is a value that is missing; with `gaps: hold` the last value
 * holds over blanks and over rows farther apart than `gap_from`, up to a jump; else a straight line leads across.
 *
 * @param zero ms of the plant's clock at time zero, for `by_clock`.
 * @throws BadData naming the line: of a cell that is no number, a gap longer than `refuse_gap`, stamps without a clock.
 */
export function readFollow(
  raw: RawFollow,
  folder: string,
  kinds: readonly Kind[],
  zero: number | null,
): Data {
  const t = readTable(folder, raw.file);
  const column = columnIndex(t, raw.column);
  const { kind, factor } = headerUnit(t, column, ...kinds);
  const timeColumn = raw.time === undefined ? 0 : columnIndex(t, raw.time);
  const elapsedTimes = elapsed(t, timeColumn);
  const shift = raw.by_clock ? clockShift(t, timeColumn, zero) : 0;
  const rows = optionalNumbers(t, column).flatMap((value, i) =>
    value === null
      ? []
      : [{ time: elapsedTimes[i] + shift, value: value * factor, line: t.rows[i].line, row: i }],
  );
  if (rows.length < 2)
    throw new BadData(`${t.file}:${t.rows[0].line}: the only row; two or more make a course`);
  const low = rows.find((r) => r.value < 0);
  if (low) throw new BadData(`${t.file}:${low.line}: must not be negative, got ${low.value / factor}`);
  const times: number[] = [];
  const values: number[] = [];
  rows.forEach((r, i) => {
    const last = rows[i - 1];
    if (last) {
      const apart = r.time - last.time;
      const limit = raw.refuse_gap?.value ?? Infinity;
      if (apart > limit)
        throw new BadData(
          `${t.file}:${r.line}: a gap of ${clockWords(apart)} before this row, longer than ${raw.refuse_gap?.text}`,
        );
      const isGap = r.row - last.row > 1 || apart > (raw.gap_from?.value ?? Infinity);
      if (isGap && raw.gaps === 'hold') {
        times.push(r.time);
        values.push(last.value);
      }
    }
    times.push(r.time);
    values.push(r.value);
  });
  return { table: t, kind, ...straightened(times, values) };
}

function clockShift(t: Table, column: number, zero: number | null): number {
  const first = stamped(t, column);
  if (first === null)
    throw new BadData(`${t.file}:${t.rows[0].line}: by_clock needs time stamps such as 2026-03-01T06:00`);
  if (zero === null) throw new BadData("by_clock needs time_zero, such as '2026-03-01 06:00'");
  return (first - zero) / 1e3;
}

/**
 * Without the rows that lie on the straight line between others: from each row kept, the line goes on as long as some
 * slope passes all rows since within the tolerance. Jumps (two equal times) stay.
 */
export function straightened(
  times: readonly number[],
  values: readonly number[],
): { times: number[]; values: number[] } {
  const within = COLLINEAR * values.reduce((m, v) => Math.max(m, Math.abs(v)), 0);
  const keep = [0];
  let anchor = 0;
  let [least, most] = [-Infinity, Infinity];
  for (let i = 1; i < times.length; i++) {
    const span = times[i] - times[anchor];
    const slope = (values[i] - values[anchor]) / span;
    if (span > 0 && slope >= least && slope <= most) {
      least = Math.max(least, slope - within / span);
      most = Math.min(most, slope + within / span);
      continue;
    }
    if (i - 1 > anchor) keep.push(i - 1);
    anchor = i - 1;
    const own = times[i] - times[anchor];
    if (own > 0) {
      const next = (values[i] - values[anchor]) / own;
      [least, most] = [next - within / own, next + within / own];
    } else {
      keep.push(i);
      anchor = i;
      [least, most] = [-Infinity, Infinity];
    }
  }
  const end = times.length - 1;
  if (keep[keep.length - 1] !== end) keep.push(end);
  return { times: keep.map((i) => times[i]), values: keep.map((i) => values[i]) };
}

import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import fc from 'fast-check';
import { afterAll, describe, expect, it } from 'vitest';
import { track } from '../../src/plant/course.ts';
import { straightened } from '../../src/scenario/follow.ts';
import { readScenario } from '../../src/scenario/read.ts';
import { answer, exchange, sound } from './wrong.ts';

const folder = mkdtempSync(join(tmpdir(), 'upsettle-'));
afterAll(() => rmSync(folder, { recursive: true }));

const text = (follow: string, more = ''): string =>
  exchange(
    sound,
    '{at: 2 h, change: liquor.copper, by: +35 %}',
    `{at: 1 h, change: liquor.copper, follow: {file: plant.csv, column: 'Cu [g/L]'${follow}}}`,
  ) + more;

/** The feed at times [h] when it follows a file. */
function feed(csv: string, follow: string, times: readonly number[], more = ''): number[] {
  writeFileSync(join(folder, 'plant.csv'), csv);
  const { scenario: s } = readScenario(text(follow, more), { file: 'a.yaml', folder });
  const line = track(5.2, s.upsets, 10 * 3600);
  return times.map((h) => {
    const t = h * 3600;
    const k = line.times.findIndex((q) => q >= t);
    if (line.times[k] === t) return line.values[line.times.lastIndexOf(t)];
    const [a, b] = [line.times[k - 1], line.times[k]];
    return line.values[k - 1] + ((line.values[k] - line.values[k - 1]) * (t - a)) / (b - a);
  });
}

const gappy = 'time [h],Cu [g/L]\n0,5\n1,6\n2,\n3,8\n3.5,9\n7,2\n';

describe('plant data with gaps', () => {
  it('leads straight across them by default', () => {
    expect(feed(gappy, '', [1.5, 2, 3, 4, 6.25])).toEqual([5.5, 6, 7, 8, 5.5]);
  });

  it('holds the last value over blanks, and over rows far apart, up to a jump', () => {
    const at = [2, 3.9, 4, 4.25, 6.25, 7.9, 8];
    expect(feed(gappy, ', gaps: hold', at)).toEqual([6, 6, 8, 8.5, 5.5, expect.closeTo(2.2, 9), 2]);
    expect(feed(gappy, ', gaps: hold, gap_from: 90 min', at)).toEqual([6, 6, 8, 8.5, 9, 9, 2]);
  });

  it('refuses a longer gap than is allowed, by its line', () => {
    writeFileSync(join(folder, 'plant.csv'), gappy);
    expect(answer(text(', refuse_gap: 3 h'), folder)).toEqual([
      expect.stringMatching(
        /^wrong\.yaml:\d+:\d+ upsets\.0\.follow: plant\.csv:7: a gap of 3 h 30 min before this row, longer than 3 h$/,
      ),
    ]);
  });

  it('names a bad value by its line', () => {
    for (const [cell, words] of [
      ['bad', "plant.csv:4: expected a number in column 'Cu [g/L]', got 'bad'"],
      ['-1', 'plant.csv:4: must not be negative, got -1'],
      ['6,5', 'plant.csv:4: expected 2 cells as in the header, got 3'],
    ]) {
      writeFileSync(join(folder, 'plant.csv'), `time [h],Cu [g/L]\n0,5\n1,6\n2,${cell}\n3,8\n`);
      expect(answer(text(''), folder).join()).toContain(words);
    }
  });
});

describe('plant data by the clock', () => {
  const stamps = 'time,Cu [g/L]\n2026-03-01T08:00,5\n2026-03-01T09:00,6\n2026-03-01T10:30,9\n';

  it('counts stamps from the first row, or from time_zero', () => {
    expect(feed(stamps, '', [1.5, 2])).toEqual([5.5, 6]);
    expect(feed(stamps, ', by_clock: true', [2.5, 3], 'time_zero: 2026-03-01 06:00\n')).toEqual([5.5, 6]);
  });

  it('needs both', () => {
    writeFileSync(join(folder, 'plant.csv'), stamps);
    expect(answer(text(', by_clock: true'), folder).join()).toContain('by_clock needs time_zero');
    writeFileSync(join(folder, 'plant.csv'), gappy);
    expect(answer(text(', by_clock: true', 'time_zero: 2026-03-01 06:00\n'), folder).join()).toContain(
      'by_clock needs time stamps',
    );
  });
});

describe('rows on a straight line', () => {
  it('are left out, and nothing else changes', () => {
    const times = Array.from({ length: 1001 }, (_, i) => i);
    const made = straightened(
      times,
      times.map((t) => (t < 400 ? 5 : t < 700 ? 5 + (t - 400) / 7 : 9)),
    );
    expect(made.times).toEqual([0, 400, 699, 700, 1000]);
  });

  it('every row still lies on the course, jumps included', () => {
    fc.assert(
      fc.property(
        fc.array(fc.tuple(fc.integer({ min: 0, max: 3 }), fc.integer({ min: 0, max: 4 })), {
          minLength: 2,
          maxLength: 40,
        }),
        (list) => {
          let t = 0;
          const times: number[] = [];
          const values: number[] = [];
          for (const [gap, v] of list) {
            // At most two rows share a time.
            t += times.length > 1 && times.at(-1) === times.at(-2) ? Math.max(1, gap) : gap;
            times.push(t);
            values.push(v);
          }
          const made = straightened(times, values);
          const key = (
            q: { times: readonly number[]; values: readonly number[] },
            at: number,
            side: 'left' | 'right',
          ): number => {
            const k = side === 'left' ? q.times.indexOf(at) : q.times.lastIndexOf(at);
            if (k >= 0) return q.values[k];
            const i = q.times.findIndex((x) => x > at);
            return (
              q.values[i - 1] +
              ((q.values[i] - q.values[i - 1]) * (at - q.times[i - 1])) / (q.times[i] - q.times[i - 1])
            );
          };
          for (const at of times)
            for (const side of ['left', 'right'] as const)
              expect(key(made, at, side)).toBeCloseTo(key({ times, values }, at, side), 6);
        },
      ),
      { seed: 9 },
    );
  });
});

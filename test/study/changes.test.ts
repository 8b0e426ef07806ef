import { describe, expect, test } from 'vitest';
import { assemble } from '../../src/plant/assemble.ts';
import { type Line, track } from '../../src/plant/course.ts';
import type { Change } from '../../src/scenario/scenario.ts';
import { upsetSchedule } from '../../src/study/upsets.ts';
import { cascade, ideal } from './cascade.ts';

type How = Change['how'];
const HORIZON = 100;
const change = (at: number, how: How, over = 0, lasts: number | null = null): Change => ({
  at,
  quantity: 'feed.s',
  how,
  over,
  lasts,
  words: `from ${at}`,
});
const to = (v: number): How => ({ to: v });
const percent = (v: number): How => ({ by: v / 100, relative: true });
const by = (v: number): How => ({ by: v, relative: false });

/** The value of a line just before and just after a time. */
function sides(line: Line, t: number): [number, number] {
  const { times, values } = line;
  const after = times.findIndex((v) => v > t);
  const before = times.findLastIndex((v) => v < t);
  const between = (i: number, j: number): number =>
    values[i] + ((values[j] - values[i]) * (t - times[i])) / (times[j] - times[i]);
  const at = times.indexOf(t);
  if (at < 0) return [between(before, after), between(before, after)];
  return [values[at], values[times.lastIndexOf(t)]];
}
const course = (initial: number, ...changes: Change[]) => {
  const line = track(initial, changes, HORIZON);
  return (t: number): [number, number] =>
    sides(line, t).map((v) => Number(v.toPrecision(12))) as [number, number];
};

describe('one change', () => {
  test('to, at once, until the end', () => {
    const v = course(4, change(10, to(6)));
    expect(v(0)).toEqual([4, 4]);
    expect(v(10)).toEqual([4, 6]);
    expect(v(100)).toEqual([6, 6]);
  });

  test('to, over a ramp and out again over the same: for counts from at to the start of the return', () => {
    const v = course(4, change(10, to(6), 8, 30));
    expect(v(10)).toEqual([4, 4]);
    expect(v(14)).toEqual([5, 5]);
    expect(v(18)).toEqual([6, 6]);
    expect(v(40)).toEqual([6, 6]);
    expect(v(42)).toEqual([5.5, 5.5]);
    expect(v(48)).toEqual([4, 4]);
    expect(v(60)).toEqual([4, 4]);
  });

  test('a return that begins before the ramp is done turns back from where it is', () => {
    // In over 20, return after 10: half of the change is reached, held, and taken back.
    const v = course(4, change(10, to(8), 20, 10));
    expect(v(20)).toEqual([6, 6]);
    expect(v(25)).toEqual([6, 6]);
    expect(v(30)).toEqual([6, 6]);
    expect(v(35)).toEqual([5, 5]);
    expect(v(40)).toEqual([4, 4]);
  });

  test('by a share of the base, and by an amount', () => {
    expect(course(4, change(10, percent(35)))(50)).toEqual([5.4, 5.4]);
    expect(course(4, change(10, by(-0.5), 0, 5))(12)).toEqual([3.5, 3.5]);
    expect(course(4, change(10, by(-0.5), 0, 5))(15)).toEqual([3.5, 4]);
  });

  test('at time zero it is there from the start', () => {
    const line = track(4, [change(0, to(6))], HORIZON);
    expect(line).toEqual({ times: [0, HORIZON], values: [6, 6], clampedAt: null });
  });

  test('beyond the horizon it does nothing, and one that straddles it is cut', () => {
    expect(course(4, change(150, to(6)))(100)).toEqual([4, 4]);
    const v = course(4, change(90, to(6), 20));
    expect(v(95)).toEqual([4.5, 4.5]);
    expect(v(100)).toEqual([5, 5]);
  });

  test('follow goes straight between its points, keeps the first before and the last behind them', () => {
    const v = course(4, change(10, { follow: { times: [20, 30, 50], values: [5, 9, 7] } }, 0, 60));
    expect(v(10)).toEqual([4, 5]);
    expect(v(20)).toEqual([5, 5]);
    expect(v(25)).toEqual([7, 7]);
    expect(v(40)).toEqual([8, 8]);
    expect(v(60)).toEqual([7, 7]);
    expect(v(70)).toEqual([7, 4]);
  });
});

describe('several changes of one quantity', () => {
  test('shares are of the base and add: +35 % and +15 % are +50 %', () => {
    const v = course(4, change(10, percent(35), 0, 40), change(20, percent(15), 0, 40));
    expect(v(15)[0]).toBe(5.4);
    expect(v(30)[0]).toBe(6);
    expect(v(55)[0]).toBe(4.6);
    expect(v(60)).toEqual([4.6, 4]);
  });

  test('shares multiply the base alone, amounts are added to the product', () => {
    const v = course(4, change(10, percent(50)), change(20, by(1)), change(30, to(10)));
    expect(v(25)[0]).toBe(7);
    expect(v(35)[0]).toBe(16);
  });

  test('the last to in force is the base; one that ends gives back the base before it', () => {
    const v = course(4, change(10, to(6), 0, 60), change(20, to(9), 0, 20));
    expect(v(20)).toEqual([6, 9]);
    expect(v(40)).toEqual([9, 6]);
    expect(v(70)).toEqual([6, 4]);
  });

  test('the order of the list does not matter, that of the times does', () => {
    const a = change(10, to(6));
    const b = change(20, to(9));
    expect(track(4, [b, a], HORIZON)).toEqual(track(4, [a, b], HORIZON));
    expect(course(4, b, a)(30)[0]).toBe(9);
  });

  test('overlapping ramps add their slopes', () => {
    const v = course(4, change(10, by(2), 20), change(20, by(-1), 10));
    expect(v(20)[0]).toBe(5);
    expect(v(25)[0]).toBe(5);
    expect(v(30)[0]).toBe(5);
    expect(v(15)[0]).toBe(4.5);
  });

  test('at the corners of two ramps that overlap, base and share count as they are', () => {
    // Base 4 → 8 over 10 … 20, +50 % over 15 … 25: at 15 6·1, at 20 8·1.25, at 25 8·1.5.
    const v = course(4, change(10, to(8), 10), change(15, percent(50), 10));
    expect(v(15)[0]).toBe(6);
    expect(v(20)[0]).toBe(10);
    expect(v(25)[0]).toBe(12);
  });

  test('a change on top of a follow', () => {
    const v = course(4, change(0, { follow: { times: [0, 100], values: [2, 12] } }), change(50, percent(10)));
    expect(v(25)[0]).toBe(4.5);
    expect(v(50)).toEqual([7, 7.7]);
    expect(v(100)[0]).toBe(13.2);
  });
});

describe('nothing is negative', () => {
  test('a line below zero is cut where it meets zero, and the time is told', () => {
    const line = track(4, [change(10, by(-8), 20, 40)], HORIZON);
    // 4 − 8·(t − 10)/20 meets zero at t = 20; the way back, from t = 50, at 60.
    expect(line.clampedAt).toBe(20);
    expect(sides(line, 15)[0]).toBeCloseTo(2, 12);
    expect(sides(line, 20)[0]).toBeCloseTo(0, 12);
    expect(sides(line, 40)).toEqual([0, 0]);
    expect(sides(line, 60)[0]).toBeCloseTo(0, 12);
    expect(sides(line, 65)[0]).toBeCloseTo(2, 12);
    expect(Math.min(...line.values)).toBe(0);
  });

  test('a jump below zero stays a jump to zero', () => {
    const line = track(4, [change(10, percent(-150), 0, 20)], HORIZON);
    expect(sides(line, 10)).toEqual([4, 0]);
    expect(sides(line, 30)).toEqual([0, 4]);
    expect(line.clampedAt).toBe(10);
  });

  test('a plant is told which quantity was held at zero', () => {
    const s = cascade({
      stages: 1,
      aqueous: 0.01,
      organic: 0.01,
      feed: 4,
      law: { law: 'ratio', ratio: 1 },
      transfer: ideal(0.01, 0.01),
      horizon: HORIZON,
    });
    const plant = assemble(s);
    const { schedule, courses, shades, clamped } = upsetSchedule(
      plant,
      [change(10, percent(-150), 0, 20), change(60, to(5), 5, 30)],
      HORIZON,
    );
    expect(clamped).toEqual([{ quantity: 'feed.s', time: 10, at: 0 }]);
    expect(shades.map(({ from, to: end }) => [from, end])).toEqual([
      [10, 30],
      [60, 95],
    ]);
    expect(courses).toHaveLength(1);
    expect(courses[0]).toMatchObject({ quantity: 'feed.s', unit: 'kg/m^3' });
    // The schedule shows the same, segment by segment, and leaves the other inputs alone.
    const input = plant.system.inputs.findIndex((i) => i.path === 'feed.s');
    const w = new Float64Array(plant.system.inputs.length);
    expect([...schedule.times]).toEqual([0, 10, 30, 60, 65, 90, 95, 100]);
    const values = [4, 0, 4, 4.5, 5, 4.5, 4];
    values.forEach((v, k) => {
      const middle = (schedule.times[k] + schedule.times[k + 1]) / 2;
      schedule.value(k, middle, w);
      expect(w[input]).toBeCloseTo(v, 12);
      w.forEach((other, i) => {
        if (i !== input) expect(other).toBe(plant.inputs[i]);
      });
    });
  });
});

import type { Plant } from '../plant/assemble.ts';
import { mostOf, track } from '../plant/course.ts';
import { isLoopChange } from '../scenario/loop-changes.ts';
import type { Change } from '../scenario/scenario.ts';
import { makeSchedule, type Track } from '../solve/schedule.ts';
import type { Schedule } from '../solve/system.ts';

/** A stretch of time in which a change is in force, ramps included. */
export interface Shade {
  readonly from: number;
  readonly to: number;
  readonly words: string;
}

/** An input that changes: its exact course, in SI. Two equal times are a jump. */
export interface Course {
  readonly quantity: string;
  readonly unit: string;
  readonly times: readonly number[];
  readonly values: readonly number[];
}

export interface Upsets {
  readonly schedule: Schedule;
  readonly courses: readonly Course[];
  readonly shades: readonly Shade[];
  /** Quantities that a change would have made negative, or shares of more than all, from when and at what they were held. */
  readonly clamped: readonly { readonly quantity: string; readonly time: number; readonly at: number }[];
}

/**
 * Upsets → schedule of the inputs from 0 to the horizon. What goes on in the background (feeds that vary at random)
 * is in the schedule and casts no shade.
 */
export function upsetSchedule(
  plant: Plant,
  stated: readonly Change[],
  horizon: number,
  background: readonly Change[] = [],
): Upsets {
  const changes = [...background, ...stated].filter((c) => !isLoopChange(plant.scenario.loops, c));
  const clamped: { quantity: string; time: number; at: number }[] = [];
  const quantities = [...new Set(changes.map((c) => c.quantity))];
  const tracks = quantities.map((quantity): Track => {
    const input = plant.system.inputs.findIndex((i) => i.path === quantity);
    const own = changes.filter((c) => c.quantity === quantity);
    const most = mostOf(plant.system.inputs[input]);
    const line = track(plant.inputs[input], own, horizon, most);
    if (line.clampedAt !== null) clamped.push({ quantity, time: line.clampedAt, at: most === 1 ? 1 : 0 });
    return { input, times: line.times, values: line.values };
  });
  // One upset can stand for changes of several inputs: it is one shade.
  const upsets = stated.filter((c, i) => stated.findIndex((o) => o.words === c.words && o.at === c.at) === i);
  const shades = upsets.map((c): Shade => {
    const data = 'follow' in c.how ? c.how.follow.times : [];
    const end =
      c.lasts !== null ? c.at + c.lasts + c.over : data.length > 0 ? data[data.length - 1] : horizon;
    return { from: c.at, to: Math.min(end, horizon), words: c.words };
  });
  const courses = tracks.map(({ input, times, values }): Course => {
    const { path, unit } = plant.system.inputs[input];
    return { quantity: path, unit, times, values };
  });
  return { schedule: makeSchedule(plant.inputs, tracks, 0, horizon), courses, shades, clamped };
}

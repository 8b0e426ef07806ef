import type { Plant } from '../../plant/assemble.ts';
import { mostOf, track } from '../../plant/course.ts';
import { isLoopChange } from '../../scenario/loop-changes.ts';
import type { Change } from '../../scenario/scenario.ts';
import { makeSchedule, type Track } from '../../solve/schedule.ts';
import type { F, Schedule } from '../../solve/system.ts';

/** s after which no move changes anything any more. */
export function movesEnd(moves: readonly Change[]): number {
  return Math.max(
    0,
    ...moves.map((m) => {
      const data = 'follow' in m.how ? (m.how.follow.times.at(-1) ?? 0) : 0;
      return m.lasts === null ? Math.max(m.at + m.over, data) : m.at + m.lasts + m.over;
    }),
  );
}

/** The inputs of a plant under moves, from one time to another. */
export function movesSchedule(plant: Plant, moves: readonly Change[], from: number, to: number): Schedule {
  const plain = moves.filter((c) => !isLoopChange(plant.scenario.loops, c));
  const quantities = [...new Set(plain.map((c) => c.quantity))];
  const tracks = quantities.map((quantity): Track => {
    const input = plant.system.inputs.findIndex((i) => i.path === quantity);
    const own = plain.filter((c) => c.quantity === quantity);
    const line = track(plant.inputs[input], own, to, mostOf(plant.system.inputs[input]));
    return { input, times: line.times, values: line.values };
  });
  return makeSchedule(plant.inputs, tracks, from, to);
}

/** The inputs when all moves are over. */
export function inputsAfter(plant: Plant, moves: readonly Change[]): F {
  const w = Float64Array.from(plant.inputs);
  if (moves.length === 0) return w;
  const end = movesEnd(moves) + 1;
  const schedule = movesSchedule(plant, moves, 0, end);
  schedule.value(schedule.times.length - 2, end, w);
  return w;
}

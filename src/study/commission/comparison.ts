import type { Plant } from '../../plant/assemble.ts';
import type { Compare } from '../../scenario/commissioning.ts';
import { outputsAt } from '../records.ts';
import type { Kept } from './kept.ts';

/** A run against the samples of a plant. */
export interface Comparison {
  readonly file: string;
  readonly columns: readonly Compared[];
}

export interface Compared {
  readonly path: string;
  readonly unit: string;
  /** s, and in `unit`. */
  readonly times: readonly number[];
  readonly plant: readonly number[];
  readonly model: readonly number[];
  /** Mean of model less plant. */
  readonly bias: number;
  /** Root of the mean square of model less plant. */
  readonly rmse: number;
  /** Mean of the plant's results, for scale. */
  readonly mean: number;
}

/** `kept`: the run at the times of the samples. */
export function compareWith(plant: Plant, data: Compare, kept: ReadonlyMap<number, Kept>): Comparison {
  const columns = data.columns.flatMap(({ quantity, times, values }): Compared[] => {
    const output = plant.system.outputs.findIndex((o) => o.path === quantity);
    if (output < 0) return [];
    const model = times.map((t) => modelAt(plant, kept.get(t) as Kept, output));
    const off = model.map((v, i) => v - values[i]);
    const mean = (list: readonly number[]): number => list.reduce((s, v) => s + v, 0) / list.length;
    return [
      {
        path: quantity,
        unit: plant.system.outputs[output].unit,
        times,
        plant: values,
        model,
        bias: mean(off),
        rmse: Math.sqrt(mean(off.map((v) => v * v))),
        mean: mean(values),
      },
    ];
  });
  return { file: data.file, columns };
}

const modelAt = (plant: Plant, { state, inputs }: Kept, output: number): number =>
  outputsAt(plant, state, inputs)[output];

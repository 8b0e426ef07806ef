import type { F } from './system.ts';

/** Sets an input from `t` on to a straight line: value + slope·(time − t). It holds until the next call. */
export type Drive = (input: number, t: number, value: number, slope: number) => void;

/**
 * A sampled part of the plant: an analyser, a controller, a station. It acts at moments known beforehand. Reading
 * outputs is taken from the dense output of whatever step covers the moment and disturbs nothing; at a moment at which
 * it may move an input the run lands exactly and begins anew.
 */
export interface Device {
  readonly name: string;
  /** Called once before the first step: sets what the inputs are from the start on. */
  begin(t: number, y: F, w: F, drive: Drive): void;
  /** s of the next reading; Infinity for none. */
  nextRead(): number;
  /** Takes a reading at `nextRead()`. It may only drive inputs that no balance depends on. */
  read(t: number, y: F, w: F, drive: Drive): void;
  /** s of the next move; Infinity for none. */
  nextMove(): number;
  /** Acts at `nextMove()`; whether an input changed its course. */
  move(t: number, y: F, w: F, drive: Drive): boolean;
  /** Follows the outputs between two readings, for means over time; `at` gives them anywhere in between. */
  pass?(from: number, to: number, at: (t: number) => F): void;
}

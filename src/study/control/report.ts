import type { LoopHistory, SampledLoop } from '../../control/loop.ts';
import type { Run } from '../../solve/integrate.ts';
import type { ControlledPlant } from './joined.ts';

/** What a loop did in a run; SI. */
export interface LoopReport extends LoopHistory {
  readonly name: string;
  /** At the end. */
  readonly automaticAtEnd: boolean;
  readonly outputAtEnd: number;
  readonly measurementAtEnd: number;
  /** s of the run. */
  readonly span: number;
  /** Moments at which devices could move an input, and steps that the run took. */
  readonly moves: number;
}

/** `from`: s at which the run began. */
export function loopReports(
  c: ControlledPlant,
  devices: readonly SampledLoop[],
  run: Run,
  from = 0,
): LoopReport[] {
  return c.loops.map(({ loop }) => {
    const d = devices.find((q) => q.name === loop.name) as SampledLoop;
    d.finish(run.time);
    return {
      ...d.history,
      name: loop.name,
      automaticAtEnd: d.automatic,
      outputAtEnd: d.output.at(run.time),
      measurementAtEnd: d.measurement,
      span: run.time - from,
      moves: run.moves,
    };
  });
}

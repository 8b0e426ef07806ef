import type { Network } from '../scenario/network.ts';
import type { Phase, Train } from '../scenario/scenario.ts';

/** Streams that a train takes and makes of a phase: its own, side feeds and draws. */
export interface TrainStreams {
  readonly in: readonly string[];
  readonly out: readonly string[];
}

export function trainStreams(t: Train, index: number, network: Network, phase: Phase): TrainStreams {
  return {
    in: [t[phase].from, ...t.stages.flatMap((_, j) => network.sides(index, j, phase))],
    out: [
      t[phase].to,
      ...t.stages.flatMap((q) => q.draws.filter((d) => d.phase === phase).map((d) => d.name)),
    ],
  };
}

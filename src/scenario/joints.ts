import type { Joints } from './network.ts';
import type { Scenario } from './scenario.ts';

/** How the streams of a checked scenario join. */
export const jointsOf = (s: Scenario): Joints => ({
  feeds: s.feeds,
  tanks: s.tanks,
  trains: s.trains.map((t) => ({
    name: t.name,
    aqueous: t.aqueous,
    organic: t.organic,
    sides: t.stages.flatMap((q, stage) => q.takes.map((stream) => ({ stage, stream }))),
    draws: t.stages.flatMap((q, stage) => q.draws.map(({ name, phase }) => ({ stage, name, phase }))),
  })),
  splits: s.splits.map((q) => ({ stream: q.stream, branches: [...q.branches.map((b) => b.name), q.rest] })),
  blends: s.blends,
});

import { type Spread, workersOf } from '../workers.ts';
import type { Batch, Sample } from './sample.ts';

export { cores } from '../workers.ts';

/** Computes batches of samples, at most so many at a time, and hands back each result when it is there. */
export type Compute = Spread<Batch, readonly Sample[]>;

/** All batches on a pool of worker threads. @throws Error where the program is not built. */
export const onWorkers = (workers: number): Compute => workersOf('ensemble-worker.js', workers);

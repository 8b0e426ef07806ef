import { setMaxListeners } from 'node:events';
import { existsSync } from 'node:fs';
import { availableParallelism } from 'node:os';
import { dirname, join } from 'node:path';
import type { Batch, Sample } from './sample.ts';

/** Computes batches, at most so many at a time, and hands back each result when it is there. */
export type Compute = (
  batches: readonly Batch[],
  done: (index: number, result: readonly Sample[]) => void,
  stop: AbortSignal,
) => Promise<void>;

export const cores = (): number => availableParallelism();

/**
 * All batches on a pool of worker threads. An abort ends what is under way; what was done is kept.
 *
 * @throws Error where the program is not built: workers run the built file.
 */
export const onWorkers =
  (workers: number): Compute =>
  async (batches, done, stop) => {
    const { Tinypool } = await import('tinypool');
    // Every task under way listens for the abort.
    setMaxListeners(0, stop);
    const count = Math.max(1, Math.min(workers, batches.length));
    const pool = new Tinypool({
      filename: workerFile(),
      minThreads: count,
      maxThreads: count,
      isolateWorkers: false,
    });
    try {
      await Promise.all(
        batches.map(async (batch, i) => {
          done(i, (await pool.run(batch, { signal: stop })) as Sample[]);
        }),
      );
    } catch (e) {
      if (!stop.aborted) throw e;
    } finally {
      await pool.destroy();
    }
  };

/** The worker as the build makes it, beside the command or in `dist` of a folder above. */
function workerFile(): string {
  for (let folder = import.meta.dirname; folder !== dirname(folder); folder = dirname(folder))
    for (const path of [join(folder, 'ensemble-worker.js'), join(folder, 'dist/ensemble-worker.js')])
      if (existsSync(path)) return path;
  throw new Error('ensemble-worker.js is not built; run npm run build');
}

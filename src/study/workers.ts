import { setMaxListeners } from 'node:events';
import { existsSync } from 'node:fs';
import { availableParallelism } from 'node:os';
import { dirname, join } from 'node:path';

/** Computes pieces of work, at most so many at a time, and hands back each result when it is there. */
export type Spread<B, R> = (
  batches: readonly B[],
  done: (index: number, result: R) => void,
  stop: AbortSignal,
) => Promise<void>;

export const cores = (): number => availableParallelism();

/**
 * All pieces on a pool of worker threads that run `file`. An abort ends what is under way; what was done is kept.
 *
 * @throws Error where the program is not built: workers run the built file.
 */
export const workersOf =
  <B, R>(file: string, workers: number): Spread<B, R> =>
  async (batches, done, stop) => {
    const { Tinypool } = await import('tinypool');
    // Every task under way listens for the abort.
    setMaxListeners(0, stop);
    const count = Math.max(1, Math.min(workers, batches.length));
    const pool = new Tinypool({
      filename: built(file),
      minThreads: count,
      maxThreads: count,
      isolateWorkers: false,
    });
    try {
      await Promise.all(
        batches.map(async (batch, i) => {
          done(i, (await pool.run(batch, { signal: stop })) as R);
        }),
      );
    } catch (e) {
      if (!stop.aborted) throw e;
    } finally {
      await pool.destroy();
    }
  };

/** A worker as the build makes it, beside the command or in `dist` of a folder above. */
function built(file: string): string {
  for (let folder = import.meta.dirname; folder !== dirname(folder); folder = dirname(folder))
    for (const path of [join(folder, file), join(folder, 'dist', file)]) if (existsSync(path)) return path;
  throw new Error(`${file} is not built; run npm run build`);
}

import { commissionScreen } from '../../report/commission-screen.ts';
import { commissionSummary } from '../../report/commission-summary.ts';
import { type CommissionResult, commission as findStartUp } from '../../study/commission/commission.ts';
import { ensemble } from '../../study/commission/ensemble.ts';
import { cores, onWorkers } from '../../study/commission/pool.ts';
import { usual } from '../../study/run.ts';
import type { Console } from '../console.ts';
import { draw, ending } from '../drawing.ts';
import { makeFolder, openScenario, outputFolder, version, writeJson } from '../files.ts';
import { writePage } from '../page.ts';
import { known, refusing } from '../refusing.ts';

export interface CommissionOptions {
  readonly out?: string;
  readonly pictures: boolean;
  readonly scale: string;
  readonly ensemble: number;
  readonly seed: number;
  readonly workers?: number;
}

/** `upsettle commission FILE`: when the plant comes good, why not sooner, and what to do about it. */
export async function commission(
  file: string,
  options: CommissionOptions,
  console: Console,
): Promise<number> {
  const began = performance.now();
  const folder = outputFolder(file, 'commission', options.out);
  const read = openScenario(file);
  const found = refusing(read, () =>
    findStartUp(read.scenario, { ...usual, progress: (share) => console.progress(share, 'start-up') }),
  );
  const stop = new AbortController();
  const onInterrupt = (): void => stop.abort();
  process.on('SIGINT', onInterrupt);
  const uncertain = read.scenario.commissioning?.uncertain ?? [];
  const wanted = uncertain.length > 0 && options.ensemble > 0 && found.fan !== null;
  const spread = wanted
    ? await ensemble(
        found.proper,
        uncertain,
        {
          ...usual,
          ...(found.fan as NonNullable<typeof found.fan>),
          runs: options.ensemble,
          seed: options.seed,
          progress: (share) => console.progress(share, 'ensemble'),
          stop: stop.signal,
        },
        onWorkers(options.workers ?? cores()),
      ).catch((e) => {
        throw known(read, e);
      })
    : null;
  console.clear();
  const result: CommissionResult = { ...found, ensemble: spread };
  const seconds = (performance.now() - began) / 1e3;
  makeFolder(folder);
  const summary = commissionSummary(result, { file, version: version(), seconds });
  writeJson(folder, 'summary.json', summary);
  const made = ['summary.json'];
  const lines = commissionScreen(result);
  console.say(lines);
  if (options.pictures) {
    const { commissionPictures } = await import('../../report/pictures/index.ts');
    const stopped = (): boolean => stop.signal.aborted;
    const drawn = await draw(commissionPictures(result, Number(options.scale)), folder, console, stopped);
    const { pageFrames } = await import('../../report/page/frames.ts');
    const { framesOf } = await import('../../study/frames.ts');
    const frames = pageFrames(result.plant, framesOf(result.plant, result.run.records));
    const { scenario } = read;
    made.push(
      ...(await writePage(folder, { verb: 'commission', file, scenario, lines, summary, frames }, drawn)),
    );
  }
  process.off('SIGINT', onInterrupt);
  console.say(['', `Written to ${folder}: ${made.join(', ')}`]);
  return await ending(folder, stop.signal.aborted, result.followed.stop);
}

import { runScreen } from '../../report/screen.ts';
import { seriesLines } from '../../report/series.ts';
import { runSummary } from '../../report/summary.ts';
import { quantity } from '../../scenario/units.ts';
import { type RunSettings, runInTurns } from '../../study/run.ts';
import type { Console } from '../console.ts';
import { draw, ending } from '../drawing.ts';
import { exits, Known } from '../exit.ts';
import { GrowingFile, makeFolder, openScenario, outputFolder, version, writeJson } from '../files.ts';
import { writePage } from '../page.ts';
import { known } from '../refusing.ts';

export interface RunOptions {
  readonly out?: string;
  readonly pictures: boolean;
  readonly scale: string;
  readonly integrator: string;
  readonly tolerance: number;
  readonly saveState?: string;
  readonly saveAt?: string;
}

/** ms of computing between two looks at the outside world. */
const TURN = 100;

/** When the state is kept. @throws Known where that is no time of the run. */
function keepAt({ saveAt, saveState }: RunOptions, horizon: number): { keepAt?: number } {
  if (saveAt === undefined) return {};
  const q = quantity(saveAt, 'a time');
  if (saveState === undefined) throw new Known('--save-at goes with --save-state', exits.usage);
  if ('wrong' in q) throw new Known(`--save-at: ${q.wrong}`, exits.usage);
  if (q.value < 0 || q.value > horizon)
    throw new Known(`--save-at: the run ends at ${horizon / 3600} h; choose a time before`, exits.usage);
  return { keepAt: q.value };
}

/** `upsettle run FILE`: series.csv, summary.json and pictures of one run. */
export async function run(file: string, options: RunOptions, console: Console): Promise<number> {
  const began = performance.now();
  const folder = outputFolder(file, 'run', options.out);
  const read = openScenario(file);
  let interrupted = false;
  const onInterrupt = (): void => {
    interrupted = true;
  };
  process.on('SIGINT', onInterrupt);
  let last = performance.now();
  const due = (): boolean => {
    const now = performance.now();
    if (now - last < TURN) return false;
    last = now;
    return true;
  };
  const settings: RunSettings = {
    integrator: options.integrator,
    tolerance: options.tolerance,
    progress: (share) => console.progress(share, 'running'),
    rows: (plant, derived) => {
      makeFolder(folder);
      const lines = seriesLines(plant, derived);
      const file = new GrowingFile(folder, 'series.csv');
      file.add(lines.header);
      return { row: (t, y) => file.add(lines.line(t, y)), end: () => file.close() };
    },
    ...keepAt(options, read.scenario.horizon),
  };
  const result = await runInTurns(read.scenario, settings, { due, interrupted: () => interrupted }).catch(
    (e) => {
      throw known(read, e);
    },
  );
  console.clear();
  const seconds = (performance.now() - began) / 1e3;
  const summary = runSummary(result, { file, version: version(), seconds });
  writeJson(folder, 'summary.json', summary);
  const made = ['series.csv', 'summary.json'];
  if (options.saveState !== undefined && result.kept) {
    writeJson('.', options.saveState, result.kept);
    console.say([`State kept in ${options.saveState}; start another run from it with start: {saved: FILE}`]);
  }
  const lines = runScreen(result);
  console.say(lines);
  if (options.pictures) {
    const { runPictures } = await import('../../report/pictures/index.ts');
    const stopped = (): boolean => interrupted;
    const drawn = await draw(runPictures(result, Number(options.scale)), folder, console, stopped);
    const { pageFrames } = await import('../../report/page/frames.ts');
    const { framesOf } = await import('../../study/frames.ts');
    const frames = pageFrames(result.plant, framesOf(result.plant, result.records));
    const { scenario } = read;
    made.push(...(await writePage(folder, { verb: 'run', file, scenario, lines, summary, frames }, drawn)));
  }
  process.off('SIGINT', onInterrupt);
  console.say(['', `Written to ${folder}: ${made.join(', ')}`]);
  return await ending(folder, interrupted, result.stop);
}

import { rehearseScreen } from '../../report/rehearse-screen.ts';
import { rehearseSummary } from '../../report/rehearse-summary.ts';
import { hint } from '../../scenario/nearest.ts';
import { show } from '../../scenario/show.ts';
import { type MapBatch, type MapCell, type StartSizeMap, startSizeMap } from '../../study/rehearse/map.ts';
import { type RehearseResult, rehearse as rehearseUpsets } from '../../study/rehearse/rehearse.ts';
import { usual } from '../../study/run.ts';
import { cores, workersOf } from '../../study/workers.ts';
import type { Console } from '../console.ts';
import { draw, ending } from '../drawing.ts';
import { exits, Known } from '../exit.ts';
import { makeFolder, openScenario, outputFolder, version, writeJson } from '../files.ts';
import { writePage } from '../page.ts';
import { refusing } from '../refusing.ts';

export interface RehearseOptions {
  readonly out?: string;
  readonly pictures: boolean;
  readonly scale: string;
  readonly map?: string;
  readonly mapOf: 'worst' | 'time';
  readonly grid: readonly [number, number];
  readonly workers?: number;
}

/** `upsettle rehearse FILE`: the upsets against doing nothing and against each answer. */
export async function rehearse(file: string, options: RehearseOptions, console: Console): Promise<number> {
  const began = performance.now();
  const folder = outputFolder(file, 'rehearse', options.out);
  const read = openScenario(file);
  const names = (read.scenario.rehearsing?.answers ?? []).map((a) => a.name);
  if (options.map !== undefined && !names.includes(options.map))
    throw new Known(`--map: no answer ${show(options.map)}${hint(options.map, names)}`, exits.usage);
  const result = refusing(read, () =>
    rehearseUpsets(read.scenario, usual, (share) => console.progress(share, 'rehearsing')),
  );
  const stop = new AbortController();
  const onInterrupt = (): void => stop.abort();
  process.on('SIGINT', onInterrupt);
  const map = await mapOf(result, options, console, stop.signal);
  console.clear();
  const seconds = (performance.now() - began) / 1e3;
  makeFolder(folder);
  const summary = rehearseSummary(result, { file, version: version(), seconds }, map);
  writeJson(folder, 'summary.json', summary);
  const made = ['summary.json'];
  const lines = rehearseScreen(result);
  console.say(lines);
  if (options.pictures) {
    const { rehearsePictures } = await import('../../report/pictures/index.ts');
    const stopped = (): boolean => stop.signal.aborted;
    const pictures = rehearsePictures({ result, map }, Number(options.scale));
    const drawn = await draw(pictures, folder, console, stopped);
    const { scenario } = read;
    made.push(...(await writePage(folder, { verb: 'rehearse', file, scenario, lines, summary }, drawn)));
  }
  process.off('SIGINT', onInterrupt);
  console.say(['', `Written to ${folder}: ${made.join(', ')}`]);
  return await ending(folder, stop.signal.aborted, result.stop);
}

/** The map that was asked for; null where none was, or where it was interrupted. */
async function mapOf(
  result: RehearseResult,
  { map: answer, mapOf: of, grid: [columns, rows], workers }: RehearseOptions,
  console: Console,
  stop: AbortSignal,
): Promise<StartSizeMap | null> {
  if (answer === undefined) return null;
  const progress = (share: number): void => console.progress(share, 'map');
  const compute = workersOf<MapBatch, MapCell[][]>('map-worker.js', workers ?? cores());
  const map = await startSizeMap(result, answer, { columns, rows, of, progress, stop }, compute);
  return stop.aborted ? null : map;
}

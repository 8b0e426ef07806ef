import { steadyScreen } from '../../report/screen.ts';
import { steadySummary } from '../../report/summary.ts';
import { steady as findSteady } from '../../study/steady.ts';
import type { Console } from '../console.ts';
import { draw } from '../drawing.ts';
import { exits } from '../exit.ts';
import { makeFolder, openScenario, outputFolder, version, writeJson } from '../files.ts';
import { writePage } from '../page.ts';
import { refusing } from '../refusing.ts';

export interface SteadyOptions {
  readonly out?: string;
  readonly pictures: boolean;
  readonly scale: string;
}

/** `upsettle steady FILE`: the steady state of the inputs at time zero. */
export async function steady(file: string, options: SteadyOptions, console: Console): Promise<number> {
  const began = performance.now();
  const folder = outputFolder(file, 'steady', options.out);
  const read = openScenario(file);
  const result = refusing(read, () => findSteady(read.scenario));
  const seconds = (performance.now() - began) / 1e3;
  makeFolder(folder);
  const summary = steadySummary(result, { file, version: version(), seconds });
  writeJson(folder, 'summary.json', summary);
  const lines = steadyScreen(result);
  const made = ['summary.json'];
  if (options.pictures) {
    const { steadyPictures } = await import('../../report/pictures/index.ts');
    const drawn = await draw(steadyPictures(result, Number(options.scale)), folder, console);
    const { scenario } = read;
    made.push(...(await writePage(folder, { verb: 'steady', file, scenario, lines, summary }, drawn)));
  }
  console.say([...lines, '', `Written to ${folder}: ${made.join(', ')}`]);
  return exits.done;
}

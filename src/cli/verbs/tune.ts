import { tuneScreen } from '../../report/tune-screen.ts';
import { tuneSummary } from '../../report/tune-summary.ts';
import { BadData } from '../../scenario/csv.ts';
import { type ReadStepTest, readStepTest } from '../../scenario/step-test.ts';
import { tune as chooseAndProve } from '../../study/tune/tune.ts';
import type { Console } from '../console.ts';
import { draw } from '../drawing.ts';
import { exits, Known } from '../exit.ts';
import { makeFolder, openScenario, outputFolder, version, writeJson } from '../files.ts';
import { writePage } from '../page.ts';
import { refusing } from '../refusing.ts';

export interface TuneOptions {
  readonly out?: string;
  readonly pictures: boolean;
  readonly scale: string;
  readonly loop?: string;
  readonly ms: number;
  readonly range: number;
  readonly test?: string;
}

/** `upsettle tune FILE`: settings for a loop, with their margins, proved on the plant. */
export async function tune(file: string, options: TuneOptions, console: Console): Promise<number> {
  const began = performance.now();
  const folder = outputFolder(file, 'tune', options.out);
  const read = openScenario(file);
  const result = refusing(read, () =>
    chooseAndProve(read.scenario, {
      ...(options.loop === undefined ? {} : { loop: options.loop }),
      ...(options.test === undefined ? {} : { test: stepTest(options.test) }),
      sensitivity: options.ms,
      range: options.range,
    }),
  );
  const seconds = (performance.now() - began) / 1e3;
  makeFolder(folder);
  const summary = tuneSummary(result, { file, version: version(), seconds });
  writeJson(folder, 'summary.json', summary);
  const made = ['summary.json'];
  const lines = tuneScreen(result);
  console.say(lines);
  if (options.pictures && result.kind === 'tuned') {
    const { tunePictures } = await import('../../report/pictures/tune.ts');
    const drawn = await draw(tunePictures(result, Number(options.scale)), folder, console);
    const { scenario } = read;
    made.push(...(await writePage(folder, { verb: 'tune', file, scenario, lines, summary }, drawn)));
  }
  console.say(['', `Written to ${folder}: ${made.join(', ')}`]);
  return exits.done;
}

function stepTest(file: string): ReadStepTest {
  try {
    return readStepTest(file);
  } catch (e) {
    if (e instanceof BadData) throw new Known(e.message, exits.refused);
    throw e;
  }
}
